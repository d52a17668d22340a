"""First Fresnel zone and clearance of a path (Rec. ITU-R P.526)."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.errors import ProfileError
from propagation.units import wavelength_m


def first_zone_radius_m(to_tx_km: ArrayLike, to_rx_km: ArrayLike, frequency_mhz: ArrayLike) -> NDArray[np.float64]:
    """Radius of the first Fresnel ellipsoid at a point of the path.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    to_tx_km, to_rx_km : array
        Distance from the point to either end, both above 0. [km]
    frequency_mhz : array
        Carrier frequency, above 0. [MHz]

    Returns
    -------
    array
        Radius. [m]

    Raises
    ------
    ProfileError
        A point lies on an end of the path, where the zone has no width.

    References
    ----------
    Rec. ITU-R P.526-16, Annex 1, section 2.1, eq. (2), n = 1.
    """
    d1 = np.asarray(to_tx_km, dtype=float)
    d2 = np.asarray(to_rx_km, dtype=float)
    if (d1 <= 0).any() or (d2 <= 0).any():
        raise ProfileError(
            "a point at 0 km from an antenna has no Fresnel zone: take points between both ends of the path"
        )
    radius: NDArray[np.float64] = np.sqrt(1e3 * wavelength_m(frequency_mhz) * d1 * d2 / (d1 + d2))
    return radius


def clearance_ratio(
    clearance_m: ArrayLike, to_tx_km: ArrayLike, to_rx_km: ArrayLike, frequency_mhz: ArrayLike
) -> NDArray[np.float64]:
    """Clearance between ray and ground in units of the first Fresnel radius.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    clearance_m : array
        Height of the ray less height of the ground, negative where the ground is higher. [m]
    to_tx_km, to_rx_km, frequency_mhz : array
        As for the radius.

    Returns
    -------
    array
        0 where the ray touches the ground, 0.6 and more is commonly called clear. [-]

    Raises
    ------
    ProfileError
        A point lies on an end of the path.

    References
    ----------
    Rec. ITU-R P.526-16, Annex 1, section 2.1, eq. (2), n = 1.
    """
    return np.asarray(clearance_m, dtype=float) / first_zone_radius_m(to_tx_km, to_rx_km, frequency_mhz)
