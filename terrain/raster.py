"""Opens one elevation raster of any kind. Only this module opens raster files.

GeoTIFF in any coordinate system and number type, .hgt (plain, zipped, gzipped), ESRI ASCII grids.
What a file does not say of itself stands in a sidecar `NAME.gainworth.toml` beside it.
"""

from __future__ import annotations

import hashlib
import json
import shlex
import threading
import tomllib
import warnings
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import rasterio
from affine import Affine
from numpy.typing import NDArray
from pyproj import CRS
from pyproj.exceptions import CRSError
from rasterio._err import CPLE_BaseError  # what GDAL says of a damaged header; rasterio lets it through
from rasterio.windows import Window

from terrain import hgt
from terrain.ascii_grid import check_ascii_grid
from terrain.errors import RasterError, UnplacedRasterError
from terrain.grid import Grid, crs_text

KINDS = ("surface", "radar-surface", "bare")
SUFFIXES = (".tif", ".tiff", ".asc", *hgt.SUFFIXES)

# Samples along each side of a block: whole tiles of 1 arc-second, and 32 MB of 16-bit samples.
# A multiple of the largest coarse cell (blocks.py).
BLOCK_SIDE = 4096

_UNREADABLE = (
    "is no raster we can read, or is cut short: use GeoTIFF, .hgt, .hgt.zip, .hgt.gz or an ESRI ASCII grid (.asc)"
)
_DRIVERS = {".tif": "GTiff", ".tiff": "GTiff", ".asc": "AAIGrid"}
_METRES = {
    "": 1.0, "m": 1.0, "metre": 1.0, "meter": 1.0, "metres": 1.0, "meters": 1.0,
    "ft": 0.3048, "foot": 0.3048, "feet": 0.3048, "international foot": 0.3048,
    "us survey foot": 1200 / 3937, "us-ft": 1200 / 3937, "us_survey_foot": 1200 / 3937, "ftus": 1200 / 3937,
}  # fmt: skip
# No ground stands outside these heights; deeper than the Mariana trench or above Everest is a void
# that the file forgot to declare, and so is -9999.
_LOWEST_M, _HIGHEST_M = -12_000.0, 9_000.0
_FORGOTTEN_VOID = -9999.0
_CACHED_AS = {"uint8": "int16", "int8": "int16", "int64": "float64", "uint64": "float64"}
_NUMBERS = ("int16", "uint16", "int32", "uint32", "float32", "float64", *_CACHED_AS)
_WHOLLY_HASHED_BYTES = 4 << 20
_LARGEST_BLOCK = 1 << 27  # samples that must be unpacked at once: half a gigabyte of floats
_WARNINGS = threading.Lock()


@dataclass(frozen=True, slots=True)
class Raster:
    """One raster that can be used: where its samples lie and how their numbers become metres."""

    path: Path
    kind: str  # one of KINDS
    grid: Grid
    crs: str  # short name of the coordinate system as the file or the sidecar says
    dtype: str  # of the samples as `read` gives them
    void: float  # value of a missing sample in `read`; NaN for float samples
    zero_declared_void: bool
    unit: str  # of the numbers in the file, as it says or as declared
    scale: float  # metres = sample × scale + offset_m
    offset_m: float
    block_rows: int  # a block that the file yields without decoding others in vain
    block_columns: int
    attribution: str
    content: str  # hash of the file and of what decides how it is decoded

    @property
    def name(self) -> str:
        """The file's name."""
        return self.path.name

    def read(self, row: int, column: int, rows: int, columns: int) -> NDArray[Any]:
        """Samples of a window in `dtype`, missing ones as `void`.

        Where the file declares 0 as void, zeros stay zeros: whether they are ground is seen only
        from what lies round them (voids.py).

        Raises RasterError where the file is damaged there.
        """
        if _is_hgt(self.path):
            raw = hgt.read_hgt(self.path)[row : row + rows, column : column + columns]
            missing = raw == hgt.VOID
        else:
            raw, missing = _window(self.path, Window(column, row, columns, rows))
        if self.zero_declared_void:
            missing &= raw != 0
        lowest, highest = ((limit - self.offset_m) / self.scale for limit in (_LOWEST_M, _HIGHEST_M))
        if not (max(lowest, _FORGOTTEN_VOID) < raw.min() and raw.max() <= highest):  # no number: not so either
            missing |= ~((raw >= lowest) & (raw <= highest)) | (raw == _FORGOTTEN_VOID)
        samples = raw.astype(self.dtype, copy=False)
        if missing.any():
            samples[missing] = self.void
        return np.asarray(samples)


