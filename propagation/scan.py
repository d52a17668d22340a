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

Heights = NDArray[np.float32]

MOST_POINTS = 20_001
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
        *((f"{ray}_{radius}", "f8") for radius in ("median", "true_earth", "beta0") for ray in ("tx", "rx", "zone")),
        *((f"bare_{ray}_{radius}", "f8") for radius in ("median", "true_earth") for ray in ("tx", "rx")),
        ("worst_km", "f8"),  # where the surface comes nearest to the ray in Fresnel radii
        ("worst_into_line_m", "f8"),
        ("line_of_sight", "?"),  # over bare ground
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
    bare: Heights,  # (n,)
    surface: Heights,  # (n,) with what stands on the ground; equal to `bare` at both ends
    covered: bool,  # false: both are the same array
    length_km: float,
    antenna_agl_m: float,
    aerial_agl_m: float,
    bulges: tuple[float, float, float],  # 500/a per km² at the median, for the true Earth, at beta0
    edge_km: NDArray[np.float64],  # (e,) straight edges across the path, from the roof
    edge_amsl_m: NDArray[np.float64],
    root: Heights,  # (n,) 1 / root(i)
    back: Heights,  # (n,) 1 / root(j)
    out: NDArray[np.void],  # (1,) of SCAN
) -> None:
    """Scan one profile."""
    n = bare.size
    step = length_km / (n - 1)
    tx_amsl, rx_amsl = bare[0] + antenna_agl_m, bare[n - 1] + aerial_agl_m
    slope = (rx_amsl - tx_amsl) / length_km
    median, true_earth, beta0 = bulges[0] * step**2, bulges[1] * step**2, bulges[2] * step**2

    _ground(bare, length_km, tx_amsl, rx_amsl, out)
    rays = _rays(bare, root, back, tx_amsl, rx_amsl, median, true_earth, beta0)
    out[0].over_line_m = rays[9]
    out[0].over_line_from_tx, out[0].over_line_from_rx = rays[10] / step, rays[11] / step
    out[0].bare_tx_median, out[0].bare_rx_median = rays[0] / step + slope, rays[1] / step - slope
    out[0].bare_tx_true_earth, out[0].bare_rx_true_earth = rays[3] / step + slope, rays[4] / step - slope

    # The ray meets the ground where the slope to the highest point exceeds that to the other antenna, eq. (78).
    out[0].line_of_sight = not rays[0] > 0
    nearest = _place(bare, tx_amsl, rx_amsl, median, root, back, True) if out[0].line_of_sight else 0
    first = nearest if out[0].line_of_sight else _place(bare, tx_amsl, rx_amsl, median, root, root, False)
    last = nearest if out[0].line_of_sight else _place(bare, tx_amsl, rx_amsl, median, back, back, True)
    out[0].tx_horizon_km, out[0].rx_horizon_km = first * step, length_km - last * step
    out[0].roughness_m = _roughness_m(bare, min(first, last), max(first, last), out[0].tx_fit_amsl_m, out[0].rx_fit_amsl_m)

    if covered:
        rays = _rays(surface, root, back, tx_amsl, rx_amsl, median, true_earth, beta0)
    to_zone = math.sqrt(0.002 * length_km) / step
    out[0].tx_median, out[0].rx_median = rays[0] / step + slope, rays[1] / step - slope
    out[0].zone_median = rays[2] * to_zone
    out[0].tx_true_earth, out[0].rx_true_earth = rays[3] / step + slope, rays[4] / step - slope
    out[0].zone_true_earth = rays[5] * to_zone
    out[0].tx_beta0, out[0].rx_beta0 = rays[6] / step + slope, rays[7] / step - slope
    out[0].zone_beta0 = rays[8] * to_zone

    sees = out[0].line_of_sight and not covered
    worst = nearest if sees else _place(surface, tx_amsl, rx_amsl, median, root, back, False)
    x = worst * step
    out[0].worst_km = x
    out[0].worst_into_line_m = surface[worst] - (tx_amsl + slope * x) + bulges[0] * x * (length_km - x)
    for e in range(edge_km.size):
        _add_edge(length_km - edge_km[e], edge_amsl_m[e], length_km, tx_amsl, rx_amsl, bulges, out)


