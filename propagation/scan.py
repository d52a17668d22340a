"""The passes over one profile that P.1812 and P.1546 need, compiled: maxima, sums and places, no formula after them.

Rec. ITU-R P.1812-7, section 4.3 and Attachment 1, and Rec. ITU-R P.1546-6, Annex 5; equation numbers are P.1812's
unless said. `digest.path_digest` and `p1812.path_terms` are the plain forms of the same; `fast_digest` closes the
formulas over what is found here.

Points i stand at equal steps s from the transmitter (0) to the roof (n - 1); j = n - 1 - i counts from the roof.
H is the height over the straight line between both antennas, c = 500 s²/a the bulge of an Earth of radius a. What a
ray meets at a point is then, up to constants that do not move a maximum,

    slope from the transmitter, eq. (13):  H / i + c j
    slope from the roof, eq. (17):         H / j + c i
    in Fresnel radii, eq. (15):            (H + c i j) / root(i j)

so that one more radius costs three multiply-adds and three maxima. Tables give 1 / root(i).
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from terrain.compiled import compiled, compiled_as_written, larger
from terrain.kernels import SheetArrays, height_at

FloatArray = NDArray[np.float64]
Heights = NDArray[np.float32]

MOST_POINTS = 20_001
STRETCH = 128  # points between 1 and n - 2 whose maxima are kept, to find places from them
MOST_STRETCHES = MOST_POINTS // STRETCH + 1
_TX, _RX, _NU = 0, 1, 2  # the module's three lines
_CLOSE_M = 0.01  # more than single precision may be wrong by
_number = np.arange(MOST_POINTS, dtype=float)
_number[0] = np.inf  # no point is asked for its distance from itself
ROOT = (1 / np.sqrt(_number)).astype(np.float32)
BACK = ROOT[::-1].copy()  # the same counted from the roof: every load has unit stride

SCAN = np.dtype(
    [
        ("known", "?"),  # false: the samples have a gap, nothing else is filled in
        ("tx_ground_amsl_m", "f8"),
        ("rx_ground_amsl_m", "f8"),
        ("mean_ground_amsl_m", "f8"),  # P.1546, annex 5, section 3.1
        ("tx_slope", "f8"),  # highest of the ground within 15 km [m/km] (P.1546, annex 5, section 4.3)
        ("rx_slope", "f8"),  # within 16 km (section 11)
        ("tx_fit_amsl_m", "f8"),  # eq. (87)
        ("rx_fit_amsl_m", "f8"),  # eq. (88)
        ("over_line_m", "f8"),  # eq. (89): highest, and its slopes [m/km]
        ("over_line_from_tx", "f8"),
        ("over_line_from_rx", "f8"),
        *((f"{ray}_{radius}", "f8") for radius in ("median", "true_earth", "beta0") for ray in ("tx", "rx", "nu")),
        *((f"{end}_horizon_{radius}", "f8") for radius in ("median", "true_earth") for end in ("tx", "rx")),
        ("worst_km", "f8"),  # where the ground comes nearest to the ray in Fresnel radii
        ("worst_into_line_m", "f8"),
        ("line_of_sight", "?"),
        ("tx_horizon_km", "f8"),  # eq. (80); from the transmitter
        ("rx_horizon_km", "f8"),  # from the roof
        ("roughness_m", "f8"),  # eq. (95)
        ("sea_km", "f8"),
        ("longest_land_km", "f8"),
        ("longest_inland_km", "f8"),
        ("tx_coast_km", "f8"),  # to the first water; negative without any
        ("rx_coast_km", "f8"),
        ("rx_at_sea", "?"),
    ]
)


@compiled
def scan_profile(
    sheet: SheetArrays,
    row: FloatArray,  # (k,) of the geodesic's knots
    column: FloatArray,
    height: Heights,  # (n,) bare ground
    surface: Heights,  # (n,) what a ray meets, equal to the ground at both ends; the same array where nothing stands
    standing: Heights,  # (n,) surface less ground, exactly; () where nothing stands
    length_km: float,
    antenna_agl_m: float,
    aerial_agl_m: float,
    bulges: tuple[float, float, float],  # 500/a per km² at the median, for the true Earth, at beta0
    root: Heights,  # (n,) 1 / root(i)
    back: Heights,  # (n,) 1 / root(j)
    tops: Heights,  # (MOST_STRETCHES, 12) is left with what `ray_source` needs
    ground_tops: Heights,  # the same, for the bare ground where something stands
    out: NDArray[np.void],  # (1,) of SCAN
) -> None:
    """Scan one profile."""
    n = height.size
    covered = standing.size > 0
    step = length_km / (n - 1)
    tx_amsl, rx_amsl = height[0] + antenna_agl_m, height[n - 1] + aerial_agl_m
    slope = (rx_amsl - tx_amsl) / length_km
    median = bulges[0] * step**2

    _ground(height, length_km, tx_amsl, rx_amsl, out)
    bends = (median, bulges[1] * step**2, bulges[2] * step**2)
    rays = _all_rays(surface, root, back, tx_amsl, rx_amsl, bends, tops)
    ground_rays = _all_rays(height, root, back, tx_amsl, rx_amsl, bends, ground_tops) if covered else rays
    to_nu = math.sqrt(0.002 * length_km) / step
    out[0].tx_median, out[0].rx_median, out[0].nu_median = (
        rays[0] / step + slope,
        rays[1] / step - slope,
        rays[2] * to_nu,
    )
    out[0].tx_true_earth, out[0].rx_true_earth = rays[3] / step + slope, rays[4] / step - slope
    out[0].nu_true_earth = rays[5] * to_nu
    out[0].tx_beta0, out[0].rx_beta0, out[0].nu_beta0 = rays[6] / step + slope, rays[7] / step - slope, rays[8] * to_nu
    out[0].tx_horizon_median, out[0].rx_horizon_median = ground_rays[0] / step + slope, ground_rays[1] / step - slope
    out[0].tx_horizon_true_earth = ground_rays[3] / step + slope
    out[0].rx_horizon_true_earth = ground_rays[4] / step - slope
    out[0].over_line_m = ground_rays[9]
    out[0].over_line_from_tx, out[0].over_line_from_rx = ground_rays[10] / step, ground_rays[11] / step

    # The ray meets the ground where the slope to the highest point exceeds that to the other antenna, eq. (78).
    sees = not ground_rays[0] > 0
    ends = (tx_amsl, rx_amsl, median)
    last_of_equals = sees and not covered
    nearest = _place(sheet, row, column, surface, standing, ends, root, back, tops, _NU, last_of_equals, n - 1)
    first_horizon = last_horizon = nearest
    if covered or not sees:
        bare = standing[:0]
        bare_tops = ground_tops if covered else tops
        if sees:
            first_horizon = _place(sheet, row, column, height, bare, ends, root, back, bare_tops, _NU, True, n - 1)
            last_horizon = first_horizon
        else:
            first_horizon = _place(sheet, row, column, height, bare, ends, root, back, bare_tops, _TX, False, n - 1)
            last_horizon = _place(sheet, row, column, height, bare, ends, root, back, bare_tops, _RX, True, n - 1)
    out[0].line_of_sight = sees
    out[0].tx_horizon_km, out[0].rx_horizon_km = first_horizon * step, length_km - last_horizon * step
    out[0].roughness_m = _roughness_m(
        height,
        min(first_horizon, last_horizon),
        max(first_horizon, last_horizon),
        out[0].tx_fit_amsl_m,
        out[0].rx_fit_amsl_m,
    )
    x = nearest * step
    out[0].worst_km = x
    out[0].worst_into_line_m = surface[nearest] - (tx_amsl + slope * x) + bulges[0] * x * (length_km - x)


@compiled
def _all_rays(
    height: Heights,
    root: Heights,
    back: Heights,
    tx_amsl: float,
    rx_amsl: float,
    bends: tuple[float, float, float],  # bulges per step²
    tops: Heights,  # result (MOST_STRETCHES, 12): `_rays` of each stretch
) -> Heights:
    """`_rays` of all points between both ends. (12,)"""
    n = height.size
    stretches = (n - 3) // STRETCH + 1
    for number in range(stretches):
        first = 1 + number * STRETCH
        last = min(first + STRETCH, n - 1)
        tops[number] = _rays(height, root, back, first, last, tx_amsl, rx_amsl, bends[0], bends[1], bends[2])
    rays: Heights = tops[0].copy()
    for number in range(1, stretches):
        for ray in range(rays.size):
            rays[ray] = max(rays[ray], tops[number, ray])
    return rays


@compiled
def _rays(
    height: Heights,
    root: Heights,
    back: Heights,
    first: int,
    last: int,
    tx_amsl: float,
    rx_amsl: float,
    bulge_0: float,
    bulge_1: float,
    bulge_2: float,
) -> tuple[np.float32, ...]:
    """Largest, from one point to before another, of the module's three lines at three bulges, of H, H / i, H / j."""
    n = height.size
    part, part_root, part_back = height[first:last], root[first:last], back[first:last]
    rise = np.float32((rx_amsl - tx_amsl) / (n - 1))
    start = np.float32(tx_amsl + (rx_amsl - tx_amsl) / (n - 1) * first)
    c0, c1, c2 = np.float32(bulge_0), np.float32(bulge_1), np.float32(bulge_2)
    before, after = np.float32(first), np.float32(n - 1 - first)
    least = np.float32(-3e38)
    tx0 = tx1 = tx2 = rx0 = rx1 = rx2 = nu0 = nu1 = nu2 = over = over_tx = over_rx = least
    for k in range(part.size):
        number = np.float32(np.int32(k))
        i, j = before + number, after - number
        p, q = part_root[k], part_back[k]
        above = part[k] - (start + rise * number)
        from_tx, from_rx, in_nu, bulge_in_nu = above * p * p, above * q * q, above * p * q, i * p * j * q
        over, over_tx, over_rx = larger(over, above), larger(over_tx, from_tx), larger(over_rx, from_rx)
        tx0, rx0 = larger(tx0, from_tx + c0 * j), larger(rx0, from_rx + c0 * i)
        tx1, rx1 = larger(tx1, from_tx + c1 * j), larger(rx1, from_rx + c1 * i)
        tx2, rx2 = larger(tx2, from_tx + c2 * j), larger(rx2, from_rx + c2 * i)
        nu0 = larger(nu0, in_nu + c0 * bulge_in_nu)
        nu1 = larger(nu1, in_nu + c1 * bulge_in_nu)
        nu2 = larger(nu2, in_nu + c2 * bulge_in_nu)
    return tx0, rx0, nu0, tx1, rx1, nu1, tx2, rx2, nu2, over, over_tx, over_rx


