"""Diffraction loss of a path for any share of the time, Rec. ITU-R P.1812-7, section 4.3."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.diffraction import DeltaBullington, delta_bullington_of_edges
from propagation.p1812.normal import inverse_complementary_normal
from propagation.p1812.path import BETA0_EARTH_RADIUS_KM, PathTerms

FloatArray = NDArray[np.float64]


def median_diffraction(path: PathTerms, frequency_mhz: ArrayLike, polarisation: ArrayLike) -> DeltaBullington:
    """Delta-Bullington loss at the median effective Earth radius, eq. (39). Inputs broadcast."""
    return _delta_bullington(
        path,
        path.actual_edge_median,
        path.smooth_edge_median,
        path.median_effective_earth_radius_km,
        frequency_mhz,
        polarisation,
    )


def beta0_diffraction(path: PathTerms, frequency_mhz: ArrayLike, polarisation: ArrayLike) -> DeltaBullington:
    """Delta-Bullington loss exceeded in all but beta0 % of the time, eq. (39). Inputs broadcast."""
    return _delta_bullington(
        path,
        path.actual_edge_beta0,
        path.smooth_edge_beta0,
        BETA0_EARTH_RADIUS_KM,
        frequency_mhz,
        polarisation,
    )


def time_interpolation_factor(time_percent: ArrayLike, beta0_percent: ArrayLike) -> FloatArray:
    """Weight of the beta0 state: 1 up to beta0 % of the time, down to 0 at 50 %, eq. (40).

    Elementwise; NaN in, NaN out.
    """
    p, beta0 = np.asarray(time_percent, dtype=float), np.asarray(beta0_percent, dtype=float)
    between = inverse_complementary_normal(p / 100) / inverse_complementary_normal(beta0 / 100)  # eq. (40a)
    return np.where(p <= beta0, 1.0, between)


def diffraction_loss_db(
    median_db: ArrayLike, beta0_db: ArrayLike, time_percent: ArrayLike, factor: ArrayLike
) -> FloatArray:
    """Diffraction loss not exceeded for a share of the time, eq. (41). Elementwise."""
    median = np.asarray(median_db, dtype=float)
    factor = np.where(np.asarray(time_percent) == 50, 0.0, factor)  # the factor itself is 1e-9 at 50 %
    return np.asarray(median + factor * (np.asarray(beta0_db, dtype=float) - median))


def _delta_bullington(
    path: PathTerms,
    actual_edge: FloatArray,
    smooth_edge: FloatArray,
    effective_earth_radius_km: ArrayLike,
    frequency_mhz: ArrayLike,
    polarisation: ArrayLike,
) -> DeltaBullington:
    return delta_bullington_of_edges(
        actual_edge,
        smooth_edge,
        path.path_length_km,
        path.tx_height_above_smooth_earth_m,
        path.rx_height_above_smooth_earth_m,
        frequency_mhz,
        effective_earth_radius_km,
        path.fraction_over_sea,
        polarisation,
    )
