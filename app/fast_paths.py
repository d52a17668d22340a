"""The fast way to the paths of a roof, for a process that lives long enough: compiled code over sheets of ground.

Machine code and sheets are made ready once, in the background; until then, and wherever a path leaves its sheet,
the plain form of `app/paths_to_roof.py` answers, the same within 0.01 dB.
"""

from __future__ import annotations

import logging
import os
import tempfile
import threading
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, fields
from pathlib import Path
from typing import TYPE_CHECKING, TypeVar
from weakref import WeakKeyDictionary

import numpy as np

from app.errors import AppError
from app.paths import cache_dir
from app.roof import Roof
from propagation.digest import PathDigest
from propagation.p1812 import PathTerms
from terrain.errors import TerrainError
from terrain.ground import COARSEST_M
from terrain.mosaic import Ground
from terrain.raster import Raster
from terrain.sheet import Sheet

if TYPE_CHECKING:
    from propagation.fast_digest import Digests, Ends

T = TypeVar("T", PathDigest, PathTerms)

THREADS = min(8, os.cpu_count() or 1)
WORTH_THREADS = 1000  # paths; two threads over 200 are no quicker than one (tests/benchmarks/bench_paths.py)
P1812_KM = (0.25, 1000.0)  # where both methods hold whatever the profile is
P1812_HEIGHT_M = (1.0, 3000.0)

_ready: WeakKeyDictionary[Ground, tuple[Sheet, ...]] = WeakKeyDictionary()
_pool = ThreadPoolExecutor(THREADS, thread_name_prefix="scan")
_log = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True)
class Line:
    """One path to be digested, with the distances [km] of what stands near its roof."""

    latitude_deg: float  # of the mast
    longitude_deg: float
    antenna_agl_m: float
    edge_km: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Digested:
    """What the compiled form says of one line."""

    line: int  # its number among those asked for
    kind: str  # of the rasters under it
    digest: PathDigest
    terms: PathTerms
    delta_n_per_km: float
    n0: float
    sources: tuple[tuple[float, float], ...]  # of the ray past each edge: distance [km] and slope [m/km] at the aerial


def warm_up_in_background(ground: Ground) -> threading.Thread:
    """Make a ground's fast form ready in a thread of its own."""
    thread = threading.Thread(target=warm_up, args=(ground,), name="warm-up", daemon=True)
    thread.start()
    return thread


def warm_up(ground: Ground) -> bool:
    """Lay the ground's rasters and their land cover out and compile; false, logged, where that is not possible."""
    keep_machine_code()
    try:
        from propagation.fast_digest import digests

        sheets = tuple(ground.sheets(_is_bare))
        for sheet in sheets:
            tile = sheet.tiles[0].raster.grid
            lat, lon = tile.position(np.array([0.4, 0.6]) * tile.rows, np.array([0.4, 0.6]) * tile.columns)
            digests(sheet, _ends(Roof(float(lat[0]), float(lon[0])), [Line(float(lat[1]), float(lon[1]), 50.0, ())]))
    except (AppError, TerrainError, OSError, ImportError) as error:
        _log.warning("answers stay slow: %s", error)
        return False
    _ready[ground] = sheets
    return True


def is_ready(ground: Ground) -> bool:
    """Whether the fast form of a ground answers."""
    return ground in _ready


def fast_digests(roof: Roof, lines: Sequence[Line], ground: Ground, maps_folder: Path | None) -> list[Digested]:
    """Digest those lines that the sheets hold whole."""
    if not _within(roof.aerial_agl_m, P1812_HEIGHT_M):
        return []
    from propagation.fast_digest import digests

    found: list[Digested] = []
    open_still = [n for n, line in enumerate(lines) if _within(line.antenna_agl_m, P1812_HEIGHT_M)]
    for sheet in _ready.get(ground, ()):
        if not open_still or not sheet.grid.near(np.array([roof.latitude_deg]), np.array([roof.longitude_deg]))[0]:
            continue
        asked = [lines[n] for n in open_still]
        if len(asked) < WORTH_THREADS:
            batch = digests(sheet, _ends(roof, asked), maps_folder=maps_folder)
        else:
            batch = digests(sheet, _ends(roof, asked), maps_folder=maps_folder, each=_pool.map, parts=THREADS)
        good = {p for p in np.flatnonzero(batch.known).tolist() if _within(batch.digest.path_length_km[p], P1812_KM)}
        found += [_digested(open_still[p], batch, p, len(asked[p].edge_km), sheet.kind) for p in sorted(good)]
        open_still = [n for p, n in enumerate(open_still) if p not in good]
    return found


def _digested(line: int, batch: Digests, place: int, edges: int, kind: str) -> Digested:
    first = int(batch.first_edge[place])
    sources = batch.source_km[first : first + edges].tolist(), batch.source_slope[first : first + edges].tolist()
    return Digested(
        line=line,
        kind=kind,
        digest=_one(batch.digest, place),
        terms=_one(batch.terms, place),
        delta_n_per_km=float(batch.delta_n_per_km[place]),
        n0=float(batch.n0[place]),
        sources=tuple(zip(*sources, strict=True)),
    )


def _one(batch: T, place: int) -> T:
    """One path of a batch of digests or terms."""
    return type(batch)(**{field.name: getattr(batch, field.name)[place] for field in fields(batch)})


def _within(value: float, limits: tuple[float, float]) -> bool:
    return limits[0] <= value <= limits[1]


def _ends(roof: Roof, lines: Sequence[Line]) -> Ends:
    from propagation.fast_digest import Ends

    one = np.ones(len(lines))
    return Ends(
        tx_latitude_deg=np.array([line.latitude_deg for line in lines]),
        tx_longitude_deg=np.array([line.longitude_deg for line in lines]),
        antenna_agl_m=np.array([line.antenna_agl_m for line in lines]),
        rx_latitude_deg=roof.latitude_deg * one,
        rx_longitude_deg=roof.longitude_deg * one,
        aerial_agl_m=roof.aerial_agl_m * one,
        first_edge=np.cumsum([0, *(len(line.edge_km) for line in lines)]),
        edge_km=np.array([km for line in lines for km in line.edge_km]),
    )


def _is_bare(raster: Raster) -> bool:
    """Whether its heights are taken for bare ground as they are (`terrain/ground.py`)."""
    return raster.kind == "bare" or raster.grid.spacing_m > COARSEST_M


def keep_machine_code() -> None:
    """Name a folder for compiled code before numba is imported: ours, or a temporary one where that is read-only."""
    if "NUMBA_CACHE_DIR" in os.environ:
        return
    try:
        folder = cache_dir() / "machine-code"
        folder.mkdir(exist_ok=True)
        with tempfile.TemporaryFile(dir=folder):
            pass
    except (AppError, OSError):
        folder = Path(tempfile.mkdtemp(prefix="gainworth-"))
    os.environ["NUMBA_CACHE_DIR"] = str(folder)