@compiled
def _place(
    sheet: SheetArrays,
    row: FloatArray,
    column: FloatArray,
    height: Heights,
    standing: Heights,  # part of it that stands on the ground; () for none
    ends: tuple[float, float, float],  # antenna and aerial above sea level, bulge per step²
    root: Heights,
    back: Heights,
    tops: Heights,
    ray: int,
    last: bool,
    stop: int,
) -> int:
    """Where one of the module's three lines is largest, from 1 to before `stop`; of equals the first or the last.

    In double precision: where two points are equal but for a millimetre, the horizon must not jump between them.
    Single precision has found the stretch; points of it and a few beside are asked if they come close to its maximum.
    """
    tx_amsl, rx_amsl, bulge = ends
    n = height.size
    best, best_first = np.float32(-3e38), 1
    for number in range(MOST_STRETCHES):
        first = 1 + number * STRETCH
        if first >= stop:
            break
        top = tops[number, ray]
        if stop < min(first + STRETCH, n - 1):
            top = _rays(height, root, back, first, stop, tx_amsl, rx_amsl, bulge, bulge, bulge)[ray]
        if top > best or (last and top == best):
            best, best_first = top, first

    one, other = back if ray == _RX else root, root if ray == _TX else back
    place, largest = best_first, -1e300
    for i in range(max(1, best_first - 8), min(best_first + STRETCH + 8, stop)):
        bent_line = tx_amsl + (rx_amsl - tx_amsl) * i / (n - 1) - bulge * i * (n - 1 - i)
        if (height[i] - bent_line + _CLOSE_M) * one[i] * other[i] < best:
            continue
        above = height_at(sheet, row, column, n, i) - bent_line
        if standing.size > 0:
            above += standing[i]
        if ray == _TX:
            value = above / i
        elif ray == _RX:
            value = above / (n - 1 - i)
        else:
            value = above / math.sqrt(i * (n - 1 - i))
        if value > largest or (last and value == largest):
            place, largest = i, value
    return place