@compiled
def _rays(
    height: Heights,
    root: Heights,
    back: Heights,
    tx_amsl: float,
    rx_amsl: float,
    bulge_0: float,
    bulge_1: float,
    bulge_2: float,
) -> tuple[float, float, float, float, float, float, float, float, float, float, float, float]:
    """Largest of the module's three lines at each of three bulges, then of H, H / i and H / j."""
    n = height.size
    inner, inner_root, inner_back = height[1 : n - 1], root[1 : n - 1], back[1 : n - 1]
    start, rise = np.float32(tx_amsl), np.float32((rx_amsl - tx_amsl) / (n - 1))
    c0, c1, c2 = np.float32(bulge_0), np.float32(bulge_1), np.float32(bulge_2)
    least = np.float32(-3e38)
    tx0 = tx1 = tx2 = rx0 = rx1 = rx2 = zone0 = zone1 = zone2 = over = over_tx = over_rx = least
    for k in range(n - 2):
        i, j = np.float32(np.int32(k + 1)), np.float32(np.int32(n - 2 - k))
        p, q = inner_root[k], inner_back[k]
        above = inner[k] - (start + rise * i)
        from_tx, from_rx, in_zone, bulge_in_zone = above * p * p, above * q * q, above * p * q, i * p * j * q
        over, over_tx, over_rx = larger(over, above), larger(over_tx, from_tx), larger(over_rx, from_rx)
        tx0, rx0 = larger(tx0, from_tx + c0 * j), larger(rx0, from_rx + c0 * i)
        tx1, rx1 = larger(tx1, from_tx + c1 * j), larger(rx1, from_rx + c1 * i)
        tx2, rx2 = larger(tx2, from_tx + c2 * j), larger(rx2, from_rx + c2 * i)
        zone0 = larger(zone0, in_zone + c0 * bulge_in_zone)
        zone1 = larger(zone1, in_zone + c1 * bulge_in_zone)
        zone2 = larger(zone2, in_zone + c2 * bulge_in_zone)
    return tx0, rx0, zone0, tx1, rx1, zone1, tx2, rx2, zone2, over, over_tx, over_rx


@compiled
def _place(
    height: Heights, tx_amsl: float, rx_amsl: float, bulge: float, one: Heights, other: Heights, last: bool
) -> int:
    """Where (H + c i j) times both tables is largest; of equals the first or the last.

    Both tables from the transmitter are eq. (13), both from the roof eq. (17), one of each eq. (15). A maximum
    without its place is several times cheaper: so the best stretch is found first, then the point in it.
    """
    n = height.size
    stretch = 64
    start, rise = np.float32(tx_amsl), np.float32((rx_amsl - tx_amsl) / (n - 1))
    c = np.float32(bulge)
    best, best_first = np.float32(-3e38), 1
    for first in range(1, n - 1, stretch):
        size = min(stretch, n - 1 - first)
        part, p, q = height[first : first + size], one[first : first + size], other[first : first + size]
        top = np.float32(-3e38)
        for k in range(size):
            i, j = np.float32(np.int32(first + k)), np.float32(np.int32(n - 1 - first - k))
            top = larger(top, (part[k] - (start + rise * i) + c * i * j) * p[k] * q[k])
        if top > best or (last and top == best):
            best, best_first = top, first

    # A few points more on both sides: over a level sea, single precision may take the stretch beside the right one.
    place, largest = best_first, -1e300
    for i in range(max(1, best_first - 8), min(best_first + stretch + 8, n - 1)):
        above = height[i] - (tx_amsl + (rx_amsl - tx_amsl) * i / (n - 1)) + bulge * i * (n - 1 - i)
        value = above * one[i] * other[i]
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
def _add_edge(
    x: float,
    top_amsl: float,
    length_km: float,
    tx_amsl: float,
    rx_amsl: float,
    bulges: tuple[float, float, float],
    out: NDArray[np.void],
) -> None:
    """Let one more point, off the equal steps, count among the surface's maxima."""
    y = length_km - x
    if not (x > 0 and y > 0):
        return
    line = (tx_amsl * y + rx_amsl * x) / length_km
    from_tx, from_rx = (top_amsl - tx_amsl) / x, (top_amsl - rx_amsl) / y
    root = math.sqrt(0.002 * length_km / (x * y))
    zone = (top_amsl - line + bulges[0] * x * y) * root
    if zone > out[0].zone_median:
        out[0].worst_km, out[0].worst_into_line_m = x, top_amsl - line + bulges[0] * x * y
    out[0].tx_median = max(out[0].tx_median, from_tx + bulges[0] * y)
    out[0].rx_median = max(out[0].rx_median, from_rx + bulges[0] * x)
    out[0].zone_median = max(out[0].zone_median, zone)
    out[0].tx_true_earth = max(out[0].tx_true_earth, from_tx + bulges[1] * y)
    out[0].rx_true_earth = max(out[0].rx_true_earth, from_rx + bulges[1] * x)
    out[0].zone_true_earth = max(out[0].zone_true_earth, (top_amsl - line + bulges[1] * x * y) * root)
    out[0].tx_beta0 = max(out[0].tx_beta0, from_tx + bulges[2] * y)
    out[0].rx_beta0 = max(out[0].rx_beta0, from_rx + bulges[2] * x)
    out[0].zone_beta0 = max(out[0].zone_beta0, (top_amsl - line + bulges[2] * x * y) * root)
