"""From field strength to a level at the aerial's terminals."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.constants import HALF_WAVE_DIPOLE_GAIN_DBI, RECEIVER_IMPEDANCE_OHM
from propagation.units import db_from_ratio, wavelength_m

FloatArray = NDArray[np.float64]

FREE_SPACE_IMPEDANCE_OHM = 120 * np.pi  # as the planning formulas of GE06 take it; 0.003 dB off the exact one


def level_dbuv(field_dbuv_m: ArrayLike, gain_dbd: ArrayLike, frequency_mhz: ArrayLike) -> FloatArray:
    """Level that a matched aerial gives [dB(µV) across 75 ohms], for a field [dB(µV/m)]; broadcasts.

    The power density E²/(120 π) times the aperture g λ²/(4 π) is the power U²/R, hence

        U = E + G + 20 log λ + 10 log(R / (480 π²))          G over an isotropic aerial

    which with G over a half-wave dipole reads U = E + G − 20 log f + 33.68, f in MHz.
    """
    aperture = effective_aperture_dbm2(gain_dbd, frequency_mhz)
    density_to_level = db_from_ratio(RECEIVER_IMPEDANCE_OHM / FREE_SPACE_IMPEDANCE_OHM)
    return np.asarray(np.asarray(field_dbuv_m, dtype=float) + aperture + density_to_level)


def effective_aperture_dbm2(gain_dbd: ArrayLike, frequency_mhz: ArrayLike) -> FloatArray:
    """Aperture of an aerial, 10 log(g λ²/(4 π)) [dB(m²)], broadcasts; GE06, chapter 3 to annex 2."""
    gain_dbi = np.asarray(gain_dbd, dtype=float) + HALF_WAVE_DIPOLE_GAIN_DBI
    return np.asarray(gain_dbi + 2 * db_from_ratio(wavelength_m(frequency_mhz)) - db_from_ratio(4 * np.pi))
