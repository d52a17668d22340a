"""Lengths over sea and land of one path that meets water, compiled (P.1812, sections 3.2, 3.6 and 4.5).

`terrain.water.zones`, `p1812.climate.zone_lengths` and `p1546.path.sea_length_km` are the plain forms.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from terrain.compiled import compiled, larger
from terrain.water import COASTAL_BELOW_M, LARGE_WATER_KM

COASTAL_WITHIN_KM = 50.0
STRETCH = 64  # points passed over at once


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
    length_km: float,
    out: NDArray[np.void],  # (1,) of SCAN
) -> None:
    """Fill in a path with water, one stretch of land after the other.

    A point stands for half of the interval on either side of it.
    """
    n = wet.size
    step = length_km / (n - 1)
    reach = int(COASTAL_WITHIN_KM / step)  # points from the water that may be coastal
    first_water = last_water = -1
    land = longest_land = longest_inland = 0.0
    i = 0
    while i < n:
        if wet[i]:
            first_water = i if first_water < 0 else first_water
            i = _next(wet, False, i, n)
            last_water = i - 1
            continue
        start = i
        i = _next(wet, True, i, n)
        stretch = _points(start, i, n)
        land += stretch
        longest_land = max(longest_land, stretch)
        near_before = min(start + reach, i) if start > 0 else start  # coastal is only what lies before this
        near_after = max(i - reach, near_before) if i < n else n  # or from this on
        longest_inland = max(longest_inland, _longest_inland(height_m, start, i, near_before, near_after))
    out[0].sea_km = (n - 1 - land) * step
    out[0].longest_land_km, out[0].longest_inland_km = longest_land * step, longest_inland * step
    out[0].tx_coast_km, out[0].rx_coast_km = first_water * step, (n - 1 - last_water) * step
    out[0].rx_at_sea = wet[n - 1]


@compiled
def _next(wet: NDArray[np.bool_], wanted: bool, first: int, stop: int) -> int:
    """Number of the next point that is water, or is not; `stop` if there is none. Passes over many at once."""
    while first < stop:
        whole = first % STRETCH == 0 and first + STRETCH <= stop
        if whole and _count(wet[first : first + STRETCH]) == (0 if wanted else STRETCH):
            first += STRETCH
            continue
        if wet[first] == wanted:
            break
        first += 1
    return first


@compiled
def _count(wet: NDArray[np.bool_]) -> int:
    count = np.int32(0)
    for k in range(wet.size):
        count += np.int32(wet[k])
    return int(count)


@compiled
def _longest_inland(height_m: NDArray[np.float32], start: int, stop: int, near_before: int, near_after: int) -> float:
    """Longest run of a stretch of land that is not coastal, in points."""
    low = np.float32(COASTAL_BELOW_M)
    n = height_m.size
    longest = 0.0
    run = i = start
    while i < stop:
        if near_before <= i < near_after:
            i = near_after
            continue
        limit = near_before if i < near_before else stop
        if i % STRETCH == 0 and i + STRETCH <= limit and _lowest(height_m[i : i + STRETCH]) >= low:
            i += STRETCH
            continue
        if height_m[i] < low:
            longest = max(longest, _points(run, i, n))
            run = i + 1
        i += 1
    return max(longest, _points(run, stop, n))


@compiled
def _lowest(height_m: NDArray[np.float32]) -> np.float32:
    depth = np.float32(-3e38)
    for k in range(height_m.size):
        depth = larger(depth, -height_m[k])
    return -depth


@compiled
def _points(start: int, stop: int, n: int) -> float:
    """Points from `start` to before `stop`; those at both ends of the path count half."""
    if stop <= start:
        return 0.0
    return stop - start - 0.5 * (start == 0) - 0.5 * (stop == n)
