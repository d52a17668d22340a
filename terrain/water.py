"""Water as elevation rasters show it: connected flat areas at 0 m; and the zones of a path."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy import ndimage

# A flat zero area of this size is water. Smaller ones are ponds at sea level, polders and noise;
# 1 km² is about 120 samples at 3 arc-seconds. Our choice.
SMALLEST_WATER_KM2 = 1.0

# Rec. ITU-R P.1812-7, section 3.2: other water counts as sea where it covers a circle of this diameter.
LARGE_WATER_KM = 100.0

# Coastal land lies below 100 m. Five millimetres less: on a flat of exactly 100 m the last digit of an
# interpolation would decide.
COASTAL_BELOW_M = 99.995

SEA, COASTAL_LAND, INLAND = 1, 3, 4  # the numbers that Rec. ITU-R P.1812 gives to zones


def flat_zero_areas(zero: NDArray[np.bool_], spacing_m: float) -> NDArray[np.bool_]:
    """Which samples (r, c) belong to water, given where the height is exactly 0 m.

    Land near sea level is at 0 m here and there: only samples whose eight neighbours are at 0 m, too,
    make an area, connected by sides; it must measure 1 km². Its own rim of zeros then joins it.
    Beyond the raster's edge the ground is taken to go on as at the edge. Missing samples are not water.
    """
    block = np.ones((3, 3), dtype=bool)
    core = ndimage.binary_erosion(zero, block, border_value=1)
    areas, _ = ndimage.label(core)
    size_km2 = np.bincount(areas.ravel()) * (spacing_m / 1e3) ** 2
    large = size_km2 >= SMALLEST_WATER_KM2
    large[0] = False
    water: NDArray[np.bool_] = ndimage.binary_dilation(large[areas], block) & zero
    return water


def zones(
    distance_km: NDArray[np.float64], ground_amsl_m: NDArray[np.float64], water: NDArray[np.bool_]
) -> NDArray[np.int8]:
    """Zone of each point (n,) of a path: 1 sea, 3 coastal land, 4 inland.

    Sea is what `water` says, and a lake that the path crosses for 100 km or more: ground of one and the same
    height between higher shores. A large lake crossed by less of it stays land, as do all smaller ones. Coastal
    land lies below 100 m and within 50 km of sea, here along the path. Points without height count as inland.

    References
    ----------
    Rec. ITU-R P.1812-7, Annex 1, section 3.2 (radio-climatic zones).
    """
    zone = np.full(distance_km.size, INLAND, dtype=np.int8)
    water = water | _large_lakes(distance_km, ground_amsl_m)
    sea_km = distance_km[water]
    if sea_km.size == 0:
        return zone
    after = np.searchsorted(sea_km, distance_km)
    to_sea_km = np.minimum(
        np.abs(distance_km - sea_km[np.minimum(after, sea_km.size - 1)]),
        np.abs(distance_km - sea_km[np.maximum(after - 1, 0)]),
    )
    with np.errstate(invalid="ignore"):
        zone[(to_sea_km <= 50) & (ground_amsl_m < COASTAL_BELOW_M)] = COASTAL_LAND
    zone[water] = SEA
    return zone


def _large_lakes(distance_km: NDArray[np.float64], height_m: NDArray[np.float64]) -> NDArray[np.bool_]:
    """Which points (n,) lie on ground that stays at one height for 100 km or more, between higher shores."""
    level = np.zeros(height_m.size, dtype=bool)
    if distance_km[-1] < LARGE_WATER_KM:
        return level
    borders = np.flatnonzero(np.diff(height_m) != 0) + 1  # NaN differs from everything
    starts, ends = np.append(0, borders), np.append(borders, height_m.size) - 1
    for start, end in zip(starts, ends, strict=True):
        shores = [height_m[beside] for beside in (start - 1, end + 1) if 0 <= beside < height_m.size]
        higher = bool(shores) and all(shore > height_m[start] for shore in shores)  # a level model is no lake
        if higher and distance_km[end] - distance_km[start] >= LARGE_WATER_KM:
            level[start : end + 1] = True
    return level