@compiled
def _ground(bare: Heights, length_km: float, tx_amsl: float, rx_amsl: float, out: NDArray[np.void]) -> None:
    """Heights at both ends, mean height, slopes near the ends, smooth-Earth fit."""
    n = bare.size
    step = length_km / (n - 1)
    first_m, last_m = float(bare[0]), float(bare[n - 1])
    out[0].tx_ground_amsl_m, out[0].rx_ground_amsl_m = first_m, last_m

    # P.1546, annex 5, section 3.1: 3 to 15 km from the transmitter, or 0.2 d to d on paths below 15 km.
    low, high = (3.0, 15.0) if length_km >= 15 else (0.2 * length_km, length_km)
    first, last = _first_from(low, length_km, n), _last_within(high, length_km, n)
    inside = _sum(bare, first, last + 1, first_m)[0] - (bare[first] - first_m + bare[last] - first_m) / 2
    out[0].mean_ground_amsl_m = first_m + inside / (last - first)

    # Sections 4.3 and 11: the highest elevation angle up to 15 km from the mast and 16 km from the roof.
    out[0].tx_slope = _steepest(bare, 1, _last_within(15.0, length_km, n), 0, tx_amsl) / step
    reach = _last_within(16.0, length_km, n)
    out[0].rx_slope = _steepest(bare, n - 1 - reach, n - 2, n - 1, rx_amsl) / step

    # Eqs. (85) to (88) for equal steps, heights counted from the first point.
    total, moment = _sum(bare, 1, n - 1, first_m)
    rise = last_m - first_m
    v1 = step * (2 * total + rise)
    v2 = step**2 * (6 * moment + rise * (3 * (n - 1) - 1))
    out[0].tx_fit_amsl_m = first_m + (2 * v1 * length_km - v2) / length_km**2
    out[0].rx_fit_amsl_m = first_m + (v2 - v1 * length_km) / length_km**2


