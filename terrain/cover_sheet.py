"""The land cover under one sheet, laid out for compiled code: samples of one byte in blocks of 64 × 64, a page each.

Every cover raster keeps its own lattice; only what lies under the sheet is taken. The coastline's cells under the sheet
come last, as one more lattice. Nothing is resampled: compiled code picks the same sample as `Cover.category` does.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from affine import Affine
from numpy.typing import NDArray
from pyproj import CRS

from terrain import land_mask
from terrain.cache import ArrayCache
from terrain.cover import Cover, CoverRaster, categories, heights_m, numbers_of
from terrain.grid import Grid

FloatArray = NDArray[np.float64]
Samples = NDArray[np.uint8]

BLOCK = 64
MOST_BYTES = 4 * 10**9  # of one sheet's cover; above, its paths stay with the plain form
LEFT_AS_IT_IS, DRY, SEA, WATER = range(4)  # what a category says of a point near sea level
_READ = 2048  # samples down and across that are decoded at once
_MARGIN = 1e-3  # of the window, more than its curved edge can bulge between the places looked at
_FARTHEST_M = 1e6  # that two knots 25 km apart can lie from each other on a map, but where it begins anew


@dataclass(frozen=True, slots=True)
class CoverSheet:
    """Cover rasters under a sheet, the one that answers first in front, and the coastline's cells."""

    grids: tuple[Grid, ...]  # (m,) of what was taken of each raster; the coastline's is the last
    first_block: NDArray[np.int64]  # (m,) in samples
    samples: Samples  # (blocks, 64, 64) category numbers; of the coastline 1 at sea
    standing_m: NDArray[np.float32]  # (c,) what a category sets up on the sheet's ground; 0 for unknown
    says: Samples  # (c,) LEFT_AS_IT_IS, DRY, SEA or WATER: sea where the coastline says so

    def knots(self, lat: FloatArray, lon: FloatArray, first: NDArray[np.int64]) -> tuple[FloatArray, NDArray[np.bool_]]:
        """Rows and columns (m, 2, k) of paths' knots, and the paths (p,) that no map's edge cuts apart."""
        index = np.array([grid.index(lat, lon) for grid in self.grids])
        far = np.array([_FARTHEST_M / grid.spacing_m for grid in self.grids])[:, None, None]
        with np.errstate(invalid="ignore"):
            torn: NDArray[np.bool_] = np.asarray(~(np.abs(np.diff(index, axis=-1)) < far).all(axis=(0, 1)))
        torn[first[1:-1] - 1] = False  # from one path's last knot to the next one's first
        broken = np.append(torn, False) | ~np.isfinite(index).all(axis=(0, 1))
        return index, np.asarray(np.add.reduceat(broken, first[:-1], dtype=np.int64) == 0)


def cover_sheet(cover: Cover, under: Grid, share: float, cache: ArrayCache) -> CoverSheet | None:
    """Lay out the cover under a sheet, of whose heights `share` is set up on it, or map what is kept.

    None where it would be too large, or a map does not reach round the sheet in one piece. Raises RasterError and
    CacheError as reading does.
    """
    coast = _coast_under(under)
    taken: list[tuple[CoverRaster, int, int, Grid]] = []
    for one in cover.rasters:
        window = _window(one.grid, under)
        if window is None:
            return None
        top, left, rows, columns = window
        if rows > 0 and columns > 0:
            t = one.grid.transform
            corner = Affine(t.a, t.b, t.a * left + t.b * top + t.c, t.d, t.e, t.d * left + t.e * top + t.f)
            taken.append((one, top, left, one.grid.shifted(rows, columns, corner)))
    grids = (*(grid for *_, grid in taken), coast)
    sizes = [down * across for down, across in (_blocks_of(grid) for grid in grids)]
    if sum(sizes) * BLOCK**2 > MOST_BYTES:
        return None

    windows = [(one.content, tuple(one.grid.transform), top, left, g.rows, g.columns) for one, top, left, g in taken]
    named = hashlib.sha256(repr((cover.version, windows, tuple(coast.transform), coast.rows, coast.columns)).encode())
    name = f"sheets/{named.hexdigest()[:24]}-cover"
    samples = cache.load(name)
    if samples is None:

        def parts() -> Iterator[Samples]:
            for one, top, left, grid in taken:
                yield from _laid_out(one, top, left, grid)
            yield _in_blocks(_sea_of(coast))

        samples = cache.keep_parts(name, (sum(sizes), BLOCK, BLOCK), np.dtype(np.uint8), parts)

    says = np.full(len(categories()), DRY, np.uint8)
    says[0] = LEFT_AS_IT_IS
    says[numbers_of("water")], says[numbers_of("sea")] = WATER, SEA
    standing = (np.nan_to_num(heights_m()) * share).astype(np.float32)
    first = np.concatenate([[0], np.cumsum(sizes[:-1])]).astype(np.int64)
    return CoverSheet(grids, first, samples, standing, says)


