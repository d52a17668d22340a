"""Tiles of one lattice as one array in a memory-mapped file, for compiled code to walk.

A sheet gives the same heights as `Ground.elevation_m` wherever none of the samples it touches is a gap. Gaps are
all samples where the ground does not follow from this lattice alone: outside the tiles, at larger voids, where a
finer raster answers, where two tiles disagree about a shared sample or its water, at voids beside other tiles.
"""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from affine import Affine
from numpy.typing import NDArray
from scipy import ndimage

from terrain.blocks import Blocks
from terrain.cache import ArrayCache
from terrain.cover_sheet import CoverSheet
from terrain.grid import Grid, apply
from terrain.patches import BLOCK, MOST_PLACES, ROOM, blocks_of, laid_out
from terrain.raster import Raster

FloatArray = NDArray[np.float64]

_MOST_EMPTY = 4  # a sheet of scattered tiles may be this many times as large as they are
_SAME_PLACE = 1e-3  # of a cell
_RIM = 1  # gaps all round, so that a cell beside the last sample can be fetched


@dataclass(frozen=True, slots=True)
class Tile:
    """One raster in a sheet."""

    raster: Raster
    blocks: Blocks
    top: int  # row and column of its first sample in the sheet
    left: int


@dataclass(frozen=True, slots=True)
class Sheet:
    """Samples of tiles with one coordinate system, spacing, number type and kind."""

    grid: Grid
    tiles: tuple[Tile, ...]  # in the order in which the ground asks them
    patches: NDArray[Any]  # (down, across, 8, 8, 32), see patches.py
    gap: float  # samples of this value are gaps, the lowest of all
    water: float  # those of this one are water at 0 m: connected flat areas; the next lowest
    scale: float  # metres = sample × scale + offset_m
    offset_m: float
    kind: str
    cover: CoverSheet | None = None  # what stands on it, where land cover is on

    def spacing_m(self, row: FloatArray, column: FloatArray) -> FloatArray:
        """Spacing of the raster that answers at positions (n,) of the sheet [m]; NaN outside its tiles."""
        spacing = np.full(row.size, np.nan)
        for tile in reversed(self.tiles):
            grid = tile.raster.grid
            inside = (row >= tile.top - 0.5) & (row <= tile.top + grid.rows - 0.5)
            inside &= (column >= tile.left - 0.5) & (column <= tile.left + grid.columns - 0.5)
            spacing[inside] = grid.spacing_m
        return spacing


def sheets_of(
    layers: Sequence[tuple[Raster, Blocks]], cache: ArrayCache, wanted: Callable[[Raster], bool]
) -> list[Sheet]:
    """Sheets of those layers of a ground that are wanted, in its order; rasters that fit none are left out.

    Decodes every raster that is part of a sheet. Raises RasterError, CacheError as reading them does.
    """
    sheets: list[Sheet] = []
    for lattice in _lattices([raster for raster, _ in layers]):
        for group in _connected(lattice, [raster.grid for raster, _ in layers]):
            if all(wanted(layers[number][0]) for number in group):
                sheet = _sheet(group, layers, cache)
                sheets += [] if sheet is None else [sheet]
    return sheets


def _lattices(rasters: Sequence[Raster]) -> list[list[int]]:
    """Numbers of rasters whose samples all stand on one lattice and mean the same."""
    lattices: list[list[int]] = []
    for number, raster in enumerate(rasters):
        for lattice in lattices:
            if _on_one_lattice(rasters[lattice[0]], raster):
                lattice.append(number)
                break
        else:
            lattices.append([number])
    return lattices


def _on_one_lattice(one: Raster, other: Raster) -> bool:
    same = [(r.crs, r.dtype, r.scale, r.offset_m, r.kind) for r in (one, other)]
    if same[0] != same[1]:
        return False
    a, b = one.grid.transform, other.grid.transform
    # Over the farther raster the difference in step must not add up to a part of a cell.
    size = max(other.grid.rows, other.grid.columns)
    steps = np.array([[a.a, a.b, a.d, a.e], [b.a, b.b, b.d, b.e]])
    if np.abs(steps[0] - steps[1]).max() * size > _SAME_PLACE * np.abs(steps[0]).max():
        return False
    column, row = apply(~a, b.c, b.f)
    return bool(abs(column - round(column)) < _SAME_PLACE and abs(row - round(row)) < _SAME_PLACE)


def _connected(lattice: list[int], grids: Sequence[Grid]) -> list[list[int]]:
    """Groups of rasters that touch one another, each in the order of the ground."""
    first = grids[lattice[0]].transform
    boxes = {number: _box(grids[number], first) for number in lattice}
    groups: list[list[int]] = []
    for number in lattice:
        touching = [group for group in groups if any(_touch(boxes[number], boxes[other]) for other in group)]
        groups = [group for group in groups if group not in touching]
        groups.append(sorted([number, *(one for group in touching for one in group)]))
    return groups


def _box(grid: Grid, origin: Affine) -> tuple[int, int, int, int]:
    """First row and column, last row and column of a raster on the lattice of another."""
    column, row = apply(~origin, grid.transform.c, grid.transform.f)
    top, left = round(row), round(column)
    return top, left, top + grid.rows - 1, left + grid.columns - 1


