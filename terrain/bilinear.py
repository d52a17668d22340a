"""Heights between four samples."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

# Rounding of positions, as a share of a cell: 3 mm at 1 arc-second, what eight decimals of a degree
# leave open. A point this near to a sample stands on it, so that a raster's last row is reached and a
# missing neighbour does not count.
ROUNDING = 1e-4


def bilinear(corners: FloatArray, down: FloatArray, right: FloatArray) -> FloatArray:
    """Heights (n,) between corners (4, n): upper left, upper right, lower left, lower right.

    `down` and `right` (n,) are shares of the cell, 0 to 1. A missing corner (NaN) makes the height NaN
    unless the position stands on a side or sample that does not need it.
    """
    upper_left, upper_right, lower_left, lower_right = corners
    upper = upper_left + right * (upper_right - upper_left)
    lower = lower_left + right * (lower_right - lower_left)
    height: FloatArray = upper + down * (lower - upper)
    missing = np.isnan(height)
    if missing.any():
        height[missing] = _without_missing(corners[:, missing], down[missing], right[missing])
    return height


def _without_missing(corners: FloatArray, down: FloatArray, right: FloatArray) -> FloatArray:
    down, right = _snapped(down), _snapped(right)
    weight = np.stack([(1 - down) * (1 - right), (1 - down) * right, down * (1 - right), down * right])
    # 0 × NaN is NaN: a corner of weight 0 must not be multiplied.
    height: FloatArray = np.where(weight == 0, 0.0, weight * corners).sum(axis=0)
    return height


def _snapped(share: FloatArray) -> FloatArray:
    return np.where(np.abs(share - np.rint(share)) <= ROUNDING, np.rint(share), share)
