"""Gain and noise of each part, and of parts in a row."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.chain.feeder import feeder_loss_db, splitter_loss_db
from app.chain.parts import (
    Amplifier,
    Attenuator,
    Combiner,
    Equaliser,
    Feeder,
    Filter,
    Outlet,
    Part,
    PowerInserter,
    Splitter,
    Switch,
    Tap,
)
from app.chain.tables import CABLES, SPLITTERS
from app.errors import ChainError
from app.tables import told_source

FloatArray = NDArray[np.float64]

AS_STATED = "as stated for the part"


@dataclass(frozen=True, slots=True)
class Stage:
    """What one part does to every emission that passes it."""

    part: Part
    gain_db: FloatArray  # (e,), negative for a loss
    noise_figure_db: FloatArray  # (e,)
    source: str  # where the gain or loss is known from


def stages(parts: Sequence[Part], frequency_mhz: ArrayLike) -> list[Stage]:
    """Return gain and noise of each part of a run behind an aerial, in order, for frequencies (e,) [MHz].

    In which port a part leaves a tap is told by the part after it; in which one it enters a combiner is not
    told by a run, so a combiner with bands counts here as one that takes everything.
    """
    following = [*(part.port for part in parts[1:]), ""]
    return [
        stage_of(part, frequency_mhz, through=port == "through") for part, port in zip(parts, following, strict=True)
    ]


def stage_of(part: Part, frequency_mhz: ArrayLike, through: bool = False, entry: int | None = None) -> Stage:
    """Gain and noise of one part for frequencies (e,) [MHz].

    `through`: left by the way on of a tap. `entry`: number of the input of a combiner, from 0.
    """
    f = np.asarray(frequency_mhz, dtype=float)
    everywhere = np.ones_like(f)
    match part:
        case Amplifier():
            if not part.powered:
                return _passive(part, part.unpowered_loss_db * everywhere, "the amplifier has no supply: what leaks")
            return Stage(part, part.gain_db * everywhere, part.noise_figure_db * everywhere, AS_STATED)
        case Feeder():
            cable = CABLES[part.cable]
            source = f"{part.length_m:g} m of {cable.id}, a√f + bf; {told_source(cable.source, cable.flag)}"
            return _passive(part, feeder_loss_db(part, f), source)
        case Splitter():
            known = SPLITTERS[part.ports] if part.loss_db is None else None
            source = AS_STATED if known is None else f"{known.ports} ports; {told_source(known.source, known.flag)}"
            return _passive(part, splitter_loss_db(part) * everywhere, source)
        case Tap():
            loss_db = part.through_loss_db if through else part.tap_loss_db
            return _passive(part, loss_db * everywhere, f"{AS_STATED}, {'way through' if through else 'tapped port'}")
        case Filter():
            table = np.array(part.loss_db)
            return _passive(part, np.interp(f, table[:, 0], table[:, 1]), AS_STATED)
        case Equaliser():
            share = np.clip((part.high_mhz - f) / (part.high_mhz - part.low_mhz), 0, 1)
            return _passive(part, part.loss_db + part.slope_db * share, AS_STATED)
        case Combiner():
            return _passive(part, _combiner_loss_db(part, f, entry), AS_STATED)
        case Attenuator() | PowerInserter() | Outlet() | Switch():
            return _passive(part, part.loss_db * everywhere, AS_STATED)
    raise ChainError(f'{part.kind} "{part.name}" has no place behind the aerial: remove it', field="parts")


def _combiner_loss_db(part: Combiner, f: FloatArray, entry: int | None) -> FloatArray:
    if not part.bands_mhz or entry is None:
        return part.loss_db * np.ones_like(f)
    low, high = part.bands_mhz[min(entry, len(part.bands_mhz) - 1)]
    return part.loss_db + np.where((f >= low) & (f <= high), 0.0, part.rejection_db)


def _passive(part: Part, loss_db: FloatArray, source: str) -> Stage:
    # A matched attenuator at T0 = 290 K has its loss as its noise figure.
    return Stage(part, -loss_db, loss_db, source)


def cascade_noise_factor(gain_db: Sequence[ArrayLike], noise_figure_db: Sequence[ArrayLike]) -> FloatArray:
    """Noise factor of stages in a row, referred to the input of the first [-]; stages broadcast.

    F = F1 + (F2 - 1) / G1 + (F3 - 1) / (G1 G2) + …; the gain of the last stage plays no part.

    References
    ----------
    H. T. Friis, "Noise Figures of Radio Receivers", Proc. IRE 32 (1944), 419-422, extended to n stages.
    """
    factor: FloatArray = np.asarray(1.0)
    gain: FloatArray = np.asarray(1.0)
    for stage_gain_db, stage_noise_figure_db in zip(gain_db, noise_figure_db, strict=True):
        factor = factor + (10 ** (np.asarray(stage_noise_figure_db, dtype=float) / 10) - 1) / gain
        gain = gain * 10 ** (np.asarray(stage_gain_db, dtype=float) / 10)
    return factor
