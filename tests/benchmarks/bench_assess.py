"""`assess` on the demo: a cold process, and a warm server's stages with 20 and 300 emissions and four chains."""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np

from app import air_at, fields, kept_paths, planner
from app.fast_paths import warm_up
from app.request import AssessRequest
from app.roof import Roof
from app.world import open_world

ROOF = Roof(44.3, -37.4507)
STAGES = (
    (fields, "paths_to_roof", "paths"),
    (air_at, "fields_at", "fields, with paths"),
    (planner, "turn", "chains turned"),
    (planner, "multiplex_chances", "chances"),
    (planner, "_verdicts", "verdicts"),
    (planner, "answer_document", "document"),
)


def report() -> list[str]:
    """Return lines of seconds and shares."""
    with tempfile.TemporaryDirectory() as folder:
        for name in ("DATA", "CACHE"):
            os.environ[f"GAINWORTH_{name}_DIR"] = str(Path(folder) / name.lower())
        world = open_world()
        lines = []
        command = [
            sys.executable,
            "-m",
            "app.cli",
            "assess",
            f"--at={ROOF.latitude_deg},{ROOF.longitude_deg}",
            "--now=roof-yagi",
        ]
        cold = [_seconds(lambda: subprocess.run(command, capture_output=True, check=True)) for _ in range(4)][1:]
        lines.append(f"assess, cold process with the ground decoded: {np.median(cold):.2f} s")
        start = time.perf_counter()
        warm_up(world.ground)
        lines.append(f"warm-up in the server's background: {time.perf_counter() - start:.2f} s")
        for emissions in (20, 300):
            lines += _warm(world, emissions)
    return lines


def _warm(world: Any, emissions: int) -> list[str]:
    """One server, so many emissions: the demo's own, repeated on masts a little aside."""
    found = world.store.emissions_within(ROOF.latitude_deg, ROOF.longitude_deg, 150.0)
    many = []
    for number in range(emissions):
        emission, mast, distance_km, bearing_deg = found[number % len(found)]
        aside = number // len(found)
        mast = replace(mast, id=f"{mast.id}-{aside}", latitude_deg=mast.latitude_deg + 0.0003 * aside)
        many.append(
            (replace(emission, id=f"{emission.id}-{aside}", transmitter_id=mast.id), mast, distance_km, bearing_deg)
        )
    store = _Stand(world.store, many)
    spent: dict[str, float] = {}
    with _Watched(spent):
        totals = []
        for kept in (False, False, False, True, True):
            if not kept:
                kept_paths.forget()
            spent.clear()
            totals.append(
                (
                    _seconds(lambda: planner.assess(AssessRequest(ROOF, now="roof-yagi"), store, world.ground)),
                    kept,
                    dict(spent),
                )
            )
    lines = []
    for kept in (False, True):
        total, _, shares = sorted((one for one in totals if one[1] == kept), key=lambda one: one[0])[0]
        told = ", ".join(f"{name} {100 * seconds / total:.0f} %" for name, seconds in shares.items())
        what = "same roof again" if kept else "new roof"
        lines.append(
            f"assess, warm, {emissions} emissions × {len(world.store.list_chains())} chains, {what}: "
            f"{total:.3f} s ({told})"
        )
    return lines


class _Stand:
    """The demo's store with other emissions in reach."""

    def __init__(self, store: Any, found: list[Any]) -> None:
        self._store, self._found = store, found

    def __getattr__(self, name: str) -> Any:
        return getattr(self._store, name)

    def emissions_within(self, *_: Any) -> list[Any]:
        return self._found


class _Watched:
    """Adds up the seconds of each stage while it stands."""

    def __init__(self, spent: dict[str, float]) -> None:
        self._spent, self._plain = spent, [(module, name, getattr(module, name)) for module, name, _ in STAGES]

    def __enter__(self) -> None:
        for (module, name, function), (_, _, stage) in zip(self._plain, STAGES, strict=True):
            setattr(module, name, self._timed(function, stage))

    def __exit__(self, *_: Any) -> None:
        for module, name, function in self._plain:
            setattr(module, name, function)

    def _timed(self, function: Callable[..., Any], stage: str) -> Callable[..., Any]:
        def timed(*args: Any, **kwargs: Any) -> Any:
            start = time.perf_counter()
            result = function(*args, **kwargs)
            self._spent[stage] = self._spent.get(stage, 0.0) + time.perf_counter() - start
            return result

        return timed


def _seconds(run: Callable[[], object]) -> float:
    start = time.perf_counter()
    run()
    return time.perf_counter() - start
