"""Open tiles for a circle: which, how much, fetched a few at once, checked, and moved into place whole."""

from __future__ import annotations

import contextlib
import json
import os
import shutil
import threading
from collections.abc import Callable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field
from pathlib import Path
from typing import Literal

from terrain.cover import open_cover_raster
from terrain.errors import DiskError, DownloadError, OfflineError, RasterError
from terrain.fetch import Absent, Patience, Stopped, disk_error, fetch, forget
from terrain.land_mask import has_land
from terrain.locks import alone
from terrain.raster import BLOCK_SIDE, open_raster
from terrain.sources import Corner, TileSource, corners_of_circle

State = Literal["there", "fetched", "at sea", "missing", "failed", "stopped"]

AT_ONCE = 4
FARTHEST_KM = 500.0
_INCOMING = ".incoming"  # folders with a dot are no part of the ground
_DAMAGED_TWICE = 2
_OFF_DEG = 0.02  # by which a tile may differ from its square: half a pixel and shared edges


@dataclass(frozen=True, slots=True)
class Tile:
    """One tile of a plan."""

    source: TileSource
    corner: Corner

    def path(self, folder: Path) -> Path:
        """Where it is kept."""
        return folder / self.source.id / self.source.file_name(self.corner)

    def part(self, folder: Path) -> Path:
        """Where it grows."""
        return folder / _INCOMING / self.source.id / f"{self.source.file_name(self.corner)}.part"

    def lock(self, folder: Path) -> Path:
        """What a process holds while it fetches it."""
        part = self.part(folder)
        return part.with_name(f"{part.name}.lock")

    @property
    def has_land(self) -> bool:
        """Whether the land mask has any land in it, or within 2 km of it."""
        south, west, side = self.corner.south, self.corner.west, self.source.tile_deg
        return has_land(south - 0.02, west - 0.02, south + side + 0.02, west + side + 0.02)


@dataclass(frozen=True, slots=True)
class Plan:
    """What a circle needs from one source."""

    tiles: tuple[Tile, ...]
    there: tuple[Tile, ...]  # of them, kept already
    folder: Path
    source: TileSource

    @property
    def to_fetch(self) -> tuple[Tile, ...]:
        """Tiles that are not kept yet."""
        return tuple(tile for tile in self.tiles if tile not in self.there)

    @property
    def expected_mb(self) -> float:
        """About how much will be fetched; a tile of open sea is short or does not exist."""
        return sum(tile.source.typical_mb for tile in self.to_fetch if tile.has_land)

    def said_first(self) -> str:
        """What the user is told before anything is fetched."""
        fetched = self.to_fetch
        sea = sum(not tile.has_land for tile in fetched)
        parts = [f"{len(self.tiles)} tiles of {self.source.title} cover this circle"]
        if self.there:
            parts.append(f"{len(self.there)} are here already")
        parts.append(f"{len(fetched)} will be fetched, about {self.expected_mb:.0f} MB")
        if sea:
            parts.append(f"{sea} of them lie at sea and may not exist")
        return f"{'; '.join(parts)}. Licence: {self.source.licence}. {self.source.attribution}"


@dataclass(frozen=True, slots=True)
class Outcome:
    """What became of one tile."""

    tile: str
    state: State
    message: str = ""
    bytes: int = 0
    source: str = ""


@dataclass(slots=True)
class Progress:
    """How far a download is; read from other threads while it runs."""

    tiles: int
    expected_mb: float
    done: int = 0
    fetched_bytes: int = 0
    outcomes: list[Outcome] = field(default_factory=list)

    @property
    def text(self) -> str:
        """One line for a terminal."""
        return f"{self.done} of {self.tiles} tiles, {self.fetched_bytes / 1e6:.1f} MB"


def plan_circle(source: TileSource, lat: float, lon: float, reach_km: float, folder: Path) -> Plan:
    """Which tiles of a source a circle needs; nothing is asked of any server.

    Raises DownloadError for a position or reach that is out of range.
    """
    if not (-90 <= lat <= 90 and -180 <= lon <= 180 and 0 < reach_km <= FARTHEST_KM):
        raise DownloadError(
            f"tiles round {lat:g}, {lon:g} within {reach_km:g} km are not possible: "
            f"use degrees, and a reach of up to {FARTHEST_KM:g} km"
        )
    tiles = tuple(Tile(source, corner) for corner in corners_of_circle(lat, lon, reach_km, source.tile_deg))
    there = tuple(tile for tile in tiles if tile.path(folder).is_file())
    return Plan(tiles, there, folder, source)


