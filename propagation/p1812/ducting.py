"""Propagation by ducting and layer reflection, Rec. ITU-R P.1812-7, section 4.5."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.p1812.climate import inland_weight
from propagation.p1812.path import PathTerms

FloatArray = NDArray[np.float64]


def ducting_loss_db(path: PathTerms, frequency_mhz: ArrayLike, time_percent: ArrayLike) -> FloatArray:
    """Basic transmission loss of ducting and layer reflection not exceeded for a share of the time.

    Parameters
    ----------
    path : PathTerms (...)
        What the path brings.
    frequency_mhz, time_percent : array
        Broadcast with (...): 30 to 6000 MHz, 1 to 50 %.

    Returns
    -------
    array
        Loss; hundreds of dB over rough ground. [dB]

    References
    ----------
    Rec. ITU-R P.1812-7, section 4.5, eqs. (46)-(56).
    """
    f = np.asarray(frequency_mhz, dtype=float) / 1000
    return coupling_loss_db(path, f) + angular_loss_db(path, f) + time_loss_db(path, time_percent)  # (46)


def coupling_loss_db(path: PathTerms, frequency_ghz: FloatArray) -> FloatArray:
    """Fixed loss between the antennas and the layer [dB], eq. (47)."""
    f = frequency_ghz
    horizons_km = path.tx_horizon_distance_km + path.rx_horizon_distance_km
    low = np.where(f < 0.5, 45.375 - 137 * f + 92.5 * f**2, 0.0)  # eq. (47a)
    loss: FloatArray = (
        102.45
        + 20 * np.log10(f)
        + 20 * np.log10(horizons_km)
        + low
        + _site_shielding_db(path.tx_horizon_angle_mrad, path.tx_horizon_distance_km, f)
        + _site_shielding_db(path.rx_horizon_angle_mrad, path.rx_horizon_distance_km, f)
        + _over_sea_coupling_db(path, path.tx_distance_to_coast_km, path.tx_horizon_distance_km, path.tx_antenna_amsl_m)
        + _over_sea_coupling_db(path, path.rx_distance_to_coast_km, path.rx_horizon_distance_km, path.rx_antenna_amsl_m)
    )
    return loss


def _site_shielding_db(angle_mrad: FloatArray, horizon_km: FloatArray, f: FloatArray) -> FloatArray:
    above = np.maximum(angle_mrad - 0.1 * horizon_km, 0.0)
    shielding: FloatArray = 20 * np.log10(1 + 0.361 * above * np.sqrt(f * horizon_km)) + 0.264 * above * f ** (
        1 / 3
    )  # eq. (48), 0 below the horizon
    return shielding


def _over_sea_coupling_db(
    path: PathTerms, coast_km: FloatArray, horizon_km: FloatArray, antenna_amsl_m: FloatArray
) -> FloatArray:
    over_sea = (path.fraction_over_sea >= 0.75) & (coast_km <= horizon_km) & (coast_km <= 5)
    gain = -3 * np.exp(-0.25 * np.minimum(coast_km, 5) ** 2) * (1 + np.tanh(0.07 * (50 - antenna_amsl_m)))
    return np.where(over_sea, gain, 0.0)  # eq. (49)


def angular_loss_db(path: PathTerms, frequency_ghz: FloatArray) -> FloatArray:
    """Loss by the angle that the layer has to bend the ray [dB], eqs. (51) and (52)."""
    radius = path.median_effective_earth_radius_km
    per_mrad = 5e-5 * radius * frequency_ghz ** (1 / 3)  # eq. (51)
    angle_mrad = (
        1000 * path.path_length_km / radius
        + np.minimum(path.tx_horizon_angle_mrad, 0.1 * path.tx_horizon_distance_km)
        + np.minimum(path.rx_horizon_angle_mrad, 0.1 * path.rx_horizon_distance_km)
    )  # eq. (52)
    return np.asarray(per_mrad * angle_mrad)


def time_loss_db(path: PathTerms, time_percent: ArrayLike) -> FloatArray:
    """Loss by the share of the time for which the layer holds [dB], eqs. (53)-(56)."""
    p = np.asarray(time_percent, dtype=float)
    d = path.path_length_km
    horizons_km = path.tx_horizon_distance_km + path.rx_horizon_distance_km
    between_km = np.minimum(d - horizons_km, 40)
    rough_m = np.maximum(path.terrain_roughness_m - 10, 0)
    mu3 = np.exp(-4.6e-5 * rough_m * (43 + 6 * between_km))  # eq. (56)

    alpha = np.maximum(-3.4, -0.6 - 3.5e-9 * d**3.1 * inland_weight(path.longest_inland_km))  # eq. (55a)
    heights = (np.sqrt(path.tx_effective_height_ducting_m) + np.sqrt(path.rx_effective_height_ducting_m)) ** 2
    geometry = 500 / path.median_effective_earth_radius_km * d**2 / heights
    mu2 = np.minimum(1.0, geometry**alpha)  # eq. (55)

    beta = np.maximum(path.beta0_percent * mu2 * mu3, 1e-300)  # eq. (54); the floor keeps its logarithm
    log_beta = np.log10(beta)
    gamma = (
        1.076 / (2.0058 - log_beta) ** 1.012 * np.exp(-(9.51 - 4.8 * log_beta + 0.198 * log_beta**2) * 1e-6 * d**1.13)
    )  # eq. (53a)
    loss: FloatArray = -12 + (1.2 + 3.7e-3 * d) * (np.log10(p) - log_beta) + 12 * (p / beta) ** gamma  # (53)
    return loss
