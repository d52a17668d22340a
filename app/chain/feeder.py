"""Attenuation of coaxial cable and of splitters, by the tables."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.chain.parts import Feeder, Splitter
from app.chain.tables import CABLES, SPLITTERS


def feeder_loss_db(feeder: Feeder, frequency_mhz: ArrayLike) -> NDArray[np.float64]:
    """Loss of a length of cable at 20 °C [dB], elementwise over frequency [MHz].

    a √f + b f per 100 m with the coefficients of the cable's class: skin effect and dielectric.
    """
    cable = CABLES[feeder.cable]
    f = np.asarray(frequency_mhz, dtype=float)
    loss: NDArray[np.float64] = feeder.length_m / 100 * (cable.a_db * np.sqrt(f) + cable.b_db * f)
    return loss


def splitter_loss_db(splitter: Splitter) -> float:
    """Loss from the input to each port [dB]: as stated for the part, else by the table for its ports."""
    return SPLITTERS[splitter.ports].loss_db if splitter.loss_db is None else splitter.loss_db
