"""Effective Earth radius: a bent ray over the true Earth drawn straight over a larger one."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.constants import EARTH_RADIUS_KM
from propagation.errors import RangeError


def effective_earth_radius_km(delta_n_per_km: ArrayLike) -> NDArray[np.float64]:
    """Radius over which rays are straight, for a lapse of refractivity with height.

    Elementwise. NaN in, NaN out.

    Parameters
    ----------
    delta_n_per_km : array
        Decrease of radio refractivity over the lowest kilometre, positive, below 157. [N/km]

    Returns
    -------
    array
        6371 km times k; k is 1 for a lapse of 0 and near 4/3 for 40. [km]

    Raises
    ------
    RangeError
        A lapse of 157 N/km or more, where rays follow the Earth and no radius exists.

    References
    ----------
    Rec. ITU-R P.1812-7, section 3.7, eq. (6).
    """
    lapse = np.asarray(delta_n_per_km, dtype=float)
    if (lapse >= 157).any():
        raise RangeError(
            f"lapse of refractivity {lapse.max():g} N/km lets rays follow the Earth: use less than 157 N/km"
        )
    radius: NDArray[np.float64] = EARTH_RADIUS_KM * 157 / (157 - lapse)
    return radius
