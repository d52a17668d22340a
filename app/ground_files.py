"""The user's rasters: checked, then copied into the data folder."""

from __future__ import annotations

import shutil
import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar

from app.errors import StoreError
from app.world import cover_dir, terrain_dir
from terrain.cover import CoverRaster, declare_cover, open_cover_raster
from terrain.errors import RasterError
from terrain.mosaic import Ground
from terrain.raster import Raster, declare, open_raster

T = TypeVar("T")


def add_raster(path: Path, crs: str | None = None, kind: str | None = None, unit: str | None = None) -> dict[str, Any]:
    """Copy one raster into the data folder under its own name, with what is declared of it.

    A file that cannot serve is refused and nothing is copied; one of the same name is replaced whole.
    """
    if not path.is_file():
        raise RasterError(f"{path} is no file: name an elevation raster such as a GeoTIFF or an .hgt tile")
    replaces = (terrain_dir() / path.name).exists()

    def checked(copy: Path) -> Raster:
        if crs or kind or unit:
            declare(copy, crs=crs, kind=kind, unit=unit)
        raster = open_raster(copy)
        _check_heights(copy)
        return raster

    info = _kept(path, terrain_dir(), checked)
    return {
        "file": path.name,
        "kind": info.kind,
        "spacing_m": round(info.grid.spacing_m, 1),
        "heights_in": info.unit,
        "note": "replaces the one of that name" if replaces else "",
        "stored": str(terrain_dir() / path.name),
    }


def add_cover(path: Path, classes: str | None = None, crs: str | None = None) -> dict[str, Any]:
    """Copy one map of land cover into the data folder, checked first, as `add_raster` does."""
    if not path.is_file():
        raise RasterError(f"{path} is no file: name a land-cover map as GeoTIFF")

    def checked(copy: Path) -> CoverRaster:
        if classes or crs:
            declare_cover(copy, classes, crs)
        return open_cover_raster(copy)

    info = _kept(path, cover_dir(), checked)
    return {
        "file": path.name,
        "classes": info.classes,
        "spacing_m": round(info.grid.spacing_m, 1),
        "stored": str(cover_dir() / path.name),
    }


def remove_raster(name: str) -> dict[str, Any]:
    """Take one raster, and what lies beside it, out of the data folder."""
    path = terrain_dir() / name
    if Path(name).name != name or not path.is_file():
        stored = sorted(one.name for one in terrain_dir().glob("*.*")) if terrain_dir().is_dir() else []
        raise RasterError(f'no raster "{name}" is stored: {", ".join(stored) or "the folder is empty"}')
    for one in (path, *_companions(path)):
        one.unlink()
    return {"file": name, "note": "taken out"}


def _check_heights(path: Path) -> None:
    """Refuse a raster whose samples are all missing."""
    with tempfile.TemporaryDirectory() as cache:
        surveyed = Ground.open([path], Path(cache)).survey()
        if surveyed.refused:
            raise RasterError(surveyed.refused[0].message)
        if surveyed.rasters[0].void_share == 1:
            raise RasterError(f"{path.name} holds no height at all: every sample is missing or impossible")


def _kept(path: Path, folder: Path, checked: Callable[[Path], T]) -> T:
    """Copy a file with what lies beside it into a folder, once its copy has passed the check; else nothing.

    The check may write beside the copy, and what it returns is returned. Its refusals name the file as given.
    """
    try:
        folder.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryDirectory(dir=folder, prefix=".adding-") as making:
            copy = Path(making) / path.name
            for one in (path, *_companions(path)):
                shutil.copyfile(one, Path(making) / one.name)
            try:
                found = checked(copy)
            except RasterError as error:
                raise type(error)(str(error).replace(str(copy), str(path))) from error
            for one in sorted(Path(making).iterdir()):
                one.replace(folder / one.name)
    except OSError as error:
        raise StoreError(f"{path.name} could not be copied into {folder} ({error.strerror or error})") from error
    return found


def _companions(path: Path) -> list[Path]:
    """Files beside a raster that say where it lies: world file, projection, statistics, our own declaration."""
    beside = [path.with_suffix(ending) for ending in (".prj", ".tfw", ".tifw", ".wld")]
    beside += [path.with_name(path.name + ending) for ending in (".aux.xml", ".gainworth.toml")]
    return [one for one in beside if one.is_file()]
