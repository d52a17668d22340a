"""Two time states: how far the wanted signal falls, how far an interferer rises.

The rule is ours, its parts are published: fading comes from air that bends rays less than usual, so it is
the extra loss over an Earth of k = 1; it never exceeds what ducting adds at the other end of the scale.
The mirror of that enhancement is not used: ducting is not fading.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.digest import PathDigest
from propagation.errors import RangeError
from propagation.free_space import basic_loss_db
from propagation.p1812.troposcatter import troposcatter_loss_db
from propagation.units import db_from_ratio, ratio_from_db

FloatArray = NDArray[np.float64]

REFLECTING_SEA_KM = 20.0  # water in sight beyond which a reflected ray is to be expected


def subrefraction_db(path: PathDigest, frequency_mhz: ArrayLike, polarisation: ArrayLike, n0: ArrayLike) -> FloatArray:
    """Extra loss of a path where rays are not bent (k = 1), without ducting but with troposcatter.

    Parameters
    ----------
    path : PathDigest
        One path or a batch (...).
    frequency_mhz, polarisation, n0 : array
        Carrier [MHz], "horizontal" or "vertical", refractivity at sea level [N]; broadcast with (...).

    Returns
    -------
    array
        Loss at k = 1 less loss at the path's effective Earth radius. [dB]

    References
    ----------
    Diffraction by Rec. ITU-R P.1812-7, section 4.3.4, scatter by eqs. (44) and (45) at 50 % of the time,
    combined as eq. (63).
    """
    free_space = basic_loss_db(path.path_length_km, frequency_mhz)
    usual = free_space + path.diffraction(frequency_mhz, polarisation).loss_db
    straight = free_space + path.diffraction_true_earth(frequency_mhz, polarisation).loss_db
    scatter, scatter_straight = (
        troposcatter_loss_db(frequency_mhz, path.path_length_km, angle_mrad, n0, 50.0)
        for angle_mrad in (path.angular_distance_mrad, path.angular_distance_true_earth_mrad)
    )
    return _either_way_db(straight, scatter_straight) - _either_way_db(usual, scatter)


def fade_db(
    availability_percent: float,
    *,
    subrefraction_db: ArrayLike,
    enhancement_1_db: ArrayLike,
    line_of_sight: ArrayLike,
    sea_km: ArrayLike,
    least_fade_99_db: float,
    sea_fade_99_db: float,
    fade_share_90: float,
) -> FloatArray:
    """Fall of the wanted signal below its median that a share of the time asks to survive.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    availability_percent : float
        50, 90 or 99. [%]
    subrefraction_db : array
        Result of `subrefraction_db`. [dB]
    enhancement_1_db : array
        Field exceeded 1 % of the time less its median. [dB]
    line_of_sight : array of bool
        At the median refractivity.
    sea_km : array
        Length over water. [km]
    least_fade_99_db, sea_fade_99_db, fade_share_90 : float
        Least fade to 99 %, that over more than 20 km of water in sight, share of it to 90 %. [dB], [-]

    Returns
    -------
    array
        0 at 50 %. [dB]

    Raises
    ------
    RangeError
        Another availability.

    References
    ----------
    Our own rule, not measured.
    """
    shares = {50.0: 0.0, 90.0: fade_share_90, 99.0: 1.0}
    if availability_percent not in shares:
        raise RangeError(f"availability {availability_percent:g} % has no fade defined: use 50, 90 or 99 % of the time")
    limited = np.minimum(np.asarray(subrefraction_db, dtype=float), np.asarray(enhancement_1_db, dtype=float))
    to_99 = np.maximum(least_fade_99_db, limited)
    reflected = np.asarray(line_of_sight, dtype=bool) & (np.asarray(sea_km, dtype=float) > REFLECTING_SEA_KM)
    fade: FloatArray = np.where(reflected, np.maximum(to_99, sea_fade_99_db), to_99)
    return shares[availability_percent] * fade


def enhancement_db(field_dbuv_m: ArrayLike, median_field_dbuv_m: ArrayLike) -> FloatArray:
    """Rise of an interferer over its median, 0 or more: the field exceeded (100 - T) % less that at 50 %."""
    rise = np.asarray(field_dbuv_m, dtype=float) - np.asarray(median_field_dbuv_m, dtype=float)
    return np.asarray(np.maximum(0.0, rise))


def _either_way_db(diffracted_db: FloatArray, scattered_db: FloatArray) -> FloatArray:
    """Loss where a signal comes by two ways (Rec. ITU-R P.1812-7, eq. 63)."""
    return -0.5 * db_from_ratio(ratio_from_db(-2 * diffracted_db) + ratio_from_db(-2 * scattered_db))
