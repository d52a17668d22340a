"""Field strength and basic transmission loss in free space (Rec. ITU-R P.525)."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.constants import HALF_WAVE_DIPOLE_GAIN_DBI
from propagation.errors import RangeError
from propagation.units import wavelength_m


def field_strength_dbuv_m(distance_km: ArrayLike, erp_kw: ArrayLike = 1.0) -> NDArray[np.float64]:
    """Field strength that a transmitter gives in free space.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    distance_km : array
        Length of the straight line, above 0. [km]
    erp_kw : array
        Radiated power relative to a half-wave dipole, above 0. [kW]

    Returns
    -------
    array
        106.92 at 1 km from 1 kW, 6.02 less for each doubling of the distance. [dB(µV/m)]

    Raises
    ------
    RangeError
        A distance or power is 0 or less.

    References
    ----------
    Rec. ITU-R P.525-4, section 2, eq. (4), E = sqrt(30 P) / d, with P in watts of e.i.r.p.
    """
    distance = _above_zero("distance", distance_km, "km")
    power = _above_zero("radiated power", erp_kw, "kW")
    at_1_km = 10 * np.log10(30.0 * 1e3) + HALF_WAVE_DIPOLE_GAIN_DBI + 120 - 60  # V/m to µV/m, m to km
    field: NDArray[np.float64] = at_1_km + 10 * np.log10(power) - 20 * np.log10(distance)
    return field


def basic_loss_db(distance_km: ArrayLike, frequency_mhz: ArrayLike) -> NDArray[np.float64]:
    """Basic transmission loss of free space, between isotropic antennas.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    distance_km : array
        Length of the straight line, above 0. [km]
    frequency_mhz : array
        Carrier frequency, above 0. [MHz]

    Returns
    -------
    array
        Loss, positive in the far field. [dB]

    Raises
    ------
    RangeError
        A distance or frequency is 0 or less.

    References
    ----------
    Rec. ITU-R P.525-4, section 2.3, eq. (7), 20 log(4 pi d / lambda).
    """
    distance = _above_zero("distance", distance_km, "km")
    frequency = _above_zero("frequency", frequency_mhz, "MHz")
    loss: NDArray[np.float64] = 20 * np.log10(4e3 * np.pi * distance / wavelength_m(frequency))
    return loss


def _above_zero(name: str, value: ArrayLike, unit: str) -> NDArray[np.float64]:
    values = np.asarray(value, dtype=float)
    if (values <= 0).any():
        raise RangeError(f"{name} {values.min():g} {unit} has no field in free space: use more than 0 {unit}")
    return values
