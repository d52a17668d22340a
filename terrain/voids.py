"""Missing samples inside a raster: which are small enough to bridge, and zeros declared as missing."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy import ndimage

# A void up to this many samples across is bridged from its rim: 10 samples are 0.3 km at
# 1 arc-second and 0.9 km at 3, about the width of a valley side. Our choice.
BRIDGED_SAMPLES = 10

# A shore stands low: zeros that meet ground of at most this height (median of their rim) are sea or
# flat land even where the file declares 0 as missing. Our choice.
SHORE_M = 5.0

_WITH_DIAGONALS = np.ones((3, 3), dtype=bool)


def is_void(samples: NDArray[Any], void: float) -> NDArray[np.bool_]:
    """Which samples are missing; `void` is NaN for float samples."""
    missing: NDArray[np.bool_] = np.isnan(samples) if np.isnan(void) else np.equal(samples, void)
    return missing


def bridge_small_voids(samples: NDArray[Any], void: float) -> NDArray[Any]:
    """Samples (r, c) with voids of up to 10 × 10 samples filled from their rim; larger ones stay.

    Each missing sample takes the mean of the nearest samples to its left, right, top and bottom,
    weighted by 1/distance, which is exact on a plane. Of a pair that lies across the raster's edge the
    other one counts only if no whole pair is left. The input itself comes back if nothing is filled.
    """
    missing = is_void(samples, void)
    if not missing.any():
        return samples
    areas, _ = ndimage.label(missing, structure=_WITH_DIAGONALS)
    small = [0] + [
        max(rows.stop - rows.start, columns.stop - columns.start) <= BRIDGED_SAMPLES
        for rows, columns in ndimage.find_objects(areas)
    ]
    row, column = np.nonzero(np.array(small, dtype=bool)[areas])
    if row.size == 0:
        return samples
    (left, left_w), (right, right_w) = (_nearest(samples, missing, row, column, 0, step) for step in (-1, 1))
    (top, top_w), (bottom, bottom_w) = (_nearest(samples, missing, row, column, step, 0) for step in (-1, 1))
    value = np.stack([left, right, top, bottom])
    weight = np.stack([left_w, right_w, top_w, bottom_w])
    paired = np.repeat([(left_w > 0) & (right_w > 0), (top_w > 0) & (bottom_w > 0)], 2, axis=0)
    weight = np.where(paired | ~paired.any(axis=0), weight, 0.0)
    total = weight.sum(axis=0)
    known = total > 0
    height = (value * weight).sum(axis=0)[known] / total[known]
    filled = samples.copy()
    filled[row[known], column[known]] = np.rint(height) if filled.dtype.kind in "iu" else height
    return filled


def settle_declared_zeros(samples: NDArray[Any], void: float, metres_per_unit: float) -> NDArray[Any]:
    """Decide over zeros in a raster that declares 0 as missing: ground at 0 m at a shore, else void.

    0 m is a height. Exported grids declare it as missing all the same, so their sea and their flats
    seem to be gaps; others really mark gaps with it. The rim of each connected zero area tells:
    it stands low (median |height| up to 5 m) round water, and at any height round a gap.
    """
    zero = samples == 0
    if not zero.any():
        return samples
    areas, count = ndimage.label(zero, structure=_WITH_DIAGONALS)
    touching = ndimage.grey_dilation(areas, size=(3, 3))
    rim = (touching > 0) & ~zero & ~is_void(samples, void)
    shore = np.zeros(count + 1, dtype=bool)
    if rim.any():
        heights = np.abs(samples[rim].astype(float)) * metres_per_unit
        present = np.unique(touching[rim])
        shore[present] = np.asarray(ndimage.median(heights, touching[rim], present)) <= SHORE_M
    settled = samples.copy()
    settled[zero & ~shore[areas]] = void
    return settled


def _nearest(
    samples: NDArray[Any],
    missing: NDArray[np.bool_],
    row: NDArray[np.intp],
    column: NDArray[np.intp],
    row_step: int,
    column_step: int,
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Nearest sample in one direction and 1/distance to it; weight 0 where there is none in reach."""
    value = np.zeros(row.size)
    weight = np.zeros(row.size)
    for step in range(1, BRIDGED_SAMPLES + 1):
        r, c = row + step * row_step, column + step * column_step
        open_still = (weight == 0) & (r >= 0) & (r < samples.shape[0]) & (c >= 0) & (c < samples.shape[1])
        open_still[open_still] = ~missing[r[open_still], c[open_still]]
        value[open_still] = samples[r[open_still], c[open_still]]
        weight[open_still] = 1.0 / step
    return value, weight
