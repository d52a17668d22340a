"""Whether a roof can stand where it is said to stand, and how high the ground is there."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from app.errors import RoofError
from app.roof import Roof
from terrain.errors import CoverageError
from terrain.geodesy import destination
from terrain.ground import bare_ground_m
from terrain.mosaic import Ground

FARTHEST_OFFSHORE_M = 500.0
_SEARCH_M = np.arange(25.0, FARTHEST_OFFSHORE_M + 1, 25.0)
_SEARCH_DEG = np.arange(0.0, 360.0, 15.0)


@dataclass(frozen=True, slots=True)
class Site:
    """The ground at a roof."""

    ground_amsl_m: float
    cautions: tuple[str, ...]
    compass: str = ""  # where a compass points there today


def site_of(roof: Roof, ground: Ground, told: str = "") -> Site:
    """Return the ground under a roof; what was `told` of it before joins its cautions.

    Raises
    ------
    CoverageError
        No raster answers there, or only a void does: names the tile to add.
    RoofError
        More than 500 m out at sea. Nearer to land is answered with a caution.
    """
    height_m = bare_ground_m(ground, roof.latitude_deg, roof.longitude_deg).item()
    if not np.isfinite(height_m):
        raise CoverageError(missing_ground(ground, roof.latitude_deg, roof.longitude_deg))
    cautions = (told,) if told else ()
    if not bool(ground.is_water(roof.latitude_deg, roof.longitude_deg)):
        return Site(height_m, cautions)
    shore_m = _distance_to_land_m(roof, ground)
    if shore_m is None:
        raise RoofError(
            f"{place(roof.latitude_deg, roof.longitude_deg)} lies more than {FARTHEST_OFFSHORE_M:.0f} m out "
            "on the water: choose a place on land",
            field="roof",
            allowed=f"land, or water within {FARTHEST_OFFSHORE_M:.0f} m of it",
        )
    return Site(
        height_m, (*cautions, f"The roof stands on water, about {shore_m:.0f} m from land: check the position.")
    )


def missing_ground(ground: Ground, latitude_deg: float, longitude_deg: float) -> str:
    """Say that there is no elevation at a place, and what would bring it."""
    at = place(latitude_deg, longitude_deg)
    inside = [
        raster.name
        for raster in ground.rasters
        if raster.bounds[1] <= latitude_deg <= raster.bounds[3]
        and (raster.bounds[0] <= longitude_deg <= raster.bounds[2] or longitude_deg + 360 <= raster.bounds[2])
    ]
    if inside:
        return (
            f"no elevation at {at}: {', '.join(inside)} has a hole there; "
            "add a raster without it, with `gainworth terrain add FILE`"
        )
    south, west = int(np.floor(latitude_deg)), int(np.floor(longitude_deg))
    tile = f"{'N' if south >= 0 else 'S'}{abs(south):02d}{'E' if west >= 0 else 'W'}{abs(west):03d}"
    return (
        f"no elevation at {at}: fetch tiles with `gainworth terrain get`, "
        f"or add a raster that covers it, such as tile {tile}, with `gainworth terrain add FILE`"
    )


def place(latitude_deg: float, longitude_deg: float) -> str:
    """Write a position as people read it."""
    return (
        f"{abs(latitude_deg):.4f} {'N' if latitude_deg >= 0 else 'S'} "
        f"{abs(longitude_deg):.4f} {'E' if longitude_deg >= 0 else 'W'}"
    )


def _distance_to_land_m(roof: Roof, ground: Ground) -> float | None:
    bearing, metres = np.meshgrid(_SEARCH_DEG, _SEARCH_M)
    latitude, longitude = destination(roof.latitude_deg, roof.longitude_deg, bearing.ravel(), metres.ravel() / 1e3)
    dry = ~ground.is_water(latitude, longitude) & np.isfinite(ground.elevation_m(latitude, longitude))
    return float(metres.ravel()[dry].min()) if dry.any() else None
