"""Levels at an outlet: the window that a standard asks for, and how even the channels should be.

Windows warn and steer proposals; they refuse nothing. What a set needs at least is in its noise figure already.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.errors import ModeError
from app.systems import Mode, mode_of
from app.tables import rows

FloatArray = NDArray[np.float64]

DEFAULT_STANDARD = "en-60728-1"
MINIMUM_OVER_CN_DBUV = 11.6  # thermal noise of 3.6 dB(µV) and a noise figure of 8 dB: all 17 rows of EN 60728-1
SPREAD_DB = 12.0  # strongest over weakest channel at an outlet, common practice, no source
ADJACENT_DB = 6.0  # between neighbouring channels, common practice, no source


@dataclass(frozen=True, slots=True)
class LevelWindow:
    """What a standard asks of the level at an outlet."""

    standard: str
    area: str
    system: str
    mode: str  # the row's; empty: any mode
    lowest_dbuv: float
    highest_dbuv: float
    flag: str  # how the figures are known
    source: str

    def outside_db(self, level_dbuv: ArrayLike) -> FloatArray:
        """How far levels lie outside [dB], elementwise: below 0 too weak, above 0 too strong, 0 inside."""
        level = np.asarray(level_dbuv, dtype=float)
        return np.asarray(np.minimum(level - self.lowest_dbuv, 0) + np.maximum(level - self.highest_dbuv, 0))


def standards() -> dict[str, str]:
    """Every standard of the table with the area it holds in."""
    return {window.standard: window.area for window in _windows()}


@cache
def level_window(system: str, mode: str, standard: str = DEFAULT_STANDARD) -> LevelWindow | None:
    """Window of a mode by one standard; None where the standard says nothing of its system.

    A standard that lists some modes of a system only is read for the others by their C/N: linear between the
    modes listed, beyond them decibel by decibel. That is ours; the source says so.

    Raises
    ------
    ModeError
        No such system, mode or standard; the message lists what there is.
    """
    known = standards()
    if standard not in known:
        listed = ", ".join(known)
        raise ModeError(f'standard "{standard}" is not known: use {listed}', field="standard", allowed=listed)
    wanted = mode_of(system, mode)
    rows_of_system = [w for w in _windows() if w.standard == standard and w.system == wanted.system]
    for window in rows_of_system:
        if window.mode in ("", wanted.name):
            return window
    if not rows_of_system:
        return None

    cn_db = np.array([mode_of(wanted.system, window.mode).raw_cn_db for window in rows_of_system])
    order = np.argsort(cn_db)
    inside = np.interp(wanted.raw_cn_db, cn_db[order], [rows_of_system[i].lowest_dbuv for i in order])
    beyond = wanted.raw_cn_db - np.clip(wanted.raw_cn_db, cn_db.min(), cn_db.max())
    return replace(
        rows_of_system[0],
        mode=wanted.name,
        lowest_dbuv=round(float(inside + beyond), 6),
        source=f"{rows_of_system[0].source}; for {wanted.name} by its C/N from the modes listed",
    )


def minimum_level_dbuv(mode: Mode) -> float | None:
    """Least level at an outlet by EN 60728-1, its C/N there and 11.6 dB(µV); None for modes it does not list."""
    cn_db = _outlet_cn().get((mode.system, mode.name))
    return None if cn_db is None else cn_db + MINIMUM_OVER_CN_DBUV


def spread_db(level_dbuv: ArrayLike) -> float:
    """Strongest over weakest of the levels (e,) at one outlet [dB]; NaN counts for nothing, 0 for fewer than two."""
    level = np.asarray(level_dbuv, dtype=float)
    known = level[~np.isnan(level)]
    return float(np.ptp(known)) if known.size > 1 else 0.0


def adjacent_step_db(level_dbuv: ArrayLike, frequency_mhz: ArrayLike, bandwidth_mhz: ArrayLike) -> float:
    """Largest level difference between channels (e,) that touch [dB]; bandwidths are those of the channels [MHz].

    Emissions of one channel do not count against each other; 0 if none touch.
    """
    level, f, width = (np.asarray(values, dtype=float) for values in (level_dbuv, frequency_mhz, bandwidth_mhz))
    width = np.broadcast_to(width, f.shape)
    apart = np.abs(f[:, np.newaxis] - f)
    touching = (width[:, np.newaxis] + width) / 2
    # historic offsets of up to 1/6 MHz either way; less than half a channel apart is the same channel
    beside = (apart <= touching + 0.35) & (apart > touching / 2)
    steps = np.abs(level[:, np.newaxis] - level)[beside]
    steps = steps[~np.isnan(steps)]
    return float(steps.max()) if steps.size else 0.0


@cache
def _windows() -> tuple[LevelWindow, ...]:
    return tuple(
        LevelWindow(
            row["standard"],
            row["area"],
            row["system"],
            row["mode"],
            float(row["lowest_dbuv"]),
            float(row["highest_dbuv"]),
            row["flag"],
            row["source"],
        )
        for row in rows("outlet_windows")
    )


@cache
def _outlet_cn() -> dict[tuple[str, str], float]:
    return {(row["system"], row["mode"]): float(row["cn_db"]) for row in rows("outlet_cn")}
