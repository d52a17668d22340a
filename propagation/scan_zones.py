"""Lengths over sea and land of one path that meets water, compiled (P.1812, sections 3.2, 3.6 and 4.5).

`terrain.water.zones`, `p1812.climate.zone_lengths` and `p1546.path.sea_length_km` are the plain forms.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from terrain.compiled import compiled
from terrain.water import COASTAL_BELOW_M, LARGE_WATER_KM

COASTAL_WITHIN_KM = 50.0


@compiled
def all_inland(length_km: float, out: NDArray[np.void]) -> None:
    """Fill in a path without water."""
    out[0].sea_km = 0.0
    out[0].longest_land_km = out[0].longest_inland_km = length_km
    out[0].tx_coast_km = out[0].rx_coast_km = -1.0
    out[0].rx_at_sea = False


@compiled
def mark_lakes(height_m: NDArray[np.float32], length_km: float, wet: NDArray[np.bool_]) -> bool:
    """Mark ground that stays level for 100 km between higher shores as water; whether there is any.

    `terrain.water.zones` has the rule.
    """
    n = height_m.size
    step = length_km / (n - 1)
    if length_km < LARGE_WATER_KM:
        return False
    level = np.int32(0)
    for i in range(n - 1):
        level += np.int32(height_m[i] == height_m[i + 1])
    if level * step < LARGE_WATER_KM:
        return False
    found = False
    first = 0
    for i in range(1, n + 1):
        if i < n and height_m[i] == height_m[first]:
            continue
        shore_before = first == 0 or height_m[first - 1] > height_m[first]
        shore_after = i == n or height_m[i] > height_m[first]
        whole = first == 0 and i == n
        if (i - 1 - first) * step >= LARGE_WATER_KM and shore_before and shore_after and not whole:
            wet[first:i] = True
            found = True
        first = i
    return found


@compiled
def zone_lengths(
    wet: NDArray[np.bool_],  # (n,)
    height_m: NDArray[np.float32],  # (n,) as sampled
    inland: NDArray[np.bool_],  # scratch (n,)
    length_km: float,
    out: NDArray[np.void],  # (1,) of SCAN
) -> None:
    """Fill in a path with water. A point stands for half of the interval on either side of it."""
    n = wet.size
    step = length_km / (n - 1)
    reach = COASTAL_WITHIN_KM / step

    water = -n  # number of the nearest water before the point
    for i in range(n):
        if wet[i]:
            water = i
        inland[i] = not wet[i] and (i - water > reach or not height_m[i] < np.float32(COASTAL_BELOW_M))
    first_water = last_water = -1
    water = 2 * n  # and after it
    for i in range(n - 1, -1, -1):
        if wet[i]:
            water = first_water = i
            last_water = max(last_water, i)
        elif water - i <= reach and height_m[i] < np.float32(COASTAL_BELOW_M):
            inland[i] = False

    sea = land_run = inland_run = longest_land = longest_inland = 0.0
    for i in range(n):
        share = 0.5 if i == 0 or i == n - 1 else 1.0
        sea += share if wet[i] else 0.0
        land_run = 0.0 if wet[i] else land_run + share
        inland_run = inland_run + share if inland[i] else 0.0
        longest_land, longest_inland = max(longest_land, land_run), max(longest_inland, inland_run)
    out[0].sea_km = sea * step
    out[0].longest_land_km, out[0].longest_inland_km = longest_land * step, longest_inland * step
    out[0].tx_coast_km, out[0].rx_coast_km = first_water * step, (n - 1 - last_water) * step
    out[0].rx_at_sea = wet[n - 1]
