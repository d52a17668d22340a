"""Ground under one path."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from terrain.errors import PathError
from terrain.geodesy import distance_and_bearing, points_along
from terrain.ground import bare_ground_m
from terrain.mosaic import Ground
from terrain.overlay import with_cover
from terrain.water import zones

FloatArray = NDArray[np.float64]

FEWEST_POINTS = 5
# A path over a 1 m raster for 150 km would be 150,000 points; no method gains from more than these.
MOST_POINTS = 20_001
# Where neither end stands on a raster there is no spacing to follow: about 3 arc-seconds.
_SPACING_WITHOUT_RASTER_M = 90.0

# Bare ground under a surface model is estimated this often: near both ends and between.
NEAR_END_KM, NEAR_KNOT_KM = 0.25, 0.012
KNOT_KM = 0.25


@dataclass(frozen=True, slots=True)
class Profile:
    """Ground under one path, transmitter first, at equal steps along the WGS 84 geodesic."""

    distance_km: FloatArray  # (n,) from 0, rising
    ground_amsl_m: FloatArray  # (n,) as raster and land cover have it, with what stands on it; NaN where missing
    bare_amsl_m: FloatArray  # (n,) bare ground, never above ground_amsl_m (ground.py)
    kinds: tuple[str, ...]  # of the rasters that answered: "bare", "radar-surface", "surface"
    zone: NDArray[np.int8]  # (n,) 1 sea, 3 coastal land, 4 inland (water.py)
    latitude_deg: FloatArray  # (n,)
    longitude_deg: FloatArray  # (n,)
    spacing_m: float  # between points
    missing_share: float  # of the points, without ground: 0 to 1


def sample_profile(
    ground: Ground, lat1: float, lon1: float, lat2: float, lon2: float, spacing_m: float | None = None
) -> Profile:
    """Ground, water and zones under the shortest way from a transmitter to a roof.

    Parameters
    ----------
    ground : the rasters.
    lat1, lon1 : the transmitter. [deg]
    lat2, lon2 : the roof. [deg]
    spacing_m : largest step between points; by default the spacing of the finer raster of those
        under both ends. The path is cut into equal steps, at least 4 and at most 20,000. [m]

    Raises
    ------
    PathError
        A position or the spacing is out of range, or both ends are one place.
    RasterError, CacheError
        As `Ground.elevation_m`.
    """
    _check(lat1, lon1, "the transmitter")
    _check(lat2, lon2, "the roof")
    length_km = float(distance_and_bearing(lat1, lon1, lat2, lon2)[0])
    if length_km == 0:
        raise PathError("the transmitter and the roof are one place: there is no path between them")
    if spacing_m is None:
        found = [s for s in (ground.spacing_m(lat1, lon1), ground.spacing_m(lat2, lon2)) if s == s]
        spacing_m = min(found, default=_SPACING_WITHOUT_RASTER_M)
    if not spacing_m > 0:
        raise PathError(f"a spacing of {spacing_m:g} m is not possible: use a length above 0 m")

    steps = 1e3 * length_km / spacing_m
    points = int(min(max(math.ceil(steps - 1e-9) + 1, FEWEST_POINTS), MOST_POINTS))
    distance_km = np.linspace(0.0, length_km, points)
    lat, lon = points_along(lat1, lon1, lat2, lon2, distance_km)
    height_m, water = ground.elevation_and_water(lat, lon)
    bare_m = _bare_along_m(ground, distance_km, lat, lon, height_m)
    kinds = [ground.kinds[number] if number >= 0 else "" for number in ground.answering(lat, lon).tolist()]
    surface_m = height_m
    if ground.overlay is not None and ground.overlay.cover is not None:
        surface_m = with_cover(ground.overlay.cover, lat, lon, height_m, bare_m, kinds)
    return Profile(
        distance_km=distance_km,
        ground_amsl_m=surface_m,
        bare_amsl_m=bare_m,
        kinds=tuple(sorted({kind for kind in kinds if kind})),
        zone=zones(distance_km, height_m, water),
        latitude_deg=lat,
        longitude_deg=lon,
        spacing_m=1e3 * length_km / (points - 1),
        missing_share=float(np.isnan(height_m).mean()),
    )


def _bare_along_m(
    ground: Ground, distance_km: FloatArray, lat: FloatArray, lon: FloatArray, surface_amsl_m: FloatArray
) -> FloatArray:
    """Bare ground along a path (n,), estimated at some of its points. [m]

    Near both ends, where metres matter, the ground itself is interpolated between estimates; elsewhere what
    stands on it, so that ridges stay where they are.
    """
    to_end_km = np.minimum(distance_km, distance_km[-1] - distance_km)
    near = to_end_km <= NEAR_END_KM
    wanted_km = np.concatenate(
        [
            np.arange(0.0, NEAR_END_KM, NEAR_KNOT_KM),
            distance_km[-1] - np.arange(0.0, NEAR_END_KM, NEAR_KNOT_KM),
            np.arange(0.0, distance_km[-1], KNOT_KM),
        ]
    )
    nearest = np.clip(np.searchsorted(distance_km, wanted_km - 1e-9), 0, distance_km.size - 1)
    knots = np.unique(np.append(nearest, np.flatnonzero(near)[[0, -1]]))
    bare = bare_ground_m(ground, lat[knots], lon[knots])
    known = np.isfinite(bare)
    if not (surface_amsl_m[knots] > bare).any():
        return surface_amsl_m.copy()  # nothing stands anywhere
    at_km, bare = distance_km[knots[known]], bare[known]
    cover_m = np.interp(distance_km, at_km, surface_amsl_m[knots[known]] - bare)
    by_ground = np.interp(distance_km, at_km, bare)
    result: FloatArray = np.where(near, np.minimum(by_ground, surface_amsl_m), surface_amsl_m - cover_m)
    return result


def _check(lat: float, lon: float, what: str) -> None:
    if not (math.isfinite(lat) and math.isfinite(lon) and abs(lat) <= 90 and abs(lon) <= 180):
        raise PathError(
            f"{what} at {lat:g}, {lon:g} is no place on Earth: use a latitude from -90 to 90 "
            "and a longitude from -180 to 180"
        )
