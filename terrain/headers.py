"""What the headers of many rasters say, kept so that a large folder opens at once the next time.

A header is taken from here only while the file and all that lies beside it have the size and time of change that
they had. The list is one JSON file per set of folders; a small folder has none.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
import logging
import math
import os
import time
from collections.abc import Iterator, Sequence
from dataclasses import fields
from functools import cache
from pathlib import Path
from typing import Any

from affine import Affine
from pyproj import CRS, Transformer
from pyproj.exceptions import CRSError

from terrain.errors import RasterError
from terrain.files import Refused
from terrain.grid import Grid, way_to
from terrain.raster import Raster, open_raster

WORTH_KEEPING = 100  # rasters; fewer are opened in a quarter of a second
_LAYOUT = 1  # a new number where old lists would be read wrongly, or headers are read otherwise
_JUST_NOW_NS = 3 * 10**9  # a file changed so lately may change again without its time of change showing it
_TELL_EVERY_S = 2.0
_BESIDE = (".aux.xml", ".gainworth.toml", ".msk", ".ovr")  # after the whole name
_INSTEAD = (".prj", ".tfw", ".tifw", ".wld", ".hdr")  # in place of the suffix
_log = logging.getLogger(__name__)

Stamp = list[list[Any]]  # name, size and time of change of a file and of each that lies beside it


def open_rasters(files: Sequence[Path], folder: Path) -> Iterator[Raster | Refused]:
    """Open rasters, or say why not, in their order; lists are kept in `folder` if it can be written."""
    if len(files) < WORTH_KEEPING:
        for path in files:
            yield _opened(path)
        return
    parents = {path.parent for path in files}
    named = hashlib.sha256("\n".join(sorted(str(one.resolve()) for one in parents)).encode())
    kept_in = folder / f"headers-{named.hexdigest()[:16]}.json"
    listed = {one: _listed(one) for one in parents}
    kept, told = _read(kept_in), time.monotonic()
    found: dict[str, Any] = {}
    changed = False
    for number, path in enumerate(files):
        stamp = _stamp(path, listed[path.parent])
        known = kept.get(str(path))
        if known is not None and known[0] == stamp:
            found[str(path)] = known
            yield _raster(path, known[1])
            continue
        raster = _opened(path)
        if isinstance(raster, Raster) and max(row[2] for row in stamp) < time.time_ns() - _JUST_NOW_NS:
            found[str(path)], changed = [stamp, _document(raster)], True
        if time.monotonic() - told > _TELL_EVERY_S:
            told = time.monotonic()
            _log.warning("reading rasters: %d of %d; only the first time", number + 1, len(files))
        yield raster
    if changed or len(found) < len(kept):
        _write(kept_in, found)


def _opened(path: Path) -> Raster | Refused:
    try:
        return open_raster(path)
    except RasterError as error:
        return Refused(path, str(error))


def _listed(folder: Path) -> dict[str, tuple[int, int]]:
    """Size and time of change of all that lies in a folder, by name."""
    listed = {}
    with contextlib.suppress(OSError), os.scandir(folder) as entries:
        for one in entries:
            with contextlib.suppress(OSError):
                stat = one.stat()
                listed[one.name] = (stat.st_size, stat.st_mtime_ns)
    return listed


def _stamp(path: Path, listed: dict[str, tuple[int, int]]) -> Stamp:
    name, stem = path.name, path.name.rpartition(".")[0]
    near = (name, *(name + ending for ending in _BESIDE), *(stem + ending for ending in _INSTEAD))
    return [[one, *listed[one]] for one in near if one in listed] or [[name, -1, time.time_ns()]]


def _document(raster: Raster) -> dict[str, Any]:
    """A header in JSON's own types; no number as null, the coordinate system as text."""
    said = {field.name: getattr(raster, field.name) for field in fields(Raster) if field.name not in ("path", "grid")}
    grid = {field.name: getattr(raster.grid, field.name) for field in fields(Grid) if field.name != "to_crs"}
    said["void"] = None if math.isnan(raster.void) else raster.void
    return said | {"grid": grid | {"transform": list(raster.grid.transform)[:6], "crs": raster.grid.crs.to_wkt()}}


def _raster(path: Path, said: dict[str, Any]) -> Raster:
    crs, to_crs = _system(said["grid"]["crs"])
    transform = Affine(*said["grid"]["transform"])
    grid = Grid(**said["grid"] | {"transform": transform, "crs": crs, "to_crs": to_crs})
    void = math.nan if said["void"] is None else said["void"]
    return Raster(path=path, **said | {"grid": grid, "void": void})


@cache
def _system(text: str) -> tuple[CRS, Transformer | None]:
    crs = CRS.from_wkt(text)
    return crs, way_to(crs)


def _read(path: Path) -> dict[str, Any]:
    """The list as it was kept; empty where there is none, or one that cannot be used."""
    try:
        kept = json.loads(path.read_text(encoding="utf-8"))
        if kept["layout"] != _LAYOUT:
            return {}
        rasters: dict[str, Any] = kept["rasters"]
        for _, said in rasters.values():
            said["grid"]["crs"] = kept["systems"][said["grid"]["crs"]]
            _raster(Path(), said)
    except (OSError, ValueError, KeyError, TypeError, AttributeError, IndexError, CRSError):
        return {}
    return rasters


def _write(path: Path, rasters: dict[str, Any]) -> None:
    """Put a new list in the place of the old one, whole or not at all; each coordinate system is written once."""
    systems: dict[str, int] = {}
    rows = {
        name: [stamp, said | {"grid": said["grid"] | {"crs": systems.setdefault(said["grid"]["crs"], len(systems))}}]
        for name, (stamp, said) in rasters.items()
    }
    unfinished = path.with_name(f"{path.name}.{os.getpid()}.part")
    with contextlib.suppress(OSError):
        try:
            path.parent.mkdir(parents=True, exist_ok=True)
            text = json.dumps({"layout": _LAYOUT, "systems": list(systems), "rasters": rows})
            unfinished.write_text(text, encoding="utf-8")
            unfinished.replace(path)
        finally:
            unfinished.unlink(missing_ok=True)