@compiled_as_written
def _first_from(limit_km: float, length_km: float, n: int) -> int:
    """Number of the first point at this distance or beyond."""
    step = length_km / (n - 1)
    i = max(0, int(limit_km / step) - 1)
    while i < n - 1 and i * step < limit_km:
        i += 1
    return i


@compiled_as_written
def _last_within(limit_km: float, length_km: float, n: int) -> int:
    """Number of the last point at this distance or before."""
    if length_km <= limit_km:
        return n - 1
    step = length_km / (n - 1)
    i = min(n - 2, int(limit_km / step) + 1)
    while i * step > limit_km:
        i -= 1
    return i


@compiled
def _sum(height: Heights, first: int, last: int, base_m: float) -> tuple[float, float]:
    """Sum of heights over a base and of the same times their number, from the first point up to before the last."""
    part = height[first:last]
    total = moment = 0.0
    for k in range(part.size):
        above = float(part[k]) - base_m
        total += above
        moment += above * np.float64(np.int32(k))
    return total, moment + first * total


@compiled
def _steepest(height: Heights, first: int, last: int, eye: int, eye_amsl: float) -> float:
    """Highest slope per step from an eye at one point to the points from first to last, both counted."""
    part = height[first : last + 1]
    level = np.float32(eye_amsl)
    steepest = np.float32(-3e38)
    for k in range(part.size):
        away = np.float32(abs(np.int32(first + k - eye)))
        steepest = larger(steepest, (part[k] - level) / away)
    return float(steepest)


@compiled
def _roughness_m(bare: Heights, first: int, last: int, tx_fit: float, rx_fit: float) -> float:
    """Highest ground over the smooth Earth between both horizons, eqs. (92), (93) and (95)."""
    n = bare.size
    tx_base, rx_base = min(tx_fit, float(bare[0])), min(rx_fit, float(bare[n - 1]))
    part = bare[first : last + 1]
    rise = np.float32((rx_base - tx_base) / (n - 1))
    start = np.float32(tx_base + (rx_base - tx_base) * first / (n - 1))
    highest = np.float32(-3e38)
    for k in range(part.size):
        highest = larger(highest, part[k] - (start + rise * np.float32(np.int32(k))))
    return float(highest)


@compiled
def ray_source(
    sheet: SheetArrays,
    row: FloatArray,
    column: FloatArray,
    surface: Heights,
    standing: Heights,  # (n,) part of it that stands on the ground; () for none
    beyond_km: float,
    length_km: float,
    antenna_agl_m: float,
    aerial_agl_m: float,
    bulge: float,
    root: Heights,
    back: Heights,
    tops: Heights,
) -> tuple[float, float]:
    """Where the ray comes from that arrives at the aerial, seen past what stands nearer than `beyond_km`.

    The antenna, or the highest of the surface in the aerial's eyes. Returns its distance from the roof [km],
    negative where nothing stands farther away, and its slope from the horizontal at the aerial [m/km].
    """
    n = surface.size
    step = length_km / (n - 1)
    if length_km <= beyond_km:
        return -1.0, 0.0
    tx_amsl, rx_amsl = surface[0] + antenna_agl_m, surface[n - 1] + aerial_agl_m
    away, steepest = length_km, (tx_amsl - rx_amsl) / length_km - bulge * length_km
    stop = n - 1
    while stop > 1 and (n - stop) * step <= beyond_km:
        stop -= 1
    if stop > 1:
        ends = (tx_amsl, rx_amsl, bulge * step**2)
        i = _place(sheet, row, column, surface, standing, ends, root, back, tops, _RX, False, stop)
        y = (n - 1 - i) * step
        slope = (surface[i] - rx_amsl) / y - bulge * y
        if slope > steepest:
            away, steepest = y, slope
    return away, steepest
