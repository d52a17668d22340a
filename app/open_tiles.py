"""Open tiles into the data folder: planned first, fetched after, for the command line and the page."""

from __future__ import annotations

import threading
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

from app.errors import AppError, RequestError
from app.world import cover_dir, own_sources_file, terrain_dir
from terrain.download import FARTHEST_KM, Plan, Progress, download, plan_circle, summary
from terrain.errors import TerrainError
from terrain.sources import TileSource, tile_sources

DEFAULT_SOURCE = {"elevation": "glo-30", "cover": "worldcover"}


def sources() -> dict[str, TileSource]:
    """Return every source by id, the user's own among them."""
    return tile_sources(own_sources_file())


def plan(holds: str, latitude_deg: float, longitude_deg: float, reach_km: float, source: str | None = None) -> Plan:
    """Plan what a circle needs; asks nothing of any server.

    Raises
    ------
    RequestError
        The source is not known or holds something else, or the reach is out of range.
    """
    known = {key: one for key, one in sources().items() if one.holds == holds}
    chosen = source or DEFAULT_SOURCE[holds]
    if chosen not in known:
        words = ", ".join(known)
        raise RequestError(f'no source of {holds} is called "{chosen}": use {words}', field="source", allowed=words)
    if not 1 <= reach_km <= FARTHEST_KM:
        raise RequestError(
            f"a reach of {reach_km:g} km is not possible: use 1 to {FARTHEST_KM:g} km",
            field="reach_km",
            allowed=f"1 to {FARTHEST_KM:g}",
        )
    folder = terrain_dir() if holds == "elevation" else cover_dir()
    return plan_circle(known[chosen], latitude_deg, longitude_deg, reach_km, folder)


def fetch_plan(
    planned: Plan, told: Callable[[Progress], None] = lambda progress: None, stop: threading.Event | None = None
) -> Progress:
    """Fetch what a plan lacks. Raises DownloadError where nothing can go on."""
    return download(planned, sources(), told=told, stop=stop)


def plan_document(planned: Plan) -> dict[str, Any]:
    """What is said before anything is fetched."""
    return {
        "source": planned.source.id,
        "title": planned.source.title,
        "holds": planned.source.holds,
        "tiles": len(planned.tiles),
        "there": len(planned.there),
        "to_fetch": len(planned.to_fetch),
        "at_sea": sum(not tile.has_land for tile in planned.to_fetch),
        "expected_mb": round(planned.expected_mb, 1),
        "hosts": hosts_of(planned),
        "licence": planned.source.licence,
        "attribution": planned.source.attribution,
        "text": planned.said_first(),
    }


def hosts_of(planned: Plan) -> list[str]:
    """Servers that would be asked, those that stand in for a missing tile last."""
    known = sources()
    asked = [planned.source]
    while (instead := known.get(asked[-1].instead or "")) is not None and instead not in asked:
        asked.append(instead)
    return list(dict.fromkeys(one.host for one in asked))


def outcome_document(planned: Plan, progress: Progress) -> dict[str, Any]:
    """What became of a plan."""
    return plan_document(planned) | {
        "fetched_mb": round(progress.fetched_bytes / 1e6, 3),
        "outcomes": [
            {"tile": one.tile, "state": one.state, "source": one.source, "message": one.message}
            for one in progress.outcomes
        ],
        "summary": summary(progress.outcomes),
    }


@dataclass(slots=True)
class Downloads:
    """The one download that a server runs at a time, in a thread of its own."""

    _planned: Plan | None = None
    _progress: Progress | None = None
    _error: str = ""
    _thread: threading.Thread | None = None
    _stop: threading.Event = field(default_factory=threading.Event)
    _lock: threading.Lock = field(default_factory=threading.Lock)

    def start(self, planned: Plan, done: Callable[[], None]) -> None:
        """Begin; `done` is called once something has come. Raises RequestError while another one runs."""
        with self._lock:
            if self._thread is not None and self._thread.is_alive():
                raise RequestError("tiles are being fetched already: wait for them or stop them first", field="source")
            self._planned, self._progress, self._error = planned, Progress(len(planned.tiles), planned.expected_mb), ""
            self._stop = threading.Event()
            self._thread = threading.Thread(target=self._run, args=(planned, done), name="tiles", daemon=True)
            self._thread.start()

    def stop(self) -> None:
        """End at the next piece; what has arrived is kept and taken up again by the next start."""
        self._stop.set()

    def wait(self, seconds: float) -> None:
        """Return when the download has ended, or after so long."""
        if self._thread is not None:
            self._thread.join(seconds)

    def document(self) -> dict[str, Any]:
        """How far it is."""
        if self._planned is None or self._progress is None:
            return {"state": "none"}
        running = self._thread is not None and self._thread.is_alive()
        state = "failed" if self._error else "stopped" if self._stop.is_set() else "ended"
        told = outcome_document(self._planned, self._progress)
        return told | {"state": "running" if running else state, "done": self._progress.done, "error": self._error}

    def _run(self, planned: Plan, done: Callable[[], None]) -> None:
        def told(progress: Progress) -> None:
            self._progress = progress

        try:
            try:
                self._progress = fetch_plan(planned, told, self._stop)
            finally:
                done()  # what has come is ground, however it ended
        except (AppError, TerrainError) as error:
            self._error = str(error)
