"""Land cover: what stands on the ground, by class codes of open maps.

Rasters of class codes in any coordinate system, the finest first; the nearest pixel answers. Each file's class
table is known from its sidecar (`classes = "worldcover"`), else from its name.
"""

from __future__ import annotations

import csv
import hashlib
import json
from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray
from rasterio.errors import RasterioError
from rasterio.windows import Window

from terrain import raster
from terrain.cache import ArrayCache
from terrain.errors import RasterError
from terrain.files import Refused, raster_files
from terrain.grid import Grid

FloatArray = NDArray[np.float64]
CodeArray = NDArray[np.uint8]

UNKNOWN = 0  # the category of what no map knows; the others are 1, 2 … in CATEGORIES
_DATA = Path(__file__).parent / "data"
_SUFFIXES = (".tif", ".tiff")
_BLOCK = 2048
_IN_NAMES = {"worldcover": "worldcover", "corine": "corine", "clc": "corine", "u2018": "corine", "nlcd": "nlcd"}


@cache
def _categories() -> tuple[tuple[str, float], ...]:
    with (_DATA / "cover_categories.csv").open(encoding="utf-8", newline="") as file:
        return tuple((row["category"], float(row["height_m"])) for row in csv.DictReader(file))


@cache
def categories() -> tuple[str, ...]:
    """Names of the categories by number; the first is what no map knows."""
    return ("unknown", *(name for name, _ in _categories()))


def heights_m() -> FloatArray:
    """Height above the ground that stands for each category, by number; NaN for unknown. (c,)"""
    return np.array([np.nan, *(height for _, height in _categories())])


def numbers_of(*names: str) -> list[int]:
    """Numbers of categories by name."""
    return [categories().index(name) for name in names]


@cache
def _tables() -> dict[str, CodeArray]:
    """For each class table the category number of each code 0 to 999."""
    tables: dict[str, CodeArray] = {}
    with (_DATA / "cover_classes.csv").open(encoding="utf-8", newline="") as file:
        for row in csv.DictReader(file):
            table = tables.setdefault(row["table"], np.zeros(1000, dtype=np.uint8))
            table[int(row["code"])] = categories().index(row["category"])
    return tables


def class_tables() -> tuple[str, ...]:
    """Names of the known class tables."""
    return tuple(sorted(_tables()))


@dataclass(frozen=True, slots=True)
class CoverRaster:
    """One raster of class codes."""

    path: Path
    classes: str  # its class table
    grid: Grid
    attribution: str
    content: str  # hash of the file and its class table

    @property
    def name(self) -> str:
        """The file's name."""
        return self.path.name

    def read(self, row: int, column: int, rows: int, columns: int) -> CodeArray:
        """Category numbers of a window. Raises RasterError where the file is damaged there."""
        with raster.opened(self.path) as file:
            try:
                codes = file.read(1, window=Window(column, row, columns, rows))
            except (RasterioError, MemoryError) as error:
                raise RasterError(f"{self.name} is damaged or cut short near row {row}: fetch it again") from error
        known = (codes >= 0) & (codes < 1000)
        return np.asarray(_tables()[self.classes][np.where(known, codes, 0).astype(np.intp)])