def declare(path: Path, crs: str | None = None, kind: str | None = None, unit: str | None = None) -> Path:
    """Write down beside a raster what it does not say itself; what is not given stays as it was.

    Parameters
    ----------
    path : the raster.
    crs : its coordinate system, such as "EPSG:4326"; goes before the one in the file.
    kind : "surface" (with houses and trees), "radar-surface" (in between, as SRTM) or "bare".
    unit : of its heights, such as "m", "ft" or "us survey foot"; goes before the one in the file.

    Returns the sidecar's path. Raises RasterError for an unknown coordinate system or kind, a
    missing raster, or a folder that cannot be written.
    """
    if not path.is_file():
        raise RasterError(f"{path} is not a file: give the path of a raster")
    said = declared(path)
    said |= {key: value for key, value in (("crs", crs), ("kind", kind), ("unit", unit)) if value is not None}
    _check_declared(path, said)
    beside = sidecar(path)
    try:
        beside.write_text("".join(f"{key} = {json.dumps(value)}\n" for key, value in sorted(said.items())))
    except OSError as error:
        raise RasterError(
            f"{beside} cannot be written ({error.strerror}): copy {path.name} to a folder you may write"
        ) from error
    return beside


def open_raster(path: Path) -> Raster:
    """Read what a raster says of itself, and check that it can be used.

    Raises
    ------
    UnplacedRasterError
        Neither the file nor the sidecar says in which coordinate system it lies.
    RasterError
        It is no raster, damaged, of a kind we do not read, or no elevation.
    """
    said = declared(path)
    _check_declared(path, said)
    try:
        if not path.is_file() or path.stat().st_size == 0:
            raise RasterError(f"{path.name} is empty or not a file: fetch it again or take it out")
        if path.suffix.lower() == ".asc":
            check_ascii_grid(path)
        return _hgt_header(path, said) if _is_hgt(path) else _header(path, said)
    except CPLE_BaseError as error:
        raise RasterError(f"{path.name} is damaged ({error}): fetch it again or take it out") from error
    except OSError as error:
        raise RasterError(f"{path.name} cannot be read ({error.strerror or error}): see to its permissions") from error


def _is_hgt(path: Path) -> bool:
    return path.name.lower().endswith(hgt.SUFFIXES)


def _hgt_header(path: Path, said: dict[str, str]) -> Raster:
    side, transform = hgt.hgt_header(path)
    crs = CRS.from_user_input(said.get("crs", "EPSG:4326"))
    return Raster(
        path=path,
        kind=said.get("kind", "radar-surface"),
        grid=_grid(path, side, side, transform, crs),
        crs=crs_text(crs),
        dtype="int16",
        void=hgt.VOID,
        zero_declared_void=False,
        unit="m",
        scale=1.0,
        offset_m=0.0,
        block_rows=side,
        block_columns=side,
        attribution=said.get("attribution", ""),
        content=content_of(path, ("hgt", side)),
    )