def download(
    plan: Plan,
    sources: dict[str, TileSource],
    *,
    patience: Patience | None = None,
    at_once: int = AT_ONCE,
    told: Callable[[Progress], None] = lambda progress: None,
    stop: threading.Event | None = None,
) -> Progress:
    """Fetch what a plan lacks; start again after any end, and it goes on where it was.

    A tile that the source does not have is asked for at its `instead`; a tile that nobody has is sea where the
    land mask has no land in it, else missing. `told` is called from several threads, one at a time.

    Raises DownloadError where nothing can go on: the disk is full or not writable, or the machine is offline.
    """
    stop, lock = stop or threading.Event(), threading.Lock()
    progress = Progress(len(plan.tiles), plan.expected_mb)
    progress.outcomes += [Outcome(tile.corner.tile, "there", source=tile.source.id) for tile in plan.there]
    progress.done = len(plan.there)
    _check_room(plan)
    for tile in plan.there:
        forget(tile.part(plan.folder))  # left by an end just after the move
        with contextlib.suppress(OSError):
            tile.lock(plan.folder).unlink()

    def one(tile: Tile) -> DownloadError | None:
        def more(received: int) -> None:
            with lock:
                progress.fetched_bytes += received
                told(progress)

        if stop.is_set():
            outcome, fatal = Outcome(tile.corner.tile, "stopped"), None
        else:
            outcome, fatal = _bring(tile, sources, plan.folder, patience, more, stop)
        if fatal is not None:
            stop.set()
        with lock:
            progress.outcomes.append(outcome)
            progress.done += 1
            told(progress)
        return fatal

    with ThreadPoolExecutor(max_workers=at_once, thread_name_prefix="tiles") as pool:
        running = [pool.submit(one, tile) for tile in plan.to_fetch]
        try:
            fatal = [error for future in running if (error := future.result()) is not None]
        except BaseException:
            stop.set()  # Ctrl-C: the tiles under way end at their next piece and keep what they have
            raise
    if fatal:
        come = {one.tile for one in progress.outcomes if one.state in ("there", "fetched", "at sea")}
        left_mb = sum(tile.source.typical_mb for tile in plan.tiles if tile.corner.tile not in come and tile.has_land)
        raise type(fatal[0])(f"{fatal[0]}. About {left_mb:.0f} MB are still to come") from fatal[0]
    progress.outcomes.sort(key=lambda outcome: outcome.tile)
    return progress


def summary(outcomes: Sequence[Outcome]) -> str:
    """Tell in a sentence, then line by line what did not come."""
    count = {
        state: sum(one.state == state for one in outcomes)
        for state in ("fetched", "there", "at sea", "missing", "failed", "stopped")
    }
    words = [f"{number} {state}" for state, number in count.items() if number]
    text = f"{', '.join(words) or 'nothing to fetch'}."
    lines = [f"{one.tile}: {one.message}" for one in outcomes if one.message]
    return "\n".join([text, *lines])


def _bring(
    tile: Tile,
    sources: dict[str, TileSource],
    folder: Path,
    patience: Patience | None,
    more: Callable[[int], None],
    stop: threading.Event,
) -> tuple[Outcome, DownloadError | None]:
    """One tile, from its source or the one instead; beside the outcome an error that stops all others, too."""
    name = tile.corner.tile
    try:
        size = _bring_from(tile, folder, patience, more, stop)
        return Outcome(name, "fetched", bytes=size, source=tile.source.id), None
    except Absent:
        if not tile.has_land:
            return Outcome(name, "at sea", source=tile.source.id), None
        if tile.source.instead is not None:
            other = sources[tile.source.instead]
            outcome, fatal = _bring(Tile(other, tile.corner), sources, folder, patience, more, stop)
            if outcome.state == "fetched":
                words = f"{tile.source.title} does not have it, {other.title} takes its place"
                outcome = Outcome(name, "fetched", words, outcome.bytes, other.id)
            return outcome, fatal
        words = f"{tile.source.title} does not have it, though there is land: it stays without elevation"
        return Outcome(name, "missing", words, source=tile.source.id), None
    except Stopped:
        return Outcome(name, "stopped", source=tile.source.id), None
    except DownloadError as error:
        fatal = error if isinstance(error, DiskError | OfflineError) else None
        return Outcome(name, "failed", str(error), source=tile.source.id), fatal
    except OSError as error:
        full = disk_error(error, folder, 1e6 * tile.source.typical_mb)
        return Outcome(name, "failed", str(full), source=tile.source.id), full


