"""Inverse complementary normal distribution as Rec. ITU-R P.1546 prints it."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

_C = (2.515517, 0.802853, 0.010328)
_D = (1.432788, 0.189269, 0.001308)


def inverse_complementary_normal(probability: ArrayLike) -> NDArray[np.float64]:
    """Deviation, in standard deviations, that is exceeded with a probability.

    Elementwise. NaN in, NaN out. The approximation is up to 4.5e-4 off the true quantile; it is
    part of the method, so a library's quantile would leave the published results.

    Parameters
    ----------
    probability : array
        From 0.01 to 0.99. [-]

    Returns
    -------
    array
        2.327 at 0.01, 0 at 0.5, -2.327 at 0.99. [-]

    References
    ----------
    Rec. ITU-R P.1546-6, Annex 5, section 16, eqs. (39a) to (39c).
    """
    x = np.asarray(probability, dtype=float)
    t = np.sqrt(-2 * np.log(np.where(x > 0.5, 1 - x, x)))
    c = ((_C[2] * t + _C[1]) * t + _C[0]) / (((_D[2] * t + _D[1]) * t + _D[0]) * t + 1)
    deviation: NDArray[np.float64] = np.where(x > 0.5, c - t, t - c)
    return deviation