def _header(path: Path, said: dict[str, str]) -> Raster:
    with opened(path) as file:
        _check_bands(path, file)
        crs = _crs(path, file, said.get("crs"))
        grid = placed(path, file, said.get("crs"))
        unit, scale, offset_m = _metres(path, file, crs, said.get("unit"))
        _check_end(path, file)
        dtype = _CACHED_AS.get(file.dtypes[0], file.dtypes[0])
        striped = file.block_shapes[0][1] == file.width <= 16 * BLOCK_SIDE
        return Raster(
            path=path,
            kind=said.get("kind", "surface"),
            grid=grid,
            crs=crs_text(crs),
            dtype=dtype,
            void=_void(dtype, file.nodata),
            zero_declared_void=file.nodata == 0,
            unit=unit,
            scale=scale,
            offset_m=offset_m,
            block_rows=max(1, BLOCK_SIDE**2 // file.width // 64) * 64 if striped else BLOCK_SIDE,
            block_columns=file.width if striped else BLOCK_SIDE,
            attribution=said.get("attribution", file.tags().get("TIFFTAG_COPYRIGHT", "")),
            content=content_of(path, (file.shape, dtype, file.nodata, scale, offset_m)),
        )


@contextmanager
def opened(path: Path) -> Iterator[Any]:
    """The open dataset. The driver follows from the name: nothing else is tried."""
    driver = _DRIVERS.get(path.suffix.lower())
    if driver is None:
        raise RasterError(f"{path.name} {_UNREADABLE}")
    # GDAL takes a grid for whole numbers from its first lines, and would cut later decimals off.
    options = {"DATATYPE": "Float32"} if driver == "AAIGrid" else {"NUM_THREADS": "ALL_CPUS"}
    try:
        # A file without place makes rasterio warn; we answer that ourselves. The lock is for
        # the list of warning filters, which Python shares between threads.
        with _WARNINGS, warnings.catch_warnings():
            warnings.simplefilter("ignore", rasterio.errors.NotGeoreferencedWarning)
            file = rasterio.open(path, driver=driver, **options)
    except rasterio.errors.RasterioError as error:
        raise RasterError(f"{path.name} {_UNREADABLE}") from error
    with file:
        yield file


def placed(path: Path, file: Any, crs: str | None) -> Grid:
    """Where the samples of an open file lie; `crs` goes before its own. Raises RasterError where it does not say."""
    if np.prod(file.block_shapes[0]) > _LARGEST_BLOCK:
        raise RasterError(
            f"{path.name} is stored in pieces of {file.block_shapes[0][0]} × {file.block_shapes[0][1]} samples, too "
            "large to unpack: write it in tiles of 512, for instance with gdal_translate -co TILED=YES"
        )
    return _grid(path, file.height, file.width, _transform(path, file), _crs(path, file, crs))


def _window(path: Path, window: Window) -> tuple[NDArray[Any], NDArray[np.bool_]]:
    """Samples as they are stored, and which the file says are missing."""
    with opened(path) as file:
        try:
            samples = file.read(1, window=window)
            if file.mask_flag_enums[0] == [rasterio.enums.MaskFlags.all_valid]:
                return samples, np.zeros(samples.shape, dtype=bool)
            return samples, file.read_masks(1, window=window) == 0
        except (rasterio.errors.RasterioError, MemoryError) as error:
            raise RasterError(
                f"{path.name} is damaged or cut short near row {window.row_off}: fetch it again or take it out"
            ) from error


def _grid(path: Path, rows: int, columns: int, transform: Affine, crs: CRS) -> Grid:
    try:
        return Grid.place(rows, columns, transform, crs)
    except RasterError as error:
        raise RasterError(f"{path.name}: {error}. Declare the right one: {_command(path)}") from error


def _check_bands(path: Path, file: Any) -> None:
    """An elevation raster has one band of numbers (and perhaps a mask), and no colours."""
    alpha = rasterio.enums.ColorInterp.alpha
    heights = [band for band, use in enumerate(file.colorinterp, 1) if use != alpha]
    if heights != [1] or file.colorinterp[0] == rasterio.enums.ColorInterp.palette:
        what = "a colour table" if heights == [1] else f"{len(heights)} bands"
        raise RasterError(f"{path.name} has {what}: give an elevation raster with one band of heights")
    if file.dtypes[0] not in _NUMBERS:
        raise RasterError(f"{path.name} has {file.dtypes[0]} samples: use whole numbers or floats")
    if min(file.shape) < 2:
        raise RasterError(f"{path.name} has {file.height} × {file.width} samples: at least 2 × 2 are needed")


def _crs(path: Path, file: Any, declared: str | None) -> CRS:
    if declared is not None:
        stated = CRS.from_user_input(declared)
        if file.crs and not CRS.from_wkt(file.crs.to_wkt()).equals(stated, ignore_axis_order=True):
            raise RasterError(
                f"{path.name} says itself that it lies in {crs_text(CRS.from_wkt(file.crs.to_wkt()))}: "
                f"leave out --crs {declared}, or write the right one into the file"
            )
        return stated
    if not file.crs:
        raise UnplacedRasterError(
            f"{path.name} does not say in which coordinate system it lies. Declare it: "
            f"{_command(path, '4326')} "
            "(EPSG:4326 for degrees of longitude and latitude, else the number that its source names)"
        )
    try:
        return CRS.from_wkt(file.crs.to_wkt())
    except CRSError as error:
        raise UnplacedRasterError(
            f"{path.name} lies in a coordinate system that we do not know. Declare it: {_command(path)}"
        ) from error


def _command(path: Path, number: str | None = "NUMBER") -> str:
    crs = "" if number is None else f" --crs EPSG:{number}"
    return f"gainworth terrain add {shlex.quote(str(path))}{crs}"


def _transform(path: Path, file: Any) -> Affine:
    transform: Affine = file.transform
    if transform.is_identity or transform.is_degenerate:
        raise RasterError(
            f"{path.name} names a coordinate system but not where in it the samples lie: "
            "write its corner and pixel size into it, for instance with gdal_edit"
        )
    return transform


def _metres(path: Path, file: Any, crs: CRS, declared_unit: str | None) -> tuple[str, float, float]:
    """Unit, scale and offset from stored numbers to metres: as declared, by the band, or by the vertical system."""
    unit = (declared_unit or file.units[0] or "").strip().lower()
    if not unit and crs.is_compound:
        unit = crs.sub_crs_list[-1].axis_info[0].unit_name.strip().lower()
    if not unit and not crs.is_geographic and "foot" in crs.axis_info[0].unit_name.lower():
        raise RasterError(
            f"{path.name} lies in a coordinate system in feet and does not say whether its heights are, too. "
            f"Declare it: {_command(path, None)} --unit ft, or --unit m"
        )
    if unit not in _METRES:
        raise RasterError(f'{path.name} has heights in "{unit}": use metres or feet')
    factor = _METRES[unit]
    return unit or "m", factor * file.scales[0], factor * file.offsets[0]


def _check_end(path: Path, file: Any) -> None:
    """The last sample of a GeoTIFF can be read: else the file is cut short. (Grids of text are counted before.)"""
    if file.driver != "GTiff":
        return
    try:
        file.read(1, window=Window(file.width - 1, file.height - 1, 1, 1))
    except rasterio.errors.RasterioError as error:
        raise RasterError(f"{path.name} is cut short or damaged: fetch it again or take it out") from error


def _void(dtype: str, nodata: float | None) -> float:
    """A value that stands for "missing" in samples of this type."""
    if np.dtype(dtype).kind == "f":
        return float("nan")
    limits = np.iinfo(dtype)
    # 0 is a height even where the file says otherwise (see voids.py), so it cannot stand for a void.
    if nodata is not None and nodata != 0 and limits.min <= nodata <= limits.max and nodata == int(nodata):
        return float(nodata)
    return float(limits.min if limits.min < 0 else limits.max)


def content_of(path: Path, decoding: tuple[Any, ...]) -> str:
    """Hash of a file: whole below 4 MiB, else its size, time of change and 16 samples of 64 KiB."""
    size = path.stat().st_size
    digest = hashlib.sha256(repr((size, decoding)).encode())
    with path.open("rb") as file:
        if size <= _WHOLLY_HASHED_BYTES:
            digest.update(file.read())
        else:
            digest.update(str(path.stat().st_mtime_ns).encode())
            for start in np.linspace(0, size - 65536, 16).astype(int):
                file.seek(int(start))
                digest.update(file.read(65536))
    return digest.hexdigest()[:24]


def sidecar(path: Path) -> Path:
    """Where it is written down what a raster does not say itself."""
    return path.with_name(f"{path.name}.gainworth.toml")


def declared(path: Path) -> dict[str, str]:
    """What was written down beside a raster. Raises RasterError where that cannot be read."""
    beside = sidecar(path)
    try:
        return {key: str(value) for key, value in tomllib.loads(beside.read_text(encoding="utf-8")).items()}
    except FileNotFoundError:
        return {}
    except (OSError, UnicodeDecodeError, tomllib.TOMLDecodeError) as error:
        raise RasterError(
            f'{beside.name} cannot be read: write lines such as crs = "EPSG:4326", or delete it'
        ) from error


def _check_declared(path: Path, said: dict[str, str]) -> None:
    if said.get("unit", "").strip().lower() not in _METRES:
        raise RasterError(f'{path.name} is declared to have heights in "{said["unit"]}": use m, ft or us survey foot')
    if said.get("kind", "surface") not in KINDS:
        raise RasterError(f'{path.name} is declared as "{said["kind"]}": use {", ".join(KINDS)}')
    try:
        if "crs" in said:
            CRS.from_user_input(said["crs"])
    except CRSError as error:
        raise RasterError(
            f'{path.name} is declared to lie in "{said["crs"]}", which is not known: write for example EPSG:4326'
        ) from error
