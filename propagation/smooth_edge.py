"""Bullington's edge of a smooth Earth, compiled and closed: the flat profile of eq. (38) needs no pass over points.

`diffraction.bullington_edge` over zeros is the plain form, point by point; as it does, the maxima here are taken at
points in equal steps. Rec. ITU-R P.1812-7, section 4.3.1.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from terrain.compiled import compiled

FloatArray = NDArray[np.float64]


@compiled
def smooth_rays(
    tx_over_m: FloatArray,
    rx_over_m: FloatArray,
    length_km: FloatArray,
    points: NDArray[np.int64],
    radius_km: FloatArray,
) -> FloatArray:
    """Slopes from both ends [m/km], eqs. (13) and (17), and largest nu [m^0.5], eq. (15), of smooth Earths. (3, p)"""
    rays = np.empty((3, length_km.size))
    for p in range(length_km.size):
        a, b, d, bulge = tx_over_m[p], rx_over_m[p], length_km[p], 500 / radius_km[p]
        step, last = d / (points[p] - 1), points[p] - 2
        rays[0, p] = _steepest(a, d, bulge, step, last)
        rays[1, p] = _steepest(b, d, bulge, step, last)
        place = _nearest_to_ray(a, b, d, bulge) / step
        low = min(max(int(place), 1), last)
        high = min(low + 1, last)
        rays[2, p] = max(_nu(low * step, a, b, d, bulge), _nu(high * step, a, b, d, bulge))
    return rays


@compiled
def _steepest(a: float, d: float, bulge: float, step: float, last: int) -> float:
    """Largest of B (d - x) - a / x: at x = root(a / B), or at the points beside it."""
    low = min(max(int(math.sqrt(a / bulge) / step), 1), last)
    high = min(low + 1, last)
    return max(bulge * (d - low * step) - a / (low * step), bulge * (d - high * step) - a / (high * step))


@compiled
def _nu(x: float, a: float, b: float, d: float, bulge: float) -> float:
    y = d - x
    return (bulge * x * y - (a * y + b * x) / d) * math.sqrt(0.002 * d / (x * y))


@compiled
def _nearest_to_ray(a: float, b: float, d: float, bulge: float) -> float:
    """Where nu is largest on a path in sight. [km]

    With v = x / (d - x) its derivative has the sign of K (1 - v) / (1 + v)² + a / v - b, K = B d², whose root lies
    between 1 and a / b: Newton's steps, or halving where one leaves the bracket.
    """
    k = bulge * d * d
    low, high = min(1.0, a / b), max(1.0, a / b)
    v = math.sqrt(a / b)
    for _ in range(60):
        q = 1 / (1 + v)
        value = k * (1 - v) * q * q + a / v - b
        if value > 0:
            low = v
        else:
            high = v
        following = v - value / (k * (v - 3) * q * q * q - a / (v * v))
        if not low < following < high:
            following = (low + high) / 2
        if abs(following - v) < 1e-9 * v:
            break
        v = following
    return d * v / (1 + v)