def _bring_from(
    tile: Tile, folder: Path, patience: Patience | None, more: Callable[[int], None], stop: threading.Event
) -> int:
    """Fetch, check and move one tile; returns its length in bytes."""
    part, target = tile.part(folder), tile.path(folder)
    with alone(tile.lock(folder), stop):
        if stop.is_set():
            raise Stopped
        if target.is_file():  # another process was faster
            return target.stat().st_size
        return _bring_alone(tile, part, target, patience, more, stop)


def _bring_alone(
    tile: Tile,
    part: Path,
    target: Path,
    patience: Patience | None,
    more: Callable[[int], None],
    stop: threading.Event,
) -> int:
    last = 0

    def received(done: int, total: int | None) -> None:
        nonlocal last
        more(max(0, done - last))
        last = done

    for attempt in range(1, _DAMAGED_TWICE + 1):
        last = part.stat().st_size if part.is_file() else 0
        try:
            fetch(
                tile.source.address(tile.corner),
                part,
                largest_bytes=1e6 * tile.source.largest_mb,
                absent=tile.source.absent,
                patience=patience,
                progress=received,
                stop=stop,
            )
        except Absent:
            forget(part)
            raise
        try:
            return _settle(tile, part, target)
        except RasterError as error:
            forget(part)
            if attempt == _DAMAGED_TWICE:
                raise DownloadError(f"{error}; it came damaged {attempt} times and was not kept") from error
    raise AssertionError


def _settle(tile: Tile, part: Path, target: Path) -> int:
    """Check the whole raster under its own name, then move it into place with its sidecar first."""
    checking = part.with_name(target.name)
    try:
        part.replace(checking)
        try:
            _check(checking, tile)
        except RasterError:
            checking.unlink(missing_ok=True)
            raise
        size = checking.stat().st_size
        target.parent.mkdir(parents=True, exist_ok=True)
        said = {"attribution": tile.source.attribution, "kind": tile.source.kind, "source": tile.source.id}
        if tile.source.holds == "cover":
            said = {"attribution": tile.source.attribution, "classes": tile.source.kind, "source": tile.source.id}
        sidecar = target.with_name(f"{target.name}.gainworth.toml")
        unfinished = checking.with_name(f"{sidecar.name}.new")
        unfinished.write_text(
            "".join(f"{key} = {json.dumps(value, ensure_ascii=False)}\n" for key, value in said.items()),
            encoding="utf-8",
        )
        unfinished.replace(sidecar)
        checking.replace(target)
        _sync(target.parent)
        forget(part)
    except OSError as error:
        raise disk_error(error, target.parent, 1e6) from error
    return size


def _check(path: Path, tile: Tile) -> None:
    """Decode a raster whole, once, and see that it lies where its tile should. Raises RasterError if not."""
    raster = open_raster(path) if tile.source.holds == "elevation" else open_cover_raster(path, tile.source.kind)
    grid, side = raster.grid, tile.source.tile_deg
    off = (grid.west_deg - tile.corner.west + 180) % 360 - 180, grid.south_deg - tile.corner.south
    sizes = grid.east_deg - grid.west_deg - side, grid.north_deg - grid.south_deg - side
    if max(map(abs, (*off, *sizes))) > _OFF_DEG:
        raise RasterError(f"{path.name} does not lie in tile {tile.corner.tile}")
    for row in range(0, grid.rows, BLOCK_SIDE):
        for column in range(0, grid.columns, BLOCK_SIDE):
            raster.read(row, column, min(BLOCK_SIDE, grid.rows - row), min(BLOCK_SIDE, grid.columns - column))


def _sync(folder: Path) -> None:
    """Make the move last through a loss of power, where the system can."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _check_room(plan: Plan) -> None:
    """Refuse to begin what will not fit."""
    try:
        plan.folder.mkdir(parents=True, exist_ok=True)
        free = shutil.disk_usage(plan.folder).free
    except OSError as error:
        raise disk_error(error, plan.folder, 0) from error
    if plan.to_fetch and free < 1e6 * plan.expected_mb:
        raise DownloadError(
            f"about {plan.expected_mb:.0f} MB are needed in {plan.folder}, {free / 1e6:.0f} MB are free: "
            "nothing was fetched. Free some space, or ask for a smaller reach"
        )
