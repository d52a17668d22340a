"""Many rasters as one ground, the finest first."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike, NDArray

from terrain.bilinear import ROUNDING, bilinear
from terrain.blocks import COARSE, Blocks
from terrain.cache import ArrayCache
from terrain.errors import RasterError
from terrain.grid import Grid
from terrain.raster import SUFFIXES, Raster, open_raster
from terrain.sheet import Sheet, sheets_of

FloatArray = NDArray[np.float64]

# Positions are worked through in groups of this many, which keeps their arrays in the processor's cache.
_GROUP = 16_384


@dataclass(frozen=True, slots=True)
class RasterInfo:
    """What a raster of the ground is, for people to read."""

    name: str
    path: Path
    kind: str  # "surface" (houses and trees stand on it), "radar-surface" (in between) or "bare"
    spacing_m: float
    bounds: tuple[float, float, float, float]  # west, south, east, north [deg]; east above 180 past the meridian
    crs: str
    void_share: float  # of its samples, 0 to 1; NaN until the raster was read whole once (`Ground.survey`)
    attribution: str  # as the file says, mostly ""


@dataclass(frozen=True, slots=True)
class Refused:
    """A file that is no part of the ground, and what to do about it."""

    path: Path
    message: str


@dataclass(frozen=True, slots=True)
class _Layer:
    raster: Raster
    blocks: Blocks


class Ground:
    """Elevation and water at any position, from every raster that was given.

    At each position the finest raster with a value answers (equally fine ones by name). Where it has
    a void, the next one does; where all have, a void of up to 10 samples across is bridged from its
    rim in the finest; a larger one stays missing. Between two tiles that share no samples, the cells
    across the seam take their corners from both; at an outer edge the last sample holds for half a cell.
    """

    def __init__(self, layers: Sequence[_Layer], refused: Sequence[Refused], cache: ArrayCache) -> None:
        self._layers = tuple(layers)
        self.refused = tuple(refused)
        self._cache = cache

    @classmethod
    def open(cls, paths: Sequence[Path], cache_dir: Path) -> Ground:
        """Ground of files and of the rasters in folders; what cannot be used stands in `refused`.

        In a folder, files with other names than rasters have are passed over; a file named itself is
        always tried. Decoded samples are kept in `cache_dir`, or in a temporary folder if that is read-only.
        """
        cache = ArrayCache(cache_dir)
        layers, refused, seen = [], [], set()
        for path in _files(paths):
            try:
                raster = open_raster(path)
            except RasterError as error:
                refused.append(Refused(path, str(error)))
                continue
            identity = (raster.content, raster.grid.transform, raster.crs)
            if identity not in seen:
                seen.add(identity)
                layers.append(_Layer(raster, Blocks(raster, cache)))
        layers.sort(key=lambda layer: (round(layer.raster.grid.spacing_m, 1), layer.raster.name))
        return cls(layers, refused, cache)

    @property
    def rasters(self) -> tuple[RasterInfo, ...]:
        """The rasters in the order in which they are asked."""
        infos = []
        for layer in self._layers:
            raster, grid = layer.raster, layer.raster.grid
            share = layer.blocks.void_share()
            infos.append(
                RasterInfo(
                    name=raster.name,
                    path=raster.path,
                    kind=raster.kind,
                    spacing_m=grid.spacing_m,
                    bounds=(grid.west_deg, grid.south_deg, grid.east_deg, grid.north_deg),
                    crs=raster.crs,
                    void_share=float("nan") if share is None else share,
                    attribution=raster.attribution,
                )
            )
        return tuple(infos)

    @cached_property
    def version(self) -> str:
        """Short hash that changes with any raster, its place or its kind."""
        digest = hashlib.sha256()
        for layer in self._layers:
            raster = layer.raster
            digest.update(f"{raster.content} {raster.kind} {raster.crs} {tuple(raster.grid.transform)}\n".encode())
        return digest.hexdigest()[:12]

    def sheets(self, wanted: Callable[[Raster], bool] = lambda _: True) -> list[Sheet]:
        """The wanted rasters laid together as far as one array can hold them (sheet.py), decoded the first time.

        Raises RasterError for a damaged file and CacheError if the arrays cannot be kept.
        """
        return sheets_of([(layer.raster, layer.blocks) for layer in self._layers], self._cache, wanted)

    def survey(self) -> Ground:
        """Read every raster whole, once: void shares are known, and damaged files join `refused`."""
        layers, refused = [], list(self.refused)
        for layer in self._layers:
            try:
                layer.blocks.read_whole()
                layers.append(layer)
            except RasterError as error:
                refused.append(Refused(layer.raster.path, str(error)))
        return Ground(layers, refused, self._cache)

    def elevation_m(self, latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> FloatArray:
        """Height above sea level [m], bilinear between samples; NaN where no raster has a value.

        Positions broadcast and give the shape; outside the rasters, out of range and NaN give NaN.
        Raises RasterError for a damaged file and CacheError if decoded samples cannot be kept.
        """
        lat, lon = _positions(latitude_deg, longitude_deg)
        return self._answer(lat.ravel(), lon.ravel()).height_m.reshape(lat.shape)

    def spacing_m(self, latitude_deg: float, longitude_deg: float) -> float:
        """Spacing of the raster that answers at a position [m]; NaN where none does."""
        lat, lon = _positions(latitude_deg, longitude_deg)
        layer = int(self._answer(lat.ravel(), lon.ravel()).layer[0])
        return self._layers[layer].raster.grid.spacing_m if layer >= 0 else float("nan")

    def answering(self, latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> NDArray[np.intp]:
        """Number in `rasters` of the raster that answers at positions, -1 where none does."""
        lat, lon = _positions(latitude_deg, longitude_deg)
        return self._answer(lat.ravel(), lon.ravel()).layer.reshape(lat.shape)

    def is_water(self, latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> NDArray[np.bool_]:
        """Whether the nearest sample belongs to a connected flat area at 0 m of at least 1 km².

        The raster that answers for the elevation decides; a missing sample is not water.
        """
        lat, lon = _positions(latitude_deg, longitude_deg)
        return self._water(self._answer(lat.ravel(), lon.ravel()), lat.ravel(), lon.ravel()).reshape(lat.shape)

    def elevation_and_water(
        self, latitude_deg: ArrayLike, longitude_deg: ArrayLike
    ) -> tuple[FloatArray, NDArray[np.bool_]]:
        """`elevation_m` and `is_water` of the same positions for little more than one of them."""
        lat, lon = _positions(latitude_deg, longitude_deg)
        answer = self._answer(lat.ravel(), lon.ravel())
        water = self._water(answer, lat.ravel(), lon.ravel())
        return answer.height_m.reshape(lat.shape), water.reshape(lat.shape)

    def mean_elevation_m(self, latitude_deg: ArrayLike, longitude_deg: ArrayLike, cell_m: float) -> FloatArray:
        """Mean heights [m] of cells of at most `cell_m` that hold the positions, for wide views.

        Rasters whose samples are not much finer than that are interpolated as ever. NaN where missing.
        """
        return self._coarse(latitude_deg, longitude_deg, cell_m, Blocks.means)

    def highest_elevation_m(self, latitude_deg: ArrayLike, longitude_deg: ArrayLike, cell_m: float) -> FloatArray:
        """As `mean_elevation_m`, but the highest ground of each cell: never below `elevation_m` there."""
        return self._coarse(latitude_deg, longitude_deg, cell_m, Blocks.maxima)

    def _coarse(
        self,
        latitude_deg: ArrayLike,
        longitude_deg: ArrayLike,
        cell_m: float,
        heights: Callable[[Blocks, NDArray[np.intp], NDArray[np.intp], float], FloatArray],
    ) -> FloatArray:
        lat, lon = _positions(latitude_deg, longitude_deg)
        height = np.full(lat.size, np.nan)
        for start in range(0, lat.size, _GROUP):
            group = slice(start, start + _GROUP)
            self._coarse_group(lat.ravel()[group], lon.ravel()[group], cell_m, heights, height[group])
        return height.reshape(lat.shape)

    def _coarse_group(
        self,
        lat: FloatArray,
        lon: FloatArray,
        cell_m: float,
        heights: Callable[[Blocks, NDArray[np.intp], NDArray[np.intp], float], FloatArray],
        height: FloatArray,
    ) -> None:
        for _, layer, _ in self._near(lat, lon):
            grid = layer.raster.grid
            asked = np.nonzero(np.isnan(height))[0]
            if cell_m < COARSE[1] * grid.spacing_m:
                height[asked] = self._interpolate(layer, lat[asked], lon[asked], bridged=False)
                continue
            row, column = grid.index(lat[asked], lon[asked])
            inside = (row > -0.5) & (row < grid.rows - 0.5) & (column > -0.5) & (column < grid.columns - 0.5)
            height[asked[inside]] = heights(
                layer.blocks,
                np.clip(np.floor(row[inside]), 0, grid.rows - 2).astype(np.intp),
                np.clip(np.floor(column[inside]), 0, grid.columns - 2).astype(np.intp),
                cell_m / grid.spacing_m,
            )

    def finest_spacing_m(self, south: float, west: float, north: float, east: float) -> float:
        """Spacing of the finest raster that reaches into a box [deg], in m; infinite if none does."""
        near = self._near(np.array([south, north]), np.array([west, east]))
        return min((layer.raster.grid.spacing_m for _, layer, _ in near), default=float("inf"))

    def covers(self, latitude_deg: float, longitude_deg: float) -> bool:
        """Whether there is an elevation at a position."""
        return bool(np.isfinite(self.elevation_m(latitude_deg, longitude_deg)).all())

    def _answer(self, lat: FloatArray, lon: FloatArray) -> _Answer:
        answer = _Answer(np.full(lat.size, np.nan), np.full(lat.size, -1), np.zeros(lat.size, dtype=bool))
        for start in range(0, lat.size, _GROUP):
            group = slice(start, start + _GROUP)
            self._answer_group(
                lat[group],
                lon[group],
                _Answer(answer.height_m[group], answer.layer[group], answer.bridged[group]),
            )
        return answer

    def _answer_group(self, lat: FloatArray, lon: FloatArray, answer: _Answer) -> None:
        """Fill the answer for a few positions."""
        near = self._near(lat, lon)
        reached = np.zeros(lat.size, dtype=bool)
        for bridged in (False, True):
            for number, layer, holds_all in near:
                asked = answer.layer < 0
                if bridged:
                    asked &= reached
                if not holds_all:
                    asked &= layer.raster.grid.near(lat, lon)
                if not asked.any():
                    continue
                reached |= asked
                which = slice(None) if asked.all() else np.nonzero(asked)[0]
                height = self._interpolate(layer, lat[which], lon[which], bridged)
                known = np.isfinite(height)
                answer.height_m[which] = height
                answer.layer[which] = np.where(known, number, -1)
                answer.bridged[which] = known & bridged

    def _near(self, lat: FloatArray, lon: FloatArray) -> list[tuple[int, _Layer, bool]]:
        """Layers whose bounding box meets that of the positions, their numbers, and if it holds them all."""
        south, north = np.fmin.reduce(lat, initial=90.0), np.fmax.reduce(lat, initial=-90.0)
        west, east = np.fmin.reduce(lon, initial=540.0), np.fmax.reduce(lon, initial=-540.0)
        if not (south <= north and west <= east):
            return []
        box = (south, west, north, east)
        return [
            (number, layer, layer.raster.grid.holds(*box))
            for number, layer in enumerate(self._layers)
            if layer.raster.grid.meets(*box)
        ]

    def _interpolate(self, layer: _Layer, lat: FloatArray, lon: FloatArray, bridged: bool) -> FloatArray:
        """Bilinear heights of one raster, NaN outside its outer pixel edges and at voids."""
        grid = layer.raster.grid
        row, column = grid.index(lat, lon)
        inside = _surrounded(grid, row, column)
        if inside.all():
            return _within(layer, row, column, bridged)
        height = np.full(lat.size, np.nan)
        height[inside] = _within(layer, row[inside], column[inside], bridged)
        half_out = ~inside & (row >= -0.5) & (row <= grid.rows - 0.5)
        half_out &= (column >= -0.5) & (column <= grid.columns - 0.5)
        if half_out.any():
            height[half_out] = self._across_edge(layer, row[half_out], column[half_out], bridged)
        return height

    def _across_edge(self, layer: _Layer, row: FloatArray, column: FloatArray, bridged: bool) -> FloatArray:
        """Heights in the outermost half cells, whose outer corners belong to the neighbours."""
        grid = layer.raster.grid
        top, left = np.floor(row).astype(np.intp), np.floor(column).astype(np.intp)
        corners = np.empty((4, row.size))
        for corner, (down, right) in enumerate(((0, 0), (0, 1), (1, 0), (1, 1))):
            r, c = top + down, left + right
            own_r, own_c = np.clip(r, 0, grid.rows - 1), np.clip(c, 0, grid.columns - 1)
            corners[corner] = layer.blocks.samples(own_r, own_c, bridged)
            # At the ground's outer edge the sample beside stands for the one that nobody has.
            for beside_r, beside_c in ((r, own_c), (own_r, c), (r, c)):
                foreign = (beside_r != own_r) | (beside_c != own_c)
                place = grid.position(beside_r[foreign].astype(float), beside_c[foreign].astype(float))
                neighbour = self._neighbour(*place)
                corners[corner, foreign] = np.where(np.isfinite(neighbour), neighbour, corners[corner, foreign])
        return bilinear(corners, row - top, column - left)

    def _neighbour(self, lat: FloatArray, lon: FloatArray) -> FloatArray:
        """Heights from the first raster whose samples surround a position, NaN where none does."""
        height = np.full(lat.size, np.nan)
        for _, layer, _ in self._near(lat, lon):
            grid = layer.raster.grid
            open_still = np.nonzero(np.isnan(height))[0]
            open_still = open_still[grid.near(lat[open_still], lon[open_still])]
            if open_still.size == 0:
                continue
            row, column = grid.index(lat[open_still], lon[open_still])
            inside = _surrounded(grid, row, column)
            height[open_still[inside]] = _within(layer, row[inside], column[inside], bridged=False)
        return height

    def _water(self, answer: _Answer, lat: FloatArray, lon: FloatArray) -> NDArray[np.bool_]:
        wet = np.zeros(lat.size, dtype=bool)
        for number, layer in enumerate(self._layers):
            mine = np.nonzero((answer.layer == number) & ~answer.bridged)[0]
            if mine.size == 0:
                continue
            grid = layer.raster.grid
            row, column = grid.index(lat[mine], lon[mine])
            nearest_row = np.clip(np.rint(row), 0, grid.rows - 1).astype(np.intp)
            nearest_column = np.clip(np.rint(column), 0, grid.columns - 1).astype(np.intp)
            wet[mine] = layer.blocks.water(nearest_row, nearest_column)
        return wet


@dataclass(frozen=True, slots=True)
class _Answer:
    height_m: FloatArray  # (n,) NaN where missing
    layer: NDArray[np.intp]  # (n,) which raster answered, -1 for none
    bridged: NDArray[np.bool_]  # (n,) across a small void


def _files(paths: Sequence[Path]) -> list[Path]:
    """Files as named, and in folders those that are named like rasters, at any depth."""
    files: list[Path] = []
    for path in paths:
        if path.is_dir():
            files += sorted(p for p in path.rglob("*") if p.name.lower().endswith(SUFFIXES) and p.is_file())
        else:
            files.append(path)
    return list(dict.fromkeys(files))


def _positions(latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Positions of a common shape; what is infinite becomes NaN."""
    lat, lon = (np.asarray(value, dtype=float) for value in (latitude_deg, longitude_deg))
    lat, lon = (
        value if np.isfinite(value).all() else np.where(np.isfinite(value), value, np.nan) for value in (lat, lon)
    )
    lat, lon = np.broadcast_arrays(lat, lon)
    return lat, lon


def _surrounded(grid: Grid, row: FloatArray, column: FloatArray) -> NDArray[np.bool_]:
    """Whether positions lie between samples of a raster, rounding errors allowed for."""
    inside: NDArray[np.bool_] = (row >= -ROUNDING) & (row <= grid.rows - 1 + ROUNDING)
    inside &= (column >= -ROUNDING) & (column <= grid.columns - 1 + ROUNDING)
    return inside


def _within(layer: _Layer, row: FloatArray, column: FloatArray, bridged: bool) -> FloatArray:
    """Bilinear heights at positions between samples of one raster."""
    grid = layer.raster.grid
    top = np.clip(row.astype(np.intp), 0, grid.rows - 2)
    left = np.clip(column.astype(np.intp), 0, grid.columns - 2)
    return bilinear(layer.blocks.cells(top, left, bridged), row - top, column - left)
