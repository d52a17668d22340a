"""Noise from outside and from the set (Rec. ITU-R P.372), as power in a bandwidth."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.constants import BOLTZMANN_J_K, REFERENCE_TEMPERATURE_KELVIN
from propagation.errors import RangeError
from propagation.units import db_from_ratio, ratio_from_db

FloatArray = NDArray[np.float64]

# Fam = c - d log f, f in MHz: Rec. ITU-R P.372, section 6, Table 1 (named rural and quiet rural there too)
_MAN_MADE = {
    "city": (76.8, 27.7),
    "residential": (72.5, 27.7),
    "rural": (67.2, 27.7),
    "quiet_rural": (53.6, 28.6),
}
ENVIRONMENTS = tuple(_MAN_MADE)


def man_made_fam_db(frequency_mhz: ArrayLike, environment: ArrayLike) -> FloatArray:
    """Median man-made noise at an aerial, over thermal noise at 290 K.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    frequency_mhz : array
        0.3 and more; the table ends at 250 MHz, above it the line is drawn on. [MHz]
    environment : array of str
        "city", "residential", "rural" or "quiet_rural".

    Returns
    -------
    array
        Fam, falls with frequency and below 0 at UHF. [dB]

    Raises
    ------
    RangeError
        A frequency below the table or an unknown environment.

    References
    ----------
    Rec. ITU-R P.372-16, section 6, Table 1.
    """
    f = np.asarray(frequency_mhz, dtype=float)
    if (f < 0.3).any():
        raise RangeError(f"frequency {f.min():g} MHz is outside Rec. ITU-R P.372 Table 1: use 0.3 MHz or more")
    if isinstance(environment, str) and environment in _MAN_MADE:
        at_1_mhz, per_decade = _MAN_MADE[environment]
        return np.asarray(at_1_mhz - per_decade * np.log10(f))
    names = np.asarray(environment)
    unknown = names[~np.isin(names, ENVIRONMENTS)]
    if unknown.size:
        raise RangeError(f'noise environment "{unknown.flat[0]}" is not known: use {", ".join(ENVIRONMENTS)}')
    is_in = [names == name for name in ENVIRONMENTS]
    c, d = (np.select(is_in, [_MAN_MADE[name][i] for name in ENVIRONMENTS], np.nan) for i in (0, 1))
    fam: FloatArray = c - d * np.log10(f)
    return fam


def system_noise_factor(external_fam_db: ArrayLike, receiver_noise_factor: ArrayLike) -> FloatArray:
    """Noise factor of aerial and receiving chain together, at the aerial's terminals.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    external_fam_db : array
        External noise over 290 K; an aerial sees no less than 290 K here. [dB]
    receiver_noise_factor : array
        Of everything behind the aerial, feeder included, 1 or more. [-]

    Returns
    -------
    array
        fext + frx - 1, equal to the chain's own where external noise is at its floor. [-]

    Raises
    ------
    RangeError
        A noise factor below 1.

    References
    ----------
    Rec. ITU-R P.372-16, section 2, eq. (2) with all losses at 290 K; the floor at fext = 1 is ours.
    """
    chain: FloatArray = np.asarray(receiver_noise_factor, dtype=float)
    if (chain < 1).any():
        raise RangeError(f"noise factor {chain.min():g} is less than a perfect receiver's: use 1 or more")
    external: FloatArray = np.maximum(1.0, ratio_from_db(external_fam_db))
    factor: FloatArray = external + chain - 1
    return factor


def noise_power_dbm(bandwidth_mhz: ArrayLike, noise_factor: ArrayLike = 1.0) -> FloatArray:
    """Noise power k T0 B f in a bandwidth [MHz] above 0; elementwise, NaN in, NaN out. [dBm]"""
    bandwidth = np.asarray(bandwidth_mhz, dtype=float)
    if (bandwidth <= 0).any():
        raise RangeError(f"bandwidth {bandwidth.min():g} MHz holds no noise: use more than 0 MHz")
    watts = BOLTZMANN_J_K * REFERENCE_TEMPERATURE_KELVIN * 1e6 * bandwidth * np.asarray(noise_factor, dtype=float)
    return db_from_ratio(watts) + 30
