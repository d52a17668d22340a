"""Loss of a signal on its way into a building (Rec. ITU-R P.2109)."""

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import ndtri

from propagation.errors import RangeError

FloatArray = NDArray[np.float64]

# Rec. ITU-R P.2109-2, Table 1: r, s, t of the median, u, v and w, x and y, z of both lognormals
_COEFFICIENTS = {
    "traditional": (12.64, 3.72, 0.96, 9.6, 2.0, 9.1, -3.0, 4.5, -2.0),
    "thermally_efficient": (28.19, -3.00, 8.48, 13.5, 3.8, 27.8, -2.9, 9.4, -2.1),
}
BUILDINGS = tuple(_COEFFICIENTS)
LOWEST_MHZ, HIGHEST_MHZ = 80.0, 100_000.0


def building_entry_loss_db(
    frequency_mhz: ArrayLike, probability: ArrayLike, building: str, elevation_deg: ArrayLike = 0.0
) -> FloatArray:
    """Entry loss not exceeded with a probability, over all places in buildings of a class.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    frequency_mhz : array
        80 to 100 000. [MHz]
    probability : array
        Above 0 and below 1; 0.5 is the median. [-]
    building : str
        "traditional", or "thermally_efficient" with metallised glass and foil-backed panels.
    elevation_deg : array
        Angle of the ray above the horizon at the facade, -90 to 90. [deg]

    Returns
    -------
    array
        Loss over the field outside at the same height; no normal distribution, with a long tail. [dB]

    Raises
    ------
    RangeError
        An input outside.

    References
    ----------
    Rec. ITU-R P.2109-2, Annex 1, section 3, eqs. (1) to (10); their numbers from memory.
    """
    p = np.asarray(probability, dtype=float)
    if (p <= 0).any() or (p >= 1).any():
        raise RangeError("probability of Rec. ITU-R P.2109-2 must be between 0 and 1: leave out both ends")
    return entry_loss_at_deviate_db(frequency_mhz, ndtri(p), building, elevation_deg)


def entry_loss_at_deviate_db(
    frequency_mhz: ArrayLike, deviate: ArrayLike, building: str, elevation_deg: ArrayLike = 0.0
) -> FloatArray:
    """Return the same as `building_entry_loss_db`, for a standard normal deviate in place of its probability.

    The Recommendation takes the deviate of the probability; a model that draws normals needs no way round.
    """
    if building not in _COEFFICIENTS:
        raise RangeError(f'building "{building}" is not in Rec. ITU-R P.2109: use {" or ".join(BUILDINGS)}')
    f = np.asarray(frequency_mhz, dtype=float)
    if (f < LOWEST_MHZ).any() or (f > HIGHEST_MHZ).any():
        raise RangeError(
            f"frequency {f[(f < LOWEST_MHZ) | (f > HIGHEST_MHZ)].flat[0]:g} MHz is outside Rec. ITU-R P.2109-2: "
            f"use {LOWEST_MHZ:g} to {HIGHEST_MHZ:g} MHz"
        )
    elevation = np.abs(np.asarray(elevation_deg, dtype=float))
    if (elevation > 90).any():
        raise RangeError(f"elevation {elevation.max():g} degrees is no angle of a ray: use -90 to 90 degrees")
    r, s, t, u, v, w, x, y, z = _COEFFICIENTS[building]
    log_f = np.log10(f / 1000)
    median_horizontal = r + s * log_f + t * log_f**2  # eq. (9)
    mu1 = median_horizontal + 0.212 * elevation  # eqs. (5) and (10)
    mu2 = w + x * log_f  # eq. (6)
    sigma1 = u + v * log_f  # eq. (7)
    sigma2 = y + z * log_f  # eq. (8)
    deviates = np.asarray(deviate, dtype=float)
    a = deviates * sigma1 + mu1  # eq. (2)
    b = deviates * sigma2 + mu2  # eq. (3)
    return np.asarray(10 * np.log10(10 ** (0.1 * a) + 10 ** (0.1 * b) + 10**-0.3))  # eqs. (1) and (4)