def _touch(one: tuple[int, int, int, int], other: tuple[int, int, int, int]) -> bool:
    return (
        one[0] <= other[2] + 1 and other[0] <= one[2] + 1 and one[1] <= other[3] + 1 and other[1] <= one[3] + 1
    )  # fmt: skip


def _sheet(group: list[int], layers: Sequence[tuple[Raster, Blocks]], cache: ArrayCache) -> Sheet | None:
    """Build a sheet or map the one that is kept; None where it would be too large."""
    first = layers[group[0]][0]
    boxes = [_box(layers[number][0].grid, first.grid.transform) for number in group]
    top, left = min(box[0] for box in boxes) - _RIM, min(box[1] for box in boxes) - _RIM
    rows = max(box[2] for box in boxes) + _RIM + 1 - top
    columns = max(box[3] for box in boxes) + _RIM + 1 - left
    covered = sum((box[2] - box[0] + 1) * (box[3] - box[1] + 1) for box in boxes)
    blocks = blocks_of(rows, columns)
    if blocks[0] * blocks[1] * BLOCK**2 * ROOM > MOST_PLACES or rows * columns > _MOST_EMPTY * covered:
        return None
    tiles = tuple(Tile(*layers[number], box[0] - top, box[1] - left) for number, box in zip(group, boxes, strict=True))
    t = first.grid.transform
    transform = Affine(t.a, t.b, t.a * left + t.b * top + t.c, t.d, t.e, t.d * left + t.e * top + t.f)
    # The ring may reach beyond a pole or a whole turn, where no raster could stand: only `index` is used of it.
    grid = first.grid.shifted(rows, columns, transform)
    foreign = [(number, raster.grid) for number, (raster, _) in enumerate(layers) if number not in group]
    # Other numbers than these two would each need machine code of their own; a float holds them to the millimetre.
    dtype = np.dtype("int16" if np.can_cast(first.dtype, "int16") else "float32")
    gap, water, untouched = (
        (-32768.0, -32767.0, -32766.0) if dtype.kind == "i" else (-(2.0**102), -(2.0**101), -(2.0**100))
    )
    named = hashlib.sha256(repr([(t.raster.content, t.blocks.coast, t.top, t.left) for t in tiles]).encode())
    named.update(repr([(tuple(g.transform), g.rows, g.columns, n < group[0]) for n, g in foreign]).encode())
    name = f"sheets/{named.hexdigest()[:24]}-patches"
    patches = cache.load(name)
    if patches is None:
        samples = np.full((rows, columns), untouched, dtype)
        shared = [_window(grid, other, samples.shape) for _, other in foreign]
        for tile in tiles:
            _add(tile, samples, shared, gap, water, untouched)
        samples[samples == untouched] = gap
        for window, (number, _) in zip(shared, foreign, strict=True):
            if number < group[-1]:  # finer: it answers there
                samples[window] = gap
        patches = cache.keep_parts(name, (*blocks, BLOCK, BLOCK, ROOM), dtype, lambda: laid_out(samples, gap))
    return Sheet(grid, tiles, patches, gap, water, first.scale, first.offset_m, first.kind)


def _add(
    tile: Tile,
    samples: NDArray[Any],
    shared: Sequence[tuple[slice, slice]],  # where other rasters answer for a void
    gap: float,
    water: float,
    untouched: float,
) -> None:
    """Write a tile's samples into those of its sheet; where one is there already and says otherwise, a gap."""
    for row, column, plain, bridged, wet in tile.blocks.parts():
        top, left = tile.top + row, tile.left + column
        place = np.s_[top : top + plain.shape[0], left : left + plain.shape[1]]
        values = np.where(tile.blocks.is_void(bridged), gap, bridged).astype(samples.dtype)
        beside = _beside(wet)
        beside[[0, -1]] |= np.array([[row == 0], [row + plain.shape[0] == tile.raster.grid.rows]])
        beside[:, [0, -1]] |= np.array([column == 0, column + plain.shape[1] == tile.raster.grid.columns])
        for down, across in shared:
            beside[_less(down, top), _less(across, left)] = True
        values[tile.blocks.is_void(plain) & beside] = gap
        values[wet] = water
        before = samples[place]
        samples[place] = np.where(before == untouched, values, np.where(before == values, before, gap))


def _less(part: slice, start: int) -> slice:
    """A stretch of rows or columns counted from another one's start."""
    return slice(max(part.start - start, 0), max(part.stop - start, 0))


def _beside(wet: NDArray[np.bool_]) -> NDArray[np.bool_]:
    """Samples next to water: bridged ones there would make land of it, or water of land."""
    return np.asarray(ndimage.binary_dilation(wet, np.ones((3, 3), bool))) if wet.any() else wet.copy()


def _window(grid: Grid, other: Grid, shape: tuple[int, ...]) -> tuple[slice, slice]:
    """Rows and columns of a sheet where another raster may have values, and one cell more all round."""
    r, c = np.meshgrid(np.linspace(-0.5, other.rows - 0.5, 41), np.linspace(-0.5, other.columns - 0.5, 41))
    row, column = grid.index(*other.position(r.ravel(), c.ravel()))
    box = [row.min() - 2, row.max() + 3, column.min() - 2, column.max() + 3]
    if not np.isfinite(box).all():
        return slice(0, 0), slice(0, 0)
    top, bottom, left, right = np.clip(np.asarray(box, dtype=int), 0, np.repeat(shape, 2)).tolist()
    return slice(top, bottom), slice(left, right)
