"""How the mechanisms of propagation combine, Rec. ITU-R P.1812-7, sections 4.2 and 4.6."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.p1812.path import PathTerms

FloatArray = NDArray[np.float64]


def free_space_loss_db(path: PathTerms, frequency_mhz: ArrayLike) -> FloatArray:
    """Free-space loss along the slant from antenna to antenna [dB], eq. (8).

    The Recommendation rounds the constant to 92.4; propagation.free_space keeps 92.45.
    """
    f = np.asarray(frequency_mhz, dtype=float) / 1000
    rise_km = (path.tx_antenna_amsl_m - path.rx_antenna_amsl_m) / 1000
    return np.asarray(92.4 + 20 * np.log10(f) + 10 * np.log10(path.path_length_km**2 + rise_km**2))


def short_term_gain_db(path: PathTerms, time_percent: ArrayLike) -> FloatArray:
    """Change of the line-of-sight loss by multipath and focusing [dB], eq. (9); 0 at 50 %."""
    horizons_km = path.tx_horizon_distance_km + path.rx_horizon_distance_km
    share = np.log10(np.asarray(time_percent, dtype=float) / 50)
    return np.asarray(-2.6 * np.expm1(-0.1 * horizons_km) * share)


@dataclass(frozen=True, slots=True)
class Combined:
    """Terms of section 4.6; losses in dB, broadcast over path, frequency and time."""

    distance_interpolation_fk: FloatArray  # eq. (58), 0 on long paths
    angular_interpolation_fj: FloatArray  # eq. (57), 1 on clear paths
    notional_min_los_sea_db: FloatArray  # eq. (59)
    notional_min_los_ducting_db: FloatArray  # eq. (60)
    diffraction_or_ducting_db: FloatArray  # eq. (61)
    modified_db: FloatArray  # eq. (62)
    combined_db: FloatArray  # eq. (63)


def combined_loss(
    path: PathTerms,
    time_percent: ArrayLike,
    *,
    los_p_db: FloatArray,
    los_beta0_db: FloatArray,
    diffraction_p_db: FloatArray,
    loss_diffraction_median_db: FloatArray,
    loss_diffraction_p_db: FloatArray,
    loss_ducting_db: FloatArray,
    loss_troposcatter_db: FloatArray,
    time_interpolation_fi: FloatArray,
) -> Combined:
    """Combine line of sight, diffraction, ducting and troposcatter at 50 % of locations.

    Sums of powers are taken from their larger term, so that no loss overflows.

    References
    ----------
    Rec. ITU-R P.1812-7, section 4.6, eqs. (57)-(63).
    """
    p = np.asarray(time_percent, dtype=float)
    fj = 1 - 0.5 * (1 + np.tanh(2.4 * (path.path_angular_distance_mrad - 0.3) / 0.3))  # eq. (57)
    fk = 1 - 0.5 * (1 + np.tanh(1.5 * (path.path_length_km - 20) / 20))  # eq. (58)

    over_land_db = (1 - path.fraction_over_sea) * diffraction_p_db
    least = np.where(
        p < path.beta0_percent,
        los_p_db + over_land_db,
        loss_diffraction_median_db + (los_beta0_db + over_land_db - loss_diffraction_median_db) * time_interpolation_fi,
    )  # eq. (59)

    high, low = np.maximum(loss_ducting_db, los_p_db), np.minimum(loss_ducting_db, los_p_db)
    ducting_or_los = high + 2.5 * np.log1p(np.exp((low - high) / 2.5))  # eq. (60)
    either = np.where(
        ducting_or_los > loss_diffraction_p_db,
        loss_diffraction_p_db,
        ducting_or_los + (loss_diffraction_p_db - ducting_or_los) * fk,
    )  # eq. (61)
    modified = either + (least - either) * fj  # eq. (62)

    low, high = (
        np.minimum(loss_troposcatter_db, modified),
        np.maximum(loss_troposcatter_db, modified),
    )
    combined = low - 5 * np.log10(1 + 10 ** (0.2 * (low - high)))  # eq. (63)
    return Combined(
        distance_interpolation_fk=fk,
        angular_interpolation_fj=fj,
        notional_min_los_sea_db=least,
        notional_min_los_ducting_db=ducting_or_los,
        diffraction_or_ducting_db=either,
        modified_db=modified,
        combined_db=combined,
    )
