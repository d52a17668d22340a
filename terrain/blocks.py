"""The samples of one raster, decoded block by block when they are first needed."""

from __future__ import annotations

import threading
import time
from collections.abc import Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray

from terrain.cache import ArrayCache
from terrain.land_mask import shore_of_grid
from terrain.raster import Raster
from terrain.voids import BRIDGED_SAMPLES, bridge_small_voids, is_void, settle_declared_zeros
from terrain.water import flat_zero_areas

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.intp]

# Cells of this many samples across are kept as means; all divide a block's side.
COARSE = (1, 4, 16, 64)

# Water of a raster counts as sea only this near to the sea of the coastline: polders and lakes at 0 m lie
# farther off. Five times what the coastline is wrong by. Our choice.
SHORE_KM = 5.0

# Enough that a void which may be bridged is seen whole from each block it reaches into.
_MARGIN = BRIDGED_SAMPLES + 2


class Blocks:
    """Samples of a raster by row and column, in metres, NaN where missing.

    A block holds its own rows and columns and the first of the next block, so that the four
    corners of every cell lie in one block.
    """

    def __init__(self, raster: Raster, cache: ArrayCache, coast: bool = False) -> None:
        self._raster = raster
        self._cache = cache
        self.coast = coast  # whether water counts only near the sea of the coastline
        self._lock = threading.Lock()
        self.decoding_s = 0.0  # spent by this process so far
        self._down = max(1, -(-(raster.grid.rows - 1) // raster.block_rows))
        self._across = max(1, -(-(raster.grid.columns - 1) // raster.block_columns))

    def cells(self, row: IndexArray, column: IndexArray, bridged: bool) -> FloatArray:
        """Corners (4, n) of cells by their upper left samples: itself, right of it, below, both.

        With `bridged`, small voids have values.
        """
        corners = np.empty((4, row.size))
        for which, block, top, left in self._by_block(row, column):
            samples = self._bridged(block) if bridged else self._samples(block)
            width = samples.shape[1]
            first = (row[which] - top) * width + (column[which] - left)
            for corner, offset in enumerate((0, 1, width, width + 1)):
                corners[corner, which] = self._metres(samples.ravel().take(first + offset))
        return corners

    def samples(self, row: IndexArray, column: IndexArray, bridged: bool) -> FloatArray:
        """Single samples (n,)."""
        values = np.empty(row.size)
        for which, block, top, left in self._by_block(row, column):
            samples = self._bridged(block) if bridged else self._samples(block)
            values[which] = self._metres(samples[row[which] - top, column[which] - left])
        return values

    def water(self, row: IndexArray, column: IndexArray) -> NDArray[np.bool_]:
        """Which samples (n,) belong to a connected flat area at 0 m."""
        wet = np.zeros(row.size, dtype=bool)
        for which, block, top, left in self._by_block(row, column):
            r, c = row[which] - top, column[which] - left
            at_zero = self._metres(self._samples(block)[r, c]) == 0
            if at_zero.any():
                wet[which] = at_zero & self._water(block)[r, c]
        return wet

    def means(self, row: IndexArray, column: IndexArray, samples_across: float) -> FloatArray:
        """Mean heights (n,) of the coarse cells that hold single samples.

        The cells are the largest of COARSE that measure at most `samples_across` samples; missing
        samples do not count.
        """
        return self._coarse(row, column, samples_across, "means")

    def maxima(self, row: IndexArray, column: IndexArray, samples_across: float) -> FloatArray:
        """Highest ground (n,) of the coarse cells that hold cells given by their upper left samples.

        As `means`; the ground between samples is never higher, as the corners on the far sides count.
        """
        return self._coarse(row, column, samples_across, "maxima")

    def _coarse(self, row: IndexArray, column: IndexArray, samples_across: float, what: str) -> FloatArray:
        level = max(number for number, factor in enumerate(COARSE) if factor <= max(1.0, samples_across))
        values = np.empty(row.size)
        for which, block, top, left in self._by_block(row, column):
            coarse = self._pyramid(block, level, what)
            values[which] = coarse[(row[which] - top) // COARSE[level], (column[which] - left) // COARSE[level]]
        return values

    def parts(self) -> Iterator[tuple[int, int, NDArray[Any], NDArray[Any], NDArray[np.bool_]]]:
        """Every block: its first row and column, samples as stored, the same with small voids bridged, water."""
        for down in range(self._down):
            for across in range(self._across):
                block = (down, across)
                samples = self._samples(block)
                dry = not (self._metres(samples) == 0).any()
                water = np.zeros(samples.shape, dtype=bool) if dry else self._water(block)
                yield (
                    down * self._raster.block_rows,
                    across * self._raster.block_columns,
                    samples,
                    self._bridged(block),
                    water,
                )

    def is_void(self, samples: NDArray[Any]) -> NDArray[np.bool_]:
        """Which stored samples are missing."""
        return is_void(samples, self._raster.void)

    def void_share(self) -> float | None:
        """Share of missing samples, 0 to 1, or None as long as the raster was never read whole."""
        kept = self._cache.load(self._named("voids"))
        return None if kept is None else float(kept)

    def read_whole(self) -> float:
        """Decode every block that is not decoded yet; returns the share of missing samples.

        Raises RasterError where the file is damaged.
        """
        missing = 0
        for down in range(self._down):
            for across in range(self._across):
                samples = self._samples((down, across))
                own = samples[: None if down == self._down - 1 else -1, : None if across == self._across - 1 else -1]
                missing += int(np.count_nonzero(is_void(own, self._raster.void)))
        share = missing / (self._raster.grid.rows * self._raster.grid.columns)
        self._cache.keep(self._named("voids"), np.array(share))
        return share

    def _by_block(
        self, row: IndexArray, column: IndexArray
    ) -> list[tuple[IndexArray | slice, tuple[int, int], int, int]]:
        """Groups of indices in one block each: which, the block, its first row and column."""
        if row.size == 0:
            return []
        if self._down * self._across == 1:
            return [(slice(None), (0, 0), 0, 0)]
        height, width = self._raster.block_rows, self._raster.block_columns
        down = np.minimum(row // height, self._down - 1)
        across = np.minimum(column // width, self._across - 1)
        number = down * self._across + across
        groups: list[tuple[IndexArray | slice, tuple[int, int], int, int]] = []
        for block in np.unique(number):
            d, a = divmod(int(block), self._across)
            groups.append((np.nonzero(number == block)[0], (d, a), d * height, a * width))
        return groups

    def _metres(self, samples: NDArray[Any]) -> FloatArray:
        missing = is_void(samples, self._raster.void)
        heights: FloatArray = samples.astype(float)
        if (self._raster.scale, self._raster.offset_m) != (1.0, 0.0):
            heights = heights * self._raster.scale + self._raster.offset_m
        if missing.any():
            heights[missing] = np.nan
        return heights

    def _samples(self, block: tuple[int, int]) -> NDArray[Any]:
        name = self._named("samples", block)
        kept = self._cache.load(name)
        if kept is not None:
            return kept
        with self._lock:
            kept = self._cache.load(name)
            if kept is None:
                start = time.perf_counter()
                kept = self._decode(block)
                self.decoding_s += time.perf_counter() - start
            return kept

    def _bridged(self, block: tuple[int, int]) -> NDArray[Any]:
        samples = self._samples(block)
        kept = self._cache.load(self._named("bridged", block))
        return samples if kept is None else kept

    def _pyramid(self, block: tuple[int, int], level: int, what: str) -> NDArray[np.float32]:
        """Coarse heights of a block, made from the next finer ones."""
        if level == 0:
            heights = self._metres(self._samples(block)).astype(np.float32)
            return heights if what == "means" else _highest_corners(heights)
        name = self._named(f"{what}{COARSE[level]}", block)
        kept = self._cache.load(name)
        if kept is None:
            finer = self._pyramid(block, level - 1, what)
            kept = self._cache.keep(name, _fourfold(finer, highest=what == "maxima"))
        return kept

    def _water(self, block: tuple[int, int]) -> NDArray[np.bool_]:
        name = self._named("sea" if self.coast else "water", block)
        kept = self._cache.load(name)
        if kept is None:
            zero = self._metres(self._samples(block)) == 0
            water = flat_zero_areas(zero, self._raster.grid.spacing_m)
            if self.coast and water.any():
                top, left = block[0] * self._raster.block_rows, block[1] * self._raster.block_columns
                rows, columns = water.shape
                water &= shore_of_grid(self._raster.grid, top, left, rows, columns, SHORE_KM)
            kept = self._cache.keep(name, water)
        return kept

    def _decode(self, block: tuple[int, int]) -> NDArray[Any]:
        raster = self._raster
        top, left = block[0] * raster.block_rows, block[1] * raster.block_columns
        bottom = min(top + raster.block_rows + 1, raster.grid.rows)
        right = min(left + raster.block_columns + 1, raster.grid.columns)
        first_row, first_column = max(0, top - _MARGIN), max(0, left - _MARGIN)
        wide = raster.read(
            first_row,
            first_column,
            min(bottom + _MARGIN, raster.grid.rows) - first_row,
            min(right + _MARGIN, raster.grid.columns) - first_column,
        )
        if raster.zero_declared_void:
            wide = settle_declared_zeros(wide, raster.void, raster.scale)
        own = np.s_[top - first_row : bottom - first_row, left - first_column : right - first_column]
        bridged = bridge_small_voids(wide, raster.void)
        if bridged is not wide:
            # Before the samples: whoever finds those takes a missing bridge for "nothing to bridge".
            self._cache.keep(self._named("bridged", block), np.ascontiguousarray(bridged[own]))
        return self._cache.keep(self._named("samples", block), np.ascontiguousarray(wide[own]))

    def _named(self, what: str, block: tuple[int, int] | None = None) -> str:
        place = "" if block is None else f"-{block[0]}-{block[1]}"
        return f"{self._raster.content}/{what}{place}"


def _highest_corners(heights: NDArray[np.float32]) -> NDArray[np.float32]:
    """Highest of the corners of each cell between samples that is not missing."""
    across = np.fmax(heights[:, :-1], heights[:, 1:])
    return np.asarray(np.fmax(across[:-1], across[1:]))


def _fourfold(heights: NDArray[np.float32], highest: bool) -> NDArray[np.float32]:
    """Means (or maxima) over 4 × 4 values each, of those that are not NaN; the last cells may be smaller."""
    rows, columns = (-(-side // 4) for side in heights.shape)
    padded = np.full((4 * rows, 4 * columns), np.nan, dtype=np.float32)
    padded[: heights.shape[0], : heights.shape[1]] = heights
    cells = padded.reshape(rows, 4, columns, 4)
    if highest:
        return np.asarray(np.fmax.reduce(np.fmax.reduce(cells, axis=3), axis=1))
    known = np.isfinite(cells)
    count = known.sum(axis=(1, 3))
    total = np.where(known, cells, 0).sum(axis=(1, 3))
    return np.where(count > 0, total / np.maximum(count, 1), np.nan).astype(np.float32)
