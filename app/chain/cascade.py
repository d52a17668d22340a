"""Gain and noise of parts in a row."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.chain.feeder import feeder_loss_db, splitter_loss_db
from app.chain.parts import Feeder, MastheadAmplifier, Outlet, Part, Splitter
from app.chain.tables import CABLES, SPLITTERS
from app.errors import ChainError
from app.tables import told_source

AS_STATED = "as stated for the part"


@dataclass(frozen=True, slots=True)
class Stage:
    """What one part does to every emission that passes it."""

    part: Part
    gain_db: NDArray[np.float64]  # (e,), negative for a loss
    noise_figure_db: NDArray[np.float64]  # (e,)
    source: str  # where the gain or loss is known from


def stages(parts: Sequence[Part], frequency_mhz: ArrayLike) -> list[Stage]:
    """Return gain and noise of each part behind the aerial, in order, for frequencies (e,) [MHz]."""
    return [_stage(part, np.asarray(frequency_mhz, dtype=float)) for part in parts]


def _stage(part: Part, frequency_mhz: NDArray[np.float64]) -> Stage:
    everywhere = np.ones_like(frequency_mhz)
    match part:
        case MastheadAmplifier():
            return Stage(part, part.gain_db * everywhere, part.noise_figure_db * everywhere, AS_STATED)
        case Feeder():
            cable = CABLES[part.cable]
            source = f"{part.length_m:g} m of {cable.id}, a√f + bf; {told_source(cable.source, cable.flag)}"
            return _passive(part, feeder_loss_db(part, frequency_mhz), source)
        case Splitter():
            known = SPLITTERS[part.ports] if part.loss_db is None else None
            source = AS_STATED if known is None else f"{known.ports} ports; {told_source(known.source, known.flag)}"
            return _passive(part, splitter_loss_db(part) * everywhere, source)
        case Outlet():
            return _passive(part, part.loss_db * everywhere, AS_STATED)
    raise ChainError(f'{part.kind} "{part.name}" has no place behind the aerial: remove it', field="parts")


def _passive(part: Part, loss_db: NDArray[np.float64], source: str) -> Stage:
    # A matched attenuator at T0 = 290 K has its loss as its noise figure.
    return Stage(part, -loss_db, loss_db, source)


def total_gain_db(row: Sequence[Stage], emissions: int) -> NDArray[np.float64]:
    """Gain of parts in a row [dB], (e,); 0 for an empty row."""
    return sum((stage.gain_db for stage in row), np.zeros(emissions))


def cascade_noise_factor(gain_db: Sequence[ArrayLike], noise_figure_db: Sequence[ArrayLike]) -> NDArray[np.float64]:
    """Noise factor of stages in a row, referred to the input of the first [-]; stages broadcast.

    F = F1 + (F2 - 1) / G1 + (F3 - 1) / (G1 G2) + …; the gain of the last stage plays no part.

    References
    ----------
    H. T. Friis, "Noise Figures of Radio Receivers", Proc. IRE 32 (1944), 419-422, extended to n stages.
    """
    factor: NDArray[np.float64] = np.asarray(1.0)
    gain: NDArray[np.float64] = np.asarray(1.0)
    for stage_gain_db, stage_noise_figure_db in zip(gain_db, noise_figure_db, strict=True):
        factor = factor + (10 ** (np.asarray(stage_noise_figure_db, dtype=float) / 10) - 1) / gain
        gain = gain * 10 ** (np.asarray(stage_gain_db, dtype=float) / 10)
    return factor
