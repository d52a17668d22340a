"""Land cover along a path, compiled: `Cover.category`, `Overlay.sea` and `overlay.with_cover` at each of its points."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from terrain.compiled import compiled_as_written
from terrain.cover_sheet import BLOCK, DRY, SEA, WATER, CoverSheet
from terrain.kernels import KNOTS, Cubic, cubic_of, value_of
from terrain.overlay import SEA_LEVEL_M

FloatArray = NDArray[np.float64]
Heights = NDArray[np.float32]
Categories = NDArray[np.uint8]


class CoverArrays(NamedTuple):
    """What compiled code takes of a sheet's cover; all of them empty where there is none."""

    samples: Categories  # flat
    first: NDArray[np.int64]  # (m,) of each map's samples; the coastline is the last map
    rows: NDArray[np.int64]
    columns: NDArray[np.int64]
    standing_m: Heights  # (c,) by category
    says: Categories  # (c,)


def cover_arrays(cover: CoverSheet | None) -> CoverArrays:
    """Give the arrays of a sheet's cover."""
    none = np.zeros(0, np.int64)
    if cover is None:
        no_samples = np.zeros(0, np.uint8)
        no_samples.flags.writeable = False  # as those mapped from a file are: one machine code for both
        return CoverArrays(no_samples, none, none, none, np.zeros(0, np.float32), np.zeros(0, np.uint8))
    samples = cover.samples.reshape(-1).view()
    samples.flags.writeable = False
    return CoverArrays(
        samples,
        cover.first_block * BLOCK**2,
        np.array([grid.rows for grid in cover.grids], np.int64),
        np.array([grid.columns for grid in cover.grids], np.int64),
        cover.standing_m,
        cover.says,
    )


@compiled_as_written
def sample_cover(cover: CoverArrays, knots: FloatArray, category: Categories) -> None:
    """Fill in the category (n,) of the nearest sample at each point, 0 where no map knows.

    `knots` (m, 2, k) are rows and columns of the path's knots on each map.
    """
    category[:] = 0
    n = category.size
    segments = (knots.shape[2] - 1) // KNOTS
    per_point = segments / (n - 1)
    for one in range(cover.first.size - 1):
        across = (cover.columns[one] + BLOCK - 1) // BLOCK
        first = 0
        for segment in range(segments):
            last = n if segment == segments - 1 else int(np.ceil((segment + 1) / per_point))
            rows, columns = cubic_of(knots[one, 0], segment), cubic_of(knots[one, 1], segment)
            if _may_meet(rows, cover.rows[one]) and _may_meet(columns, cover.columns[one]):
                for i in range(first, last):
                    if category[i] == 0:
                        t = i * per_point - segment
                        row, column = np.rint(value_of(rows, t)), np.rint(value_of(columns, t))
                        if 0 <= row < cover.rows[one] and 0 <= column < cover.columns[one]:
                            place = _place(cover.first[one], int(row), int(column), across)
                            category[i] = cover.samples[place]
            first = last


@compiled_as_written
def sea_by_cover(
    cover: CoverArrays,
    knots: FloatArray,
    category: Categories,
    height_m: Heights,
    wet: NDArray[np.bool_],  # (n,) as the raster has it; result
) -> bool:
    """Correct a path's water where the ground is near sea level: `Overlay.sea`. Returns whether any is left."""
    n = category.size
    segments = (knots.shape[2] - 1) // KNOTS
    per_point = segments / (n - 1)
    coast = cover.first.size - 1
    across = (cover.columns[coast] + BLOCK - 1) // BLOCK
    any_water = False
    for i in range(n):
        if abs(height_m[i]) <= SEA_LEVEL_M:
            says = cover.says[category[i]]
            if says == SEA:
                wet[i] = True
            elif says == DRY:
                wet[i] = False
            elif says == WATER and not wet[i]:
                segment = min(int(i * per_point), segments - 1)
                t = i * per_point - segment
                row = int(np.rint(value_of(cubic_of(knots[coast, 0], segment), t)))
                column = int(np.rint(value_of(cubic_of(knots[coast, 1], segment), t)))
                row = min(max(row, 0), int(cover.rows[coast]) - 1)
                column = min(max(column, 0), int(cover.columns[coast]) - 1)
                wet[i] = cover.samples[_place(cover.first[coast], row, column, across)] != 0
        any_water = any_water or wet[i]
    return any_water


@compiled_as_written
def set_up(
    cover: CoverArrays,
    category: Categories,
    height_m: Heights,
    length_km: float,
    bare_km: float,  # from the roof, where nothing of the map is taken
    standing_m: Heights,  # result (n,)
    surface_m: Heights,  # result (n,)
) -> bool:
    """Set the cover up on the ground, but not at the mast nor close to the roof. Returns whether any stands."""
    n = category.size
    step = length_km / (n - 1)
    stands = False
    for i in range(n):
        standing = cover.standing_m[category[i]]
        if i == 0 or i == n - 1 or length_km - i * step <= bare_km:
            standing = np.float32(0)
        stands = stands or standing > 0
        standing_m[i] = standing
        surface_m[i] = height_m[i] + standing
    return stands


@compiled_as_written
def _place(first: int, row: int, column: int, across: int) -> int:
    return first + ((row // BLOCK) * across + column // BLOCK) * BLOCK**2 + (row % BLOCK) * BLOCK + column % BLOCK


@compiled_as_written
def _may_meet(cubic: Cubic, size: int) -> bool:
    """Whether a cubic from 0 to 1 may pass between -1 and `size`."""
    bend = abs(cubic[2]) + abs(cubic[3])
    low, high = min(cubic[0], cubic[0] + cubic[1]) - bend, max(cubic[0], cubic[0] + cubic[1]) + bend
    return high >= -1 and low <= size
