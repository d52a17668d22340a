"""Diffraction over a smooth spherical Earth.

Rec. ITU-R P.1812-7, sections 4.3.2 and 4.3.3, which is Rec. ITU-R P.526, section 3, with fixed
ground constants; equation numbers are P.1812's. Polarisation matters here and nowhere else.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.errors import RangeError

FloatArray = NDArray[np.float64]

_LAND = (22.0, 0.003)  # relative permittivity, conductivity in S/m (4.3.3)
_SEA = (80.0, 5.0)


def spherical_earth_loss_db(
    path_length_km: ArrayLike,
    tx_height_m: ArrayLike,
    rx_height_m: ArrayLike,
    frequency_mhz: ArrayLike,
    effective_earth_radius_km: ArrayLike,
    sea_share: ArrayLike,
    polarisation: ArrayLike,
) -> FloatArray:
    """Loss over a smooth spherical Earth.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    path_length_km : array
        Length of the path, above 0. [km]
    tx_height_m, rx_height_m : array
        Antenna heights above the smooth surface, above 0. [m]
    frequency_mhz : array
        Carrier frequency. [MHz]
    effective_earth_radius_km : array
        Radius over which rays are straight. [km]
    sea_share : array
        Share of the path over sea, 0 to 1. [-]
    polarisation : array of str
        "horizontal" or "vertical".

    Returns
    -------
    array
        Loss over free space, 0 or more below the horizon's reach of the wave. [dB]

    Raises
    ------
    RangeError
        A height of 0 or less, or another polarisation.

    References
    ----------
    Rec. ITU-R P.1812-7, sections 4.3.2 and 4.3.3, eqs. (22)-(36); Rec. ITU-R P.526-16, section 3.
    """
    d, h1, h2, radius, wavelength = np.broadcast_arrays(
        np.asarray(path_length_km, dtype=float),
        np.asarray(tx_height_m, dtype=float),
        np.asarray(rx_height_m, dtype=float),
        np.asarray(effective_earth_radius_km, dtype=float),
        rounded_wavelength_m(frequency_mhz),
    )
    lowest = np.minimum(h1, h2)
    if (lowest <= 0).any():
        raise RangeError(
            f"antenna {lowest.min():g} m over the smooth Earth: heights must be above 0 m, raise the antenna"
        )

    horizon = np.sqrt(2 * radius) * (np.sqrt(0.001 * h1) + np.sqrt(0.001 * h2))  # eq. (22)
    beyond = d >= horizon
    clearance, d1 = _smooth_earth_clearance(d, h1, h2, radius)
    needed = 17.456 * np.sqrt(d1 * (d - d1) * wavelength / d)  # eq. (25)
    marginal = 500 * (d / (np.sqrt(h1) + np.sqrt(h2))) ** 2  # eq. (26)

    first_term = _first_term_loss_db(
        d, h1, h2, frequency_mhz, np.where(beyond, radius, marginal), sea_share, polarisation
    )
    within = np.where(clearance > needed, 0.0, (1 - clearance / needed) * np.maximum(first_term, 0.0))
    return np.where(beyond, first_term, within)  # eq. (27)


def rounded_wavelength_m(frequency_mhz: ArrayLike) -> FloatArray:
    """Wavelength [m] as P.1812 computes it, with the speed of light rounded to 0.2998 m GHz."""
    return 299.8 / np.asarray(frequency_mhz, dtype=float)


def _smooth_earth_clearance(
    d: FloatArray, h1: FloatArray, h2: FloatArray, radius: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Least clearance [m] over the smooth Earth and its distance from the transmitter [km]."""
    c = (h1 - h2) / (h1 + h2)  # eq. (24d)
    m = 250 * d**2 / (radius * (h1 + h2))  # eq. (24e)
    argument = np.clip(1.5 * c * np.sqrt(3 * m / (m + 1) ** 3), -1, 1)
    b = 2 * np.sqrt((m + 1) / (3 * m)) * np.cos(np.pi / 3 + np.arccos(argument) / 3)  # eq. (24c)
    d1 = np.clip(d / 2 * (1 + b), 1e-9 * d, (1 - 1e-9) * d)  # eq. (24a); rounding must not leave the path
    d2 = d - d1
    clearance = ((h1 - 500 * d1**2 / radius) * d2 + (h2 - 500 * d2**2 / radius) * d1) / d  # eq. (23)
    return clearance, d1


def _first_term_loss_db(
    d: FloatArray,
    h1: FloatArray,
    h2: FloatArray,
    frequency_mhz: ArrayLike,
    radius: FloatArray,
    sea_share: ArrayLike,
    polarisation: ArrayLike,
) -> FloatArray:
    """First term of the residue series, land and sea weighted by their share (eqs. 28-36)."""
    names = np.asarray(polarisation)
    wrong = names[~np.isin(names, ("horizontal", "vertical"))]
    if wrong.size:
        raise RangeError(f'polarisation "{wrong.flat[0]}" is not known: use "horizontal" or "vertical"')
    vertical = names == "vertical"
    f = np.asarray(frequency_mhz, dtype=float) / 1000
    sea = np.asarray(sea_share, dtype=float)
    over_land = _first_term_of_surface_db(d, h1, h2, f, radius, vertical, *_LAND)
    over_sea = _first_term_of_surface_db(d, h1, h2, f, radius, vertical, *_SEA)
    return np.asarray(sea * over_sea + (1 - sea) * over_land)  # eq. (28)


def _first_term_of_surface_db(
    d: FloatArray,
    h1: FloatArray,
    h2: FloatArray,
    f: FloatArray,
    radius: FloatArray,
    vertical: NDArray[np.bool_],
    permittivity: float,
    conductivity: float,
) -> FloatArray:
    loss_tangent = (18 * conductivity / f) ** 2
    k = 0.036 * (radius * f) ** (-1 / 3) * ((permittivity - 1) ** 2 + loss_tangent) ** -0.25  # eq. (29a)
    k = np.where(vertical, k * np.sqrt(permittivity**2 + loss_tangent), k)  # eq. (29b)
    beta = (1 + 1.6 * k**2 + 0.67 * k**4) / (1 + 4.5 * k**2 + 1.53 * k**4)  # eq. (30)
    x = 21.88 * beta * (f / radius**2) ** (1 / 3) * d  # eq. (31)
    per_metre = 0.9575 * beta * (f**2 / radius) ** (1 / 3)  # eq. (32)
    fx = np.where(x >= 1.6, 11 + 10 * np.log10(x) - 17.6 * x, -20 * np.log10(x) - 5.6488 * x**1.425)  # (33)
    floor = 2 + 20 * np.log10(k)
    gains = _height_gain_db(beta * per_metre * h1, floor) + _height_gain_db(beta * per_metre * h2, floor)
    return np.asarray(-fx - gains)  # eq. (36)


def _height_gain_db(b: FloatArray, floor_db: FloatArray) -> FloatArray:
    high = np.maximum(b, 2.0) - 1.1
    low = np.minimum(b, 2.0)
    gain = np.where(b > 2, 17.6 * np.sqrt(high) - 5 * np.log10(high) - 8, 20 * np.log10(low + 0.1 * low**3))  # eq. (34)
    return np.maximum(gain, floor_db)
