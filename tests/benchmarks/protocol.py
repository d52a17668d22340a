"""How the figures are taken: all variants in one run, in random order each round, warm calls first, medians of ratios.

One thread is timed by the processor time of the process, which other programs on the machine move less than the
clock; what runs on several threads by the clock (" wall" in the names).
"""

from __future__ import annotations

import platform
import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from importlib import metadata
from pathlib import Path

import numpy as np

ROUNDS = 9
PACKAGES = ("numpy", "numba", "llvmlite", "scipy", "pyproj", "rasterio", "pycraf")
_FLUSH = np.zeros(100_000_000)  # 0.8 GB, more than any cache


@dataclass(frozen=True)
class Variant:
    """One thing to time, and how much of the work it does."""

    name: str
    run: Callable[[], object]
    share: float = 1.0  # of the paths that the others take; times are scaled to all of them
    warm_calls: int = 2
    flushed: bool = False  # also with every cache emptied before


def timed(variants: Sequence[Variant], rounds: int = ROUNDS, seed: int = 0) -> dict[str, np.ndarray]:
    """Return seconds of each round by name; " flushed" is added to the name for empty caches."""
    order = np.random.default_rng(seed)
    seconds: dict[str, list[float]] = {}
    for variant in variants:
        variant.run()
    for _ in range(rounds):
        for place in order.permutation(len(variants)):
            variant = variants[place]
            for _ in range(variant.warm_calls):
                variant.run()
            _note(seconds, variant.name, variant)
            if variant.flushed:
                _FLUSH.__iadd__(1)
                _note(seconds, f"{variant.name} flushed", variant)
    return {name: np.array(values) for name, values in seconds.items()}


def ratio(seconds: dict[str, np.ndarray], above: str, below: str) -> tuple[float, float, float]:
    """Return median and quartiles of the rounds' ratios of two variants."""
    low, middle, high = np.quantile(seconds[above] / seconds[below], (0.25, 0.5, 0.75))
    return float(middle), float(low), float(high)


@dataclass(frozen=True)
class Row:
    """One line of the table."""

    what: str
    value: tuple[float, float, float]
    goal: float
    at_least: bool = True
    unit: str = "×"

    def told(self) -> str:
        """Return the line, with a mark where the goal is missed."""
        median, low, high = self.value
        met = median >= self.goal if self.at_least else median <= self.goal
        bound = "at least" if self.at_least else "at most"
        return (
            f"{self.what:<76} {median:8.2f} {self.unit} ({low:.2f} to {high:.2f})   "
            f"{bound} {self.goal:g}   {'met' if met else 'MISSED'}"
        )


def machine() -> str:
    """Return versions and processor."""
    versions = [f"{name} {metadata.version(name)}" for name in PACKAGES if _installed(name)]
    return f"Python {platform.python_version()}, {', '.join(versions)}\n{_processor()}"


def _note(seconds: dict[str, list[float]], name: str, variant: Variant) -> None:
    clock, processor = time.perf_counter(), time.process_time()
    variant.run()
    processor, clock = time.process_time() - processor, time.perf_counter() - clock
    seconds.setdefault(name, []).append(processor / variant.share)
    seconds.setdefault(f"{name} wall", []).append(clock / variant.share)


def _installed(name: str) -> bool:
    try:
        metadata.version(name)
    except metadata.PackageNotFoundError:
        return False
    return True


def _processor() -> str:
    info = Path("/proc/cpuinfo")
    lines = info.read_text().splitlines() if info.is_file() else []
    names = [line.split(":")[1].strip() for line in lines if line.startswith("model name")]
    return f"{len(names)} × {names[0]}" if names else platform.processor()
