"""Decibels, and levels as power or as voltage across 75 ohms."""

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.constants import RECEIVER_IMPEDANCE_OHM, SPEED_OF_LIGHT_M_S

# P = U^2 / R with 0 dBm = 1e-3 W and 0 dB(µV) = 1e-6 V: 90 + 10 log R, 108.75 dB across 75 ohms
_DBUV_AT_0_DBM = 90 + 10 * math.log10(RECEIVER_IMPEDANCE_OHM)


def db_from_ratio(ratio: ArrayLike) -> NDArray[np.float64]:
    """Decibels of a power ratio above 0, elementwise."""
    decibels: NDArray[np.float64] = 10 * np.log10(np.asarray(ratio, dtype=float))
    return decibels


def ratio_from_db(value_db: ArrayLike) -> NDArray[np.float64]:
    """Power ratio of decibels, elementwise."""
    ratio: NDArray[np.float64] = 10 ** (np.asarray(value_db, dtype=float) / 10)
    return ratio


def dbuv_from_dbm(power_dbm: ArrayLike) -> NDArray[np.float64]:
    """Level across 75 ohms [dB(µV)] of a power [dBm], elementwise."""
    return np.asarray(power_dbm, dtype=float) + _DBUV_AT_0_DBM


def dbm_from_dbuv(level_dbuv: ArrayLike) -> NDArray[np.float64]:
    """Power [dBm] of a level across 75 ohms [dB(µV)], elementwise."""
    return np.asarray(level_dbuv, dtype=float) - _DBUV_AT_0_DBM


def wavelength_m(frequency_mhz: ArrayLike) -> NDArray[np.float64]:
    """Wavelength in free space [m] of a frequency above 0 [MHz], elementwise."""
    return SPEED_OF_LIGHT_M_S / (1e6 * np.asarray(frequency_mhz, dtype=float))
