"""An aerial in a room: what the building takes away, as a distribution, and what of it is known of one roof.

One room has one place in the distribution, the same for every frequency: it is drawn once per roof.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import ndtri

from app.errors import ChainError
from propagation.entry import BUILDINGS, entry_loss_at_deviate_db

FloatArray = NDArray[np.float64]

BUILDING_WORDS = {
    "traditional": "brick, stone or timber, plain glass",
    "thermally_efficient": "metallised glass, foil-backed insulation, metal panels",
}
SOURCE = "Rec. ITU-R P.2109-2 (S2)"
_QUANTILES = 2000


@dataclass(frozen=True, slots=True)
class EntryLoss:
    """Entry loss of a class of buildings, one value per frequency (e,) [dB]."""

    median_db: FloatArray
    low_db: FloatArray  # not reached in 16 of 100 rooms
    high_db: FloatArray  # exceeded in 16 of 100 rooms
    mean_db: FloatArray
    sd_db: FloatArray  # of the distribution, tail included: for text, the model takes the deviate


def entry_loss(frequency_mhz: ArrayLike, building: str = "traditional") -> EntryLoss:
    """Entry loss at frequencies (e,) [MHz] for the ledger and the spread shown beside it.

    Raises
    ------
    ChainError
        An unknown class of building, named with the known ones.
    """
    f = np.atleast_1d(np.asarray(frequency_mhz, dtype=float))
    deviates = ndtri((np.arange(_QUANTILES) + 0.5) / _QUANTILES)
    losses = room_loss_db(f, deviates[:, np.newaxis], building)
    median, low, high = room_loss_db(f, np.array([[0.0], [-1.0], [1.0]]), building)
    return EntryLoss(median, low, high, losses.mean(axis=0), losses.std(axis=0))


def room_loss_db(frequency_mhz: ArrayLike, deviate: ArrayLike, building: str = "traditional") -> FloatArray:
    """Loss of rooms at standard normal deviates [dB]; broadcasts, frequencies on the last axis.

    A draw of the error model gives one deviate per roof; the loss follows for all emissions together.
    """
    if building not in BUILDINGS:
        listed = ", ".join(f"{name} ({BUILDING_WORDS[name]})" for name in BUILDINGS)
        raise ChainError(
            f'building "{building}" is not known: use {listed}', field="building", allowed=", ".join(BUILDINGS)
        )
    return entry_loss_at_deviate_db(frequency_mhz, deviate, building)