class Cover:
    """Category of the land cover at any position, from every raster that was given."""

    def __init__(self, rasters: Sequence[CoverRaster], refused: Sequence[Refused], kept: ArrayCache) -> None:
        self.rasters = tuple(rasters)
        self.refused = tuple(refused)
        self._kept = kept

    @classmethod
    def open(cls, paths: Sequence[Path], cache_dir: Path) -> Cover:
        """Cover of files and of the rasters in folders; what cannot be used stands in `refused`."""
        rasters, refused = [], []
        for path in raster_files(paths, _SUFFIXES):
            try:
                rasters.append(open_cover_raster(path))
            except RasterError as error:
                refused.append(Refused(path, str(error)))
        rasters.sort(key=lambda one: (round(one.grid.spacing_m, 1), one.name))
        return cls(rasters, refused, ArrayCache(cache_dir))

    @property
    def version(self) -> str:
        """Short hash that changes with any raster and with the tables."""
        digest = hashlib.sha256()
        for name in ("cover_classes.csv", "cover_categories.csv"):
            digest.update((_DATA / name).read_bytes())
        for one in self.rasters:
            digest.update(f"{one.content} {tuple(one.grid.transform)}\n".encode())
        return digest.hexdigest()[:12]

    def category(self, latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> CodeArray:
        """Category number of the nearest pixel at positions, which broadcast; 0 where no map knows.

        Raises RasterError for a damaged file and CacheError if nothing can be kept.
        """
        lat, lon = np.broadcast_arrays(np.asarray(latitude_deg, dtype=float), np.asarray(longitude_deg, dtype=float))
        shape, lat, lon = lat.shape, lat.ravel(), lon.ravel()
        found = np.zeros(lat.size, dtype=np.uint8)
        for one in self.rasters:
            open_still = np.nonzero((found == UNKNOWN) & one.grid.near(lat, lon))[0]
            if open_still.size == 0:
                continue
            row, column = (np.rint(value) for value in one.grid.index(lat[open_still], lon[open_still]))
            inside = (row >= 0) & (row < one.grid.rows) & (column >= 0) & (column < one.grid.columns)
            place = row[inside].astype(np.intp), column[inside].astype(np.intp)
            found[open_still[inside]] = self._at(one, *place)
        return found.reshape(shape)

    def height_m(self, latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> FloatArray:
        """Height that stands for the cover at positions [m]; NaN where no map knows."""
        return np.asarray(heights_m()[self.category(latitude_deg, longitude_deg)])

    def _at(self, one: CoverRaster, row: NDArray[np.intp], column: NDArray[np.intp]) -> CodeArray:
        values = np.zeros(row.size, dtype=np.uint8)
        blocks = (row // _BLOCK) * (one.grid.columns // _BLOCK + 1) + column // _BLOCK
        for block in np.unique(blocks):
            which = np.nonzero(blocks == block)[0]
            top, left = (int(value[which[0]]) // _BLOCK * _BLOCK for value in (row, column))
            values[which] = self._block(one, top, left)[row[which] - top, column[which] - left]
        return values

    def _block(self, one: CoverRaster, top: int, left: int) -> NDArray[Any]:
        name = f"{one.content}/cover-{top}-{left}"
        kept = self._kept.load(name)
        if kept is None:
            rows, columns = min(_BLOCK, one.grid.rows - top), min(_BLOCK, one.grid.columns - left)
            kept = self._kept.keep(name, one.read(top, left, rows, columns))
        return kept


def open_cover_raster(path: Path, classes: str | None = None) -> CoverRaster:
    """Read what a raster of class codes says of itself.

    `classes` names its class table, where neither the sidecar nor the file's name does.
    Raises RasterError for what cannot be used.
    """
    said = raster.declared(path)
    table = classes or said.get("classes") or _table_by_name(path)
    if table not in _tables():
        came = f'has class table "{table}"' if table else "does not say by which table its classes are numbered"
        raise RasterError(
            f"{path.name} {came}: add it with `gainworth cover add FILE --classes NAME`, "
            f"NAME one of {', '.join(class_tables())}"
        )
    with raster.opened(path) as file:
        if np.dtype(file.dtypes[0]).kind not in "iu":
            raise RasterError(f"{path.name} has {file.dtypes[0]} samples: a map of classes has whole numbers")
        grid = raster.placed(path, file, said.get("crs"))
        attribution = said.get("attribution", file.tags().get("TIFFTAG_COPYRIGHT", ""))
        return CoverRaster(path, table, grid, attribution, raster.content_of(path, (table, file.shape)))


def declare_cover(path: Path, classes: str | None, crs: str | None) -> None:
    """Write a map's class table and coordinate system down beside it."""
    said = raster.declared(path) | {k: v for k, v in (("classes", classes), ("crs", crs)) if v is not None}
    lines = (f"{key} = {json.dumps(value, ensure_ascii=False)}\n" for key, value in sorted(said.items()))
    raster.sidecar(path).write_text("".join(lines), encoding="utf-8")


def _table_by_name(path: Path) -> str | None:
    name = path.name.lower()
    return next((table for word, table in _IN_NAMES.items() if word in name), None)
