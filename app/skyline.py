"""The horizon all round a roof, and which masts stand above or behind it."""

from __future__ import annotations

import math
import pathlib
from typing import Any

import numpy as np

from app.assumptions import Assumptions
from app.errors import RequestError
from app.paths_to_roof import DrawnPath, PathKey, drawn_paths_to_roof
from app.roof import Roof, check
from app.site import site_of
from app.transmitters.model import Transmitter
from app.transmitters.store import Store
from propagation.refraction import effective_earth_radius_km
from propagation.refractivity import refractivity
from terrain.mosaic import Ground
from terrain.skyline import horizon, skyline

SHORTEST_REACH_KM, LONGEST_REACH_KM = 1.0, 150.0
MASTS_KM = 150.0  # the reach within which an answer looks for masts unless told otherwise


def skyline_document(
    ground: Ground,
    store: Store,
    latitude_deg: float,
    longitude_deg: float,
    aerial_agl_m: float = 10.0,
    reach_km: float = 60.0,
    refractivity_maps: pathlib.Path | None = None,
) -> dict[str, Any]:
    """Return the horizon at every half degree, and every mast in reach against the ground before it.

    Angles count from the aerial's horizontal, as straight rays over an Earth of the effective radius. A mast's
    highest antenna stands above the horizon or behind it by the difference of both angles.

    Raises
    ------
    RoofError, RequestError, CoverageError
        The place or a value is not possible: the message says what is.

    References
    ----------
    Rec. ITU-R P.1812-7, Attachment 1, eqs. (77) to (82).
    """
    roof = Roof(latitude_deg, longitude_deg, aerial_agl_m)
    check("reach_km", reach_km, SHORTEST_REACH_KM, LONGEST_REACH_KM, "km", RequestError)
    site = site_of(roof, ground)
    delta_n_per_km, _ = refractivity(latitude_deg, longitude_deg, refractivity_maps)
    radius_km = effective_earth_radius_km(delta_n_per_km).item()
    seen = skyline(ground, latitude_deg, longitude_deg, site.ground_amsl_m + aerial_agl_m, radius_km, reach_km=reach_km)
    return {
        "roof": {
            "latitude_deg": latitude_deg,
            "longitude_deg": longitude_deg,
            "aerial_agl_m": aerial_agl_m,
            "ground_amsl_m": round(site.ground_amsl_m, 2),
        },
        "reach_km": reach_km,
        "effective_earth_radius_km": round(radius_km, 1),
        "bearing_deg": seen.bearing_deg.tolist(),
        "angle_deg": [_number(value, 4) for value in seen.angle_deg.tolist()],
        "distance_km": [_number(value, 3) for value in seen.distance_km.tolist()],
        "missing_share": round(float(seen.missing_share.mean()), 4),
        "transmitters": _masts(roof, store, ground, max(reach_km, MASTS_KM), refractivity_maps),
        "cautions": list(site.cautions),
    }


def _masts(
    roof: Roof, store: Store, ground: Ground, reach_km: float, refractivity_maps: pathlib.Path | None
) -> list[dict[str, Any]]:
    """Each mast in reach, nearest first, by its highest antenna."""
    highest: dict[str, tuple[Transmitter, float, float, float]] = {}
    for emission, mast, distance_km, bearing_deg in store.emissions_within(
        roof.latitude_deg, roof.longitude_deg, reach_km
    ):
        known = highest.get(mast.id)
        antenna_agl_m = emission.antenna_agl_m if known is None else max(known[1], emission.antenna_agl_m)
        highest[mast.id] = mast, antenna_agl_m, distance_km, bearing_deg
    keys = {name: PathKey(mast, antenna_agl_m) for name, (mast, antenna_agl_m, _, _) in highest.items()}
    paths = drawn_paths_to_roof(roof, list(keys.values()), ground, Assumptions(), refractivity_maps)
    rows = []
    for name, (mast, antenna_agl_m, distance_km, bearing_deg) in highest.items():
        path = paths[keys[name]]
        rows.append(
            {
                "id": mast.id,
                "name": mast.name,
                "latitude_deg": mast.latitude_deg,
                "longitude_deg": mast.longitude_deg,
                "distance_km": round(distance_km, 3),
                "bearing_deg": round(bearing_deg, 2),
                "antenna_agl_m": antenna_agl_m,
            }
            | (_against_horizon(path) if isinstance(path, DrawnPath) else {"stands": None, "reason": path})
        )
    return sorted(rows, key=lambda row: float(row["distance_km"]))


def _against_horizon(path: DrawnPath) -> dict[str, Any]:
    """Angles of the antenna and of the highest ground before it, seen from the aerial."""
    digest, profile = path.digest, path.profile
    radius_km, length_km = float(digest.effective_earth_radius_km), float(digest.path_length_km)
    aerial_amsl_m = float(digest.rx_ground_amsl_m) + path.aerial_agl_m
    away_km = length_km - profile.distance_km[1:-1]
    ground_tangent, at_km = horizon(away_km, path.surface_amsl_m[1:-1], aerial_amsl_m, radius_km)
    rise_m = float(digest.tx_ground_amsl_m) + path.antenna_agl_m - aerial_amsl_m
    antenna = math.degrees(math.atan(rise_m / (1e3 * length_km) - length_km / (2 * radius_km)))  # eq. (81)
    horizon_deg = math.degrees(math.atan(float(ground_tangent)))
    return {
        "antenna_deg": round(antenna, 4),
        "horizon_deg": round(horizon_deg, 4),
        "horizon_km": round(float(at_km), 3),
        "above_horizon_deg": round(antenna - horizon_deg, 4),
        "stands": "above" if antenna > horizon_deg else "behind",
        "reason": None,
    }


def _number(value: float, digits: int) -> float | None:
    return round(value, digits) if np.isfinite(value) else None
