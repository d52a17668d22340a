"""Many rasters as one ground, the finest first."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike, NDArray

from terrain.bilinear import bilinear
from terrain.blocks import COARSE, Blocks
from terrain.cache import LIMIT_BYTES, ArrayCache
from terrain.cover_sheet import cover_sheet
from terrain.errors import RasterError
from terrain.files import Refused, raster_files
from terrain.grid import Boxes
from terrain.headers import open_rasters
from terrain.layer import Layer, surrounded, within
from terrain.overlay import STANDING_SHARE, Overlay
from terrain.raster import Raster
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
    attribution: str  # as the file or its source says, else ""
    unit: str  # of the numbers in the file; heights are in metres everywhere


class Ground:
    """Elevation and water at any position, from every raster that was given.

    At each position the finest raster with a value answers (equally fine ones by name). Where it has
    a void, the next one does; where all have, a void of up to 10 samples across is bridged from its
    rim in the finest; a larger one stays missing. Between two tiles that share no samples, the cells
    across the seam take their corners from both; at an outer edge the last sample holds for half a cell.
    """

    def __init__(
        self, layers: Sequence[Layer], refused: Sequence[Refused], cache: ArrayCache, overlay: Overlay | None = None
    ) -> None:
        self._layers = tuple(layers)
        self._boxes = Boxes([layer.raster.grid for layer in layers])
        self.refused = tuple(refused)
        self._cache = cache
        self.overlay = overlay

    @classmethod
    def open(
        cls,
        paths: Sequence[Path],
        cache_dir: Path,
        overlay: Overlay | None = None,
        cache_limit_bytes: float = LIMIT_BYTES,
    ) -> Ground:
        """Ground of files and of the rasters in folders; what cannot be used stands in `refused`.

        In a folder, files with other names than rasters have are passed over; a file named itself is
        always tried. Decoded samples are kept in `cache_dir`, or in a temporary folder if that is read-only.
        With an overlay, what no raster knows is sea where the coastline says so, and land cover has its say.
        """
        cache = ArrayCache(cache_dir, cache_limit_bytes)
        layers, refused, seen = [], [], set()
        for raster in open_rasters(raster_files(paths), cache_dir):
            if isinstance(raster, Refused):
                refused.append(raster)
                continue
            identity = (raster.content, raster.grid.transform, raster.crs)
            if identity not in seen:
                seen.add(identity)
                layers.append(Layer(raster, Blocks(raster, cache, coast=overlay is not None)))
        layers.sort(key=lambda layer: (round(layer.raster.grid.spacing_m, 1), layer.raster.name))
        return cls(layers, refused, cache, overlay)

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
                    unit=raster.unit,
                )
            )
        return tuple(infos)

    @cached_property
    def kinds(self) -> tuple[str, ...]:
        """Kind of each raster, in the order of `rasters`."""
        return tuple(layer.raster.kind for layer in self._layers)

    @cached_property
    def spacings_m(self) -> tuple[float, ...]:
        """Spacing of each raster [m], in the order of `rasters`."""
        return tuple(layer.raster.grid.spacing_m for layer in self._layers)

    @property
    def decoding_s(self) -> float:
        """Seconds that this process has spent so far on unpacking samples that were not in the cache."""
        return sum(layer.blocks.decoding_s for layer in self._layers)

    @property
    def credits(self) -> list[str]:
        """What the rasters or their sources ask to be named, each once."""
        return sorted({layer.raster.attribution for layer in self._layers} - {""})

    @cached_property
    def version(self) -> str:
        """Short hash that changes with any raster, its place or its kind."""
        digest = hashlib.sha256()
        for layer in self._layers:
            raster = layer.raster
            digest.update(f"{raster.content} {raster.kind} {raster.crs} {tuple(raster.grid.transform)}\n".encode())
        if self.overlay is not None:
            digest.update(self.overlay.version.encode())
        return digest.hexdigest()[:12]

    def sheets(self, wanted: Callable[[Raster], bool] = lambda _: True) -> list[Sheet]:
        """The wanted rasters laid together as far as one array can hold them (sheet.py), decoded the first time.

        With the land cover under them, if there is any; those whose cover would be too large are left out.
        Raises RasterError for a damaged file and CacheError if the arrays cannot be kept.
        """
        sheets = sheets_of([(layer.raster, layer.blocks) for layer in self._layers], self._cache, wanted)
        if self.overlay is None or self.overlay.cover is None:
            return sheets
        cover = self.overlay.cover
        under = [cover_sheet(cover, one.grid, STANDING_SHARE.get(one.kind, 0.0), self._cache) for one in sheets]
        return [replace(one, cover=found) for one, found in zip(sheets, under, strict=True) if found is not None]

    def survey(self) -> Ground:
        """Read every raster whole, once: void shares are known, and damaged files join `refused`."""
        layers, refused = [], list(self.refused)
        for layer in self._layers:
            try:
                layer.blocks.read_whole()
                layers.append(layer)
            except RasterError as error:
                refused.append(Refused(layer.raster.path, str(error)))
        return Ground(layers, refused, self._cache, self.overlay)

    def elevation_m(self, latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> FloatArray:
        """Height above sea level [m], bilinear between samples; NaN where no raster has a value.

        Positions broadcast and give the shape; outside the rasters, out of range and NaN give NaN.
        Raises RasterError for a damaged file and CacheError if decoded samples cannot be kept.
        """
        lat, lon = _positions(latitude_deg, longitude_deg)
        height_m = self._answer(lat.ravel(), lon.ravel()).height_m.reshape(lat.shape)
        return height_m if self.overlay is None else self.overlay.filled(lat, lon, height_m)

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
        return self.elevation_and_water(latitude_deg, longitude_deg)[1]

    def elevation_and_water(
        self, latitude_deg: ArrayLike, longitude_deg: ArrayLike
    ) -> tuple[FloatArray, NDArray[np.bool_]]:
        """`elevation_m` and `is_water` of the same positions for little more than one of them."""
        lat, lon = _positions(latitude_deg, longitude_deg)
        flat_lat, flat_lon = lat.ravel(), lon.ravel()
        answer = self._answer(flat_lat, flat_lon)
        height_m, water = answer.height_m, self._water(answer, flat_lat, flat_lon)
        if self.overlay is not None:
            water = self.overlay.sea(flat_lat, flat_lon, height_m, water)
            height_m = self.overlay.filled(flat_lat, flat_lon, height_m)
        return height_m.reshape(lat.shape), water.reshape(lat.shape)

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
        open_still = np.nonzero((answer.layer < 0) & ~reached & np.isfinite(lat + lon))[0]
        if open_still.size:
            answer.height_m[open_still], answer.layer[open_still] = self._gaps(lat[open_still], lon[open_still])

    def _near(self, lat: FloatArray, lon: FloatArray) -> list[tuple[int, Layer, bool]]:
        """Layers whose bounding box meets that of the positions, their numbers, and if it holds them all."""
        south, north = np.fmin.reduce(lat, initial=90.0), np.fmax.reduce(lat, initial=-90.0)
        west, east = np.fmin.reduce(lon, initial=540.0), np.fmax.reduce(lon, initial=-540.0)
        if not (south <= north and west <= east):
            return []
        box = (south, west, north, east)
        return [
            (number, self._layers[number], self._layers[number].raster.grid.holds(*box))
            for number in self._boxes.meeting(*box)
        ]

    def _interpolate(self, layer: Layer, lat: FloatArray, lon: FloatArray, bridged: bool) -> FloatArray:
        """Bilinear heights of one raster, NaN outside its outer pixel edges and at voids."""
        grid = layer.raster.grid
        row, column = grid.index(lat, lon)
        inside = surrounded(grid, row, column)
        if inside.all():
            return within(layer, row, column, bridged)
        height = np.full(lat.size, np.nan)
        height[inside] = within(layer, row[inside], column[inside], bridged)
        half_out = ~inside & (row >= -0.5) & (row <= grid.rows - 0.5)
        half_out &= (column >= -0.5) & (column <= grid.columns - 0.5)
        if half_out.any():
            height[half_out] = self._across_edge(layer, row[half_out], column[half_out], bridged)
        return height

    def _gaps(self, lat: FloatArray, lon: FloatArray, deep: bool = True) -> tuple[FloatArray, NDArray[np.intp]]:
        """Heights in the strip that unequal pixels leave between two tiles, and the layers that answer.

        The outermost cell of a tile is whole there: up to a neighbour's samples, which must be known.
        """
        height, answering = np.full(lat.size, np.nan), np.full(lat.size, -1)
        for number in self._boxes.meeting(lat.min(), lon.min(), lat.max(), lon.max(), cells=1.0):
            layer = self._layers[number]
            grid = layer.raster.grid
            row, column = grid.index(lat, lon)
            beside = np.isnan(height) & (row > -1) & (row < grid.rows) & (column > -1) & (column < grid.columns)
            beside &= ~surrounded(grid, row, column)
            if beside.any():
                height[beside] = self._across_edge(layer, row[beside], column[beside], False, whole=True, deep=deep)
                answering[beside & np.isfinite(height)] = number
        return height, answering

    def _across_edge(
        self, layer: Layer, row: FloatArray, column: FloatArray, bridged: bool, whole: bool = False, deep: bool = True
    ) -> FloatArray:
        """Heights in the outermost half cells, whose outer corners belong to the neighbours.

        With `whole`, in all of the outermost cells, NaN where no neighbour knows a corner.
        """
        grid = layer.raster.grid
        top, left = np.floor(row).astype(np.intp), np.floor(column).astype(np.intp)
        corners = np.empty((4, row.size))
        for corner, (down, right) in enumerate(((0, 0), (0, 1), (1, 0), (1, 1))):
            r, c = top + down, left + right
            own_r, own_c = np.clip(r, 0, grid.rows - 1), np.clip(c, 0, grid.columns - 1)
            corners[corner] = layer.blocks.samples(own_r, own_c, bridged)
            # At the ground's outer edge the sample beside stands for the one that nobody has.
            for beside_r, beside_c in ((r, c),) if whole else ((r, own_c), (own_r, c), (r, c)):
                foreign = (beside_r != own_r) | (beside_c != own_c)
                place = grid.position(beside_r[foreign].astype(float), beside_c[foreign].astype(float))
                neighbour = self._neighbour(*place, deep)
                if not whole:
                    neighbour = np.where(np.isfinite(neighbour), neighbour, corners[corner, foreign])
                corners[corner, foreign] = neighbour
        return bilinear(corners, row - top, column - left)

    def _neighbour(self, lat: FloatArray, lon: FloatArray, deep: bool) -> FloatArray:
        """Heights from the first raster whose samples surround a position, NaN where none does.

        With `deep`, also between the samples of two: where tiles of unequal pixels meet at a corner.
        """
        height = np.full(lat.size, np.nan)
        for _, layer, _ in self._near(lat, lon):
            grid = layer.raster.grid
            open_still = np.nonzero(np.isnan(height))[0]
            open_still = open_still[grid.near(lat[open_still], lon[open_still])]
            if open_still.size == 0:
                continue
            row, column = grid.index(lat[open_still], lon[open_still])
            inside = surrounded(grid, row, column)
            height[open_still[inside]] = within(layer, row[inside], column[inside], bridged=False)
        open_still = np.nonzero(np.isnan(height) & np.isfinite(lat + lon))[0]
        if deep and open_still.size:
            height[open_still] = self._gaps(lat[open_still], lon[open_still], deep=False)[0]
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


def _positions(latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Positions of a common shape; what is infinite becomes NaN."""
    lat, lon = (np.asarray(value, dtype=float) for value in (latitude_deg, longitude_deg))
    lat, lon = (
        value if np.isfinite(value).all() else np.where(np.isfinite(value), value, np.nan) for value in (lat, lon)
    )
    lat, lon = np.broadcast_arrays(lat, lon)
    return lat, lon
