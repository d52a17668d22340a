"""Diffraction over real ground: knife edge, Bullington, smooth Earth, delta-Bullington.

The equations are those of Rec. ITU-R P.1812-7, section 4.3, which are Rec. ITU-R P.526 with
fixed ground constants; equation numbers are P.1812's. Profiles are (..., n) along the path,
transmitter first, and every other argument broadcasts with their leading axes: frequencies and
Earth radii are batches of (...).
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.errors import ProfileError
from propagation.spherical_earth import rounded_wavelength_m, spherical_earth_loss_db

FloatArray = NDArray[np.float64]


def knife_edge_loss_db(nu: ArrayLike, negligible_below: float = -0.78) -> FloatArray:
    """Loss of a single knife edge.

    Parameters
    ----------
    nu : array
        Diffraction parameter, 0 for a grazing ray. [-]
    negligible_below : float
        Value of nu up to which there is no loss; P.1546 prints -0.7806. [-]

    Returns
    -------
    array
        Loss, 6.0 at grazing. NaN in, NaN out. [dB]

    References
    ----------
    Rec. ITU-R P.526-16, section 4.1, eq. (31); Rec. ITU-R P.1812-7, eq. (12).
    """
    nu = np.asarray(nu, dtype=float)
    lit = nu <= negligible_below
    x = np.where(lit, 0.0, nu) - 0.1
    return np.where(lit, 0.0, 6.9 + 20 * np.log10(np.sqrt(x**2 + 1) + x))


def bullington_edge(
    distance_km: ArrayLike,
    height_amsl_m: ArrayLike,
    tx_amsl_m: ArrayLike,
    rx_amsl_m: ArrayLike,
    effective_earth_radius_km: ArrayLike,
) -> FloatArray:
    """Bullington's equivalent edge without its frequency: nu times the root of the wavelength.

    Parameters
    ----------
    distance_km, height_amsl_m : array (..., n)
        Profile from the transmitter, n >= 3, distance rising from 0. [km], [m]
    tx_amsl_m, rx_amsl_m : array (...)
        Heights of both antennas. [m]
    effective_earth_radius_km : array (...)
        Radius over which rays are straight. [km]

    Returns
    -------
    array (...)
        nu * sqrt(wavelength), positive where the path is blocked. [m^0.5]

    Raises
    ------
    ProfileError
        A profile that does not rise from 0 km, is too short or holds NaN.

    References
    ----------
    Rec. ITU-R P.1812-7, section 4.3.1, eqs. (13)-(20).
    """
    x, heights = checked_profile(distance_km, height_amsl_m)
    d = x[..., -1]
    x, heights = x[..., 1:-1], heights[..., 1:-1]
    a, b = np.asarray(tx_amsl_m, dtype=float), np.asarray(rx_amsl_m, dtype=float)
    bulge_per_km2 = 500 / np.asarray(effective_earth_radius_km, dtype=float)  # metres over d1 d2 in km²
    to_rx = d[..., None] - x
    ground = heights + bulge_per_km2[..., None] * (x * to_rx)

    steepest = ((ground - a[..., None]) / x).max(axis=-1)  # eq. (13)
    ray = (a[..., None] * to_rx + b[..., None] * x) / d[..., None]
    clear = ((ground - ray) * np.sqrt(0.002 * d[..., None] / (x * to_rx))).max(axis=-1)  # eq. (15)
    steepest_back = ((ground - b[..., None]) / to_rx).max(axis=-1)  # eq. (17)
    return bullington_edge_of_rays(steepest, steepest_back, clear, d, a, b)


def bullington_edge_of_rays(
    steepest: FloatArray,
    steepest_back: FloatArray,
    clear: FloatArray,
    path_length_km: FloatArray,
    tx_amsl_m: FloatArray,
    rx_amsl_m: FloatArray,
) -> FloatArray:
    """Bullington's edge [m^0.5] from the highest slopes seen from both ends and the largest nu in between.

    Elementwise. Slopes of the profile with the Earth's bulge, eqs. (13) and (17) [m/km]; `clear` is eq. (15) without
    its wavelength [m^0.5]. References as `bullington_edge`, eqs. (14)-(20).
    """
    d, a, b = path_length_km, tx_amsl_m, rx_amsl_m
    sees = steepest < (b - a) / d  # eq. (14)
    slopes = np.where(sees, 1.0, steepest + steepest_back)
    point = np.where(sees, d / 2, (b - a + steepest_back * d) / slopes)  # eq. (18)
    rise = a + steepest * point - (a * (d - point) + b * point) / d
    blocked = rise * np.sqrt(0.002 * d / (point * (d - point)))  # eq. (20)
    edge: FloatArray = np.where(sees, clear, blocked)
    return edge


def bullington_loss_of_edge_db(edge: ArrayLike, path_length_km: ArrayLike, frequency_mhz: ArrayLike) -> FloatArray:
    """Bullington loss of an equivalent edge at each frequency.

    Inputs broadcast. NaN in, NaN out.

    Parameters
    ----------
    edge : array
        Result of `bullington_edge`. [m^0.5]
    path_length_km : array
        Length of the path. [km]
    frequency_mhz : array
        Carrier frequency. [MHz]

    Returns
    -------
    array
        Loss over free space, 0 or more. [dB]

    References
    ----------
    Rec. ITU-R P.1812-7, section 4.3.1, eqs. (12), (16) and (21).
    """
    root_wavelength = np.sqrt(rounded_wavelength_m(frequency_mhz))
    edge_loss = knife_edge_loss_db(np.asarray(edge, dtype=float) / root_wavelength)
    more = 10 + 0.02 * np.asarray(path_length_km, dtype=float)
    loss: FloatArray = edge_loss + (1 - np.exp(-edge_loss / 6)) * more  # eq. (21)
    return loss


def bullington_loss_db(
    distance_km: ArrayLike,
    height_amsl_m: ArrayLike,
    tx_amsl_m: ArrayLike,
    rx_amsl_m: ArrayLike,
    frequency_mhz: ArrayLike,
    effective_earth_radius_km: ArrayLike,
) -> FloatArray:
    """Loss of a profile by Bullington's construction.

    Shapes, units, errors as `bullington_edge`; frequency (...) in MHz. Result (...) in dB.

    References
    ----------
    Rec. ITU-R P.1812-7, section 4.3.1; Rec. ITU-R P.526-16, section 4.5.1.
    """
    edge = bullington_edge(distance_km, height_amsl_m, tx_amsl_m, rx_amsl_m, effective_earth_radius_km)
    return bullington_loss_of_edge_db(edge, np.asarray(distance_km, dtype=float)[..., -1], frequency_mhz)


@dataclass(frozen=True, slots=True)
class SmoothEarth:
    """Smooth surface fitted to a profile, heights under both ends."""

    tx_fit_amsl_m: FloatArray  # (...) least-squares line, eq. (87)
    rx_fit_amsl_m: FloatArray  # (...) eq. (88)
    tx_amsl_m: FloatArray  # (...) for diffraction, never above the ground, eq. (91)
    rx_amsl_m: FloatArray  # (...)


def smooth_earth(
    distance_km: ArrayLike, ground_amsl_m: ArrayLike, tx_amsl_m: ArrayLike, rx_amsl_m: ArrayLike
) -> SmoothEarth:
    """Smooth Earth under a profile of bare ground.

    Shapes, units and errors as `bullington_edge`.

    References
    ----------
    Rec. ITU-R P.1812-7, Attachment 1, sections 5.6.1 and 5.6.2, eqs. (85)-(91).
    """
    x, ground = checked_profile(distance_km, ground_amsl_m)
    d = x[..., -1]
    a, b = np.asarray(tx_amsl_m, dtype=float), np.asarray(rx_amsl_m, dtype=float)
    x0, x1, g0, g1 = x[..., :-1], x[..., 1:], ground[..., :-1], ground[..., 1:]
    v1 = ((x1 - x0) * (g1 + g0)).sum(axis=-1)  # eq. (85)
    v2 = ((x1 - x0) * (g1 * (2 * x1 + x0) + g0 * (x1 + 2 * x0))).sum(axis=-1)  # eq. (86)
    tx_fit = (2 * v1 * d - v2) / d**2  # eq. (87)
    rx_fit = (v2 - v1 * d) / d**2  # eq. (88)

    x, inner = x[..., 1:-1], ground[..., 1:-1]
    to_rx = d[..., None] - x
    above = inner - (a[..., None] * to_rx + b[..., None] * x) / d[..., None]
    return smooth_earth_of_fit(
        tx_fit,
        rx_fit,
        above.max(axis=-1),
        (above / x).max(axis=-1),
        (above / to_rx).max(axis=-1),
        ground[..., 0],
        ground[..., -1],
    )


def smooth_earth_of_fit(
    tx_fit_amsl_m: FloatArray,
    rx_fit_amsl_m: FloatArray,
    highest_m: FloatArray,
    from_tx: FloatArray,
    from_rx: FloatArray,
    tx_ground_amsl_m: FloatArray,
    rx_ground_amsl_m: FloatArray,
) -> SmoothEarth:
    """Smooth Earth from the fitted line and the ground's height over the line between both antennas.

    Elementwise: the highest point over it [m] and its slopes as seen from both ends [m/km], eq. (89).
    References as `smooth_earth`, eqs. (90) and (91).
    """
    obstructed = highest_m > 0
    share = from_tx / np.where(obstructed, from_tx + from_rx, 1.0)
    lowered = np.where(obstructed, highest_m, 0.0)
    return SmoothEarth(
        tx_fit_amsl_m=tx_fit_amsl_m,
        rx_fit_amsl_m=rx_fit_amsl_m,
        tx_amsl_m=np.minimum(tx_fit_amsl_m - lowered * share, tx_ground_amsl_m),
        rx_amsl_m=np.minimum(rx_fit_amsl_m - lowered * (1 - share), rx_ground_amsl_m),
    )


@dataclass(frozen=True, slots=True)
class DeltaBullington:
    """Terms of the delta-Bullington loss, all (...) in dB."""

    actual_db: FloatArray  # Bullington over the real profile
    smooth_db: FloatArray  # Bullington over the smooth Earth
    spherical_db: FloatArray  # spherical Earth
    loss_db: FloatArray  # actual + max(spherical - smooth, 0), eq. (39)


def delta_bullington(
    distance_km: ArrayLike,
    height_amsl_m: ArrayLike,
    tx_amsl_m: ArrayLike,
    rx_amsl_m: ArrayLike,
    tx_smooth_amsl_m: ArrayLike,
    rx_smooth_amsl_m: ArrayLike,
    frequency_mhz: ArrayLike,
    effective_earth_radius_km: ArrayLike,
    sea_share: ArrayLike,
    polarisation: ArrayLike,
) -> DeltaBullington:
    """Delta-Bullington loss with its three parts.

    Parameters
    ----------
    distance_km, height_amsl_m : array (..., n)
        Profile with the cover that counts as obstacle already added between the ends. [km], [m]
    tx_amsl_m, rx_amsl_m : array (...)
        Heights of both antennas. [m]
    tx_smooth_amsl_m, rx_smooth_amsl_m : array (...)
        Smooth Earth under both ends, from `smooth_earth` of the bare ground. [m]
    frequency_mhz, effective_earth_radius_km, sea_share, polarisation : array (...)
        As for `spherical_earth_loss_db`.

    Returns
    -------
    DeltaBullington
        Total and parts.

    Raises
    ------
    ProfileError
        As `bullington_edge`.
    RangeError
        As `spherical_earth_loss_db`.

    References
    ----------
    Rec. ITU-R P.1812-7, section 4.3.4, eqs. (37)-(39); Rec. ITU-R P.526-16, section 4.5.2.
    """
    x = np.asarray(distance_km, dtype=float)
    tx_height = np.asarray(tx_amsl_m, dtype=float) - np.asarray(tx_smooth_amsl_m, dtype=float)  # eq. (37)
    rx_height = np.asarray(rx_amsl_m, dtype=float) - np.asarray(rx_smooth_amsl_m, dtype=float)  # eq. (38)
    actual_edge = bullington_edge(x, height_amsl_m, tx_amsl_m, rx_amsl_m, effective_earth_radius_km)
    smooth_edge = bullington_edge(x, np.zeros_like(x), tx_height, rx_height, effective_earth_radius_km)
    return delta_bullington_of_edges(
        actual_edge,
        smooth_edge,
        x[..., -1],
        tx_height,
        rx_height,
        frequency_mhz,
        effective_earth_radius_km,
        sea_share,
        polarisation,
    )


def delta_bullington_of_edges(
    actual_edge: ArrayLike,
    smooth_edge: ArrayLike,
    path_length_km: ArrayLike,
    tx_over_smooth_earth_m: ArrayLike,
    rx_over_smooth_earth_m: ArrayLike,
    frequency_mhz: ArrayLike,
    effective_earth_radius_km: ArrayLike,
    sea_share: ArrayLike,
    polarisation: ArrayLike,
) -> DeltaBullington:
    """Delta-Bullington loss of a path whose edges are known, at each frequency.

    Inputs broadcast, NaN in, NaN out. Edges from `bullington_edge` over the ground and over a flat
    profile with the antennas' heights over the smooth Earth [m^0.5]; the rest, errors and
    references as `delta_bullington`.
    """
    actual = bullington_loss_of_edge_db(actual_edge, path_length_km, frequency_mhz)
    smooth = bullington_loss_of_edge_db(smooth_edge, path_length_km, frequency_mhz)
    spherical = spherical_earth_loss_db(
        path_length_km,
        tx_over_smooth_earth_m,
        rx_over_smooth_earth_m,
        frequency_mhz,
        effective_earth_radius_km,
        sea_share,
        polarisation,
    )
    loss = actual + np.maximum(spherical - smooth, 0.0)  # eq. (39)
    return DeltaBullington(actual_db=actual, smooth_db=smooth, spherical_db=spherical, loss_db=loss)


def delta_bullington_loss_db(
    distance_km: ArrayLike,
    height_amsl_m: ArrayLike,
    tx_amsl_m: ArrayLike,
    rx_amsl_m: ArrayLike,
    frequency_mhz: ArrayLike,
    effective_earth_radius_km: ArrayLike,
    sea_share: ArrayLike,
    polarisation: ArrayLike,
) -> FloatArray:
    """Delta-Bullington loss of bare ground, the smooth Earth fitted to the same profile.

    Shapes, units, errors and references as `delta_bullington`. Result (...) in dB.
    """
    smooth = smooth_earth(distance_km, height_amsl_m, tx_amsl_m, rx_amsl_m)
    return delta_bullington(
        distance_km,
        height_amsl_m,
        tx_amsl_m,
        rx_amsl_m,
        smooth.tx_amsl_m,
        smooth.rx_amsl_m,
        frequency_mhz,
        effective_earth_radius_km,
        sea_share,
        polarisation,
    ).loss_db


def checked_profile(distance_km: ArrayLike, height_m: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Return distances and heights as arrays (..., n), or raise ProfileError saying what to mend."""
    x, heights = np.asarray(distance_km, dtype=float), np.asarray(height_m, dtype=float)
    if x.ndim == 0 or heights.ndim == 0 or x.shape[-1] != heights.shape[-1]:
        raise ProfileError(
            f"profile has distances of shape {x.shape} and heights of shape {heights.shape}: "
            "give one height for each distance"
        )
    if x.shape[-1] < 3:
        raise ProfileError(f"profile has {x.shape[-1]} points: give at least one between both ends")
    if not np.isfinite(x).all() or not np.isfinite(heights).all():
        raise ProfileError("profile lacks a height or distance: fill it before computing a loss")
    if (x[..., 0] != 0).any() or (np.diff(x, axis=-1) <= 0).any():
        raise ProfileError("profile distances do not rise from 0 km: sort them and drop repeated points")
    return x, heights
