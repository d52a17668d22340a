"""Propagation by tropospheric scatter, Rec. ITU-R P.1812-7, section 4.4."""

import numpy as np
from numpy.typing import ArrayLike, NDArray


def troposcatter_loss_db(
    frequency_mhz: ArrayLike,
    path_length_km: ArrayLike,
    angular_distance_mrad: ArrayLike,
    n0: ArrayLike,
    time_percent: ArrayLike,
) -> NDArray[np.float64]:
    """Basic transmission loss of troposcatter not exceeded for a share of the time.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    frequency_mhz : array
        Carrier frequency, 30 to 6000. [MHz]
    path_length_km : array
        Length of the path, above 0. [km]
    angular_distance_mrad : array
        Angle between both horizon rays, eq. (84); negative on a clear path. [mrad]
    n0 : array
        Sea-level surface refractivity at the centre of the path. [N]
    time_percent : array
        1 to 50. [%]

    Returns
    -------
    array
        Loss. [dB]

    References
    ----------
    Rec. ITU-R P.1812-7, section 4.4, eqs. (44) and (45).
    """
    f = np.asarray(frequency_mhz, dtype=float) / 1000
    p = np.asarray(time_percent, dtype=float)
    frequency_loss = 25 * np.log10(f) - 2.5 * np.log10(f / 2) ** 2  # eq. (45)
    loss: NDArray[np.float64] = (
        190.1
        + frequency_loss
        + 20 * np.log10(np.asarray(path_length_km, dtype=float))
        + 0.573 * np.asarray(angular_distance_mrad, dtype=float)
        - 0.15 * np.asarray(n0, dtype=float)
        - 10.125 * np.log10(50 / p) ** 0.7
    )  # eq. (44)
    return loss