def _blocks_of(grid: Grid) -> tuple[int, int]:
    return -(-grid.rows // BLOCK), -(-grid.columns // BLOCK)


def _window(grid: Grid, under: Grid) -> tuple[int, int, int, int] | None:
    """Top, left, rows and columns of a raster that may lie under a sheet; None where that cannot be told."""
    if not _meet(grid, under):
        return 0, 0, 0, 0
    r, c = np.meshgrid(np.linspace(0, under.rows - 1.0, 81), np.linspace(0, under.columns - 1.0, 81), indexing="ij")
    row, column = grid.index(*under.position(r.ravel(), c.ravel()))
    if not (np.isfinite(row).all() and np.isfinite(column).all()):
        return None
    for along in (row.reshape(r.shape), column.reshape(r.shape)):
        steps = max(np.abs(np.diff(along, axis=0)).max(), np.abs(np.diff(along, axis=1)).max())
        if steps * grid.spacing_m > _FARTHEST_M:
            return None
    low, high = [], []
    for values, size in ((row, grid.rows), (column, grid.columns)):
        margin = 3 + _MARGIN * (values.max() - values.min())
        low.append(int(np.clip(values.min() - margin, 0, size)))
        high.append(int(np.clip(values.max() + margin, 0, size)))
    return low[0], low[1], high[0] - low[0], high[1] - low[1]


def _meet(one: Grid, other: Grid) -> bool:
    """Whether two bounding boxes share ground; a little too often, never too seldom."""
    slack = one.slack_deg + other.slack_deg
    if one.south_deg > other.north_deg + slack or other.south_deg > one.north_deg + slack:
        return False
    widths = one.east_deg - one.west_deg + slack, other.east_deg - other.west_deg + slack
    return bool(
        (other.west_deg - one.west_deg + slack) % 360 <= widths[0] + slack
        or (one.west_deg - other.west_deg + slack) % 360 <= widths[1] + slack
    )


def _coast_under(under: Grid) -> Grid:
    """The coastline's cells under a sheet, one more all round."""
    cells = land_mask.CELLS_PER_DEGREE
    slack = under.slack_deg
    top = max(0, int(np.floor((90 - under.north_deg - slack) * cells)) - 1)
    bottom = min(land_mask.ROWS, int(np.ceil((90 - under.south_deg + slack) * cells)) + 1)
    left = int(np.floor((under.west_deg - slack) * cells)) - 1
    columns = min(land_mask.COLUMNS, int(np.ceil((under.east_deg + slack) * cells)) + 1 - left)
    transform = Affine(1 / cells, 0, left / cells, 0, -1 / cells, 90 - top / cells)
    return Grid.place(bottom - top, columns, transform, CRS.from_epsg(4326))


def _sea_of(coast: Grid) -> Samples:
    row, column = np.meshgrid(np.arange(coast.rows, dtype=float), np.arange(coast.columns, dtype=float), indexing="ij")
    return land_mask.is_sea(*coast.position(row, column)).astype(np.uint8)


def _laid_out(one: CoverRaster, top: int, left: int, grid: Grid) -> Iterator[Samples]:
    """Lay a raster's window out in rows of blocks."""
    for start in range(0, grid.rows, _READ):
        rows = min(_READ, grid.rows - start)
        pieces = [
            one.read(top + start, left + across, rows, min(_READ, grid.columns - across))
            for across in range(0, grid.columns, _READ)
        ]
        yield _in_blocks(np.concatenate(pieces, axis=1))


def _in_blocks(samples: Samples) -> Samples:
    """Samples (rows, columns) in blocks (b, 64, 64), row by row; what is over is 0."""
    down, across = -(-samples.shape[0] // BLOCK), -(-samples.shape[1] // BLOCK)
    padded = np.zeros((down * BLOCK, across * BLOCK), np.uint8)
    padded[: samples.shape[0], : samples.shape[1]] = samples
    return padded.reshape(down, BLOCK, across, BLOCK).transpose(0, 2, 1, 3).reshape(-1, BLOCK, BLOCK)
