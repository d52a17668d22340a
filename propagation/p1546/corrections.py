"""Steps 12 to 18 of Rec. ITU-R P.1546-6, Annex 6: what the two ends of a path add to the curves.

Elementwise; NaN where an optional input is missing, which the caller takes as "step not applicable".
Section and equation numbers are those of Annex 5.
"""

import numpy as np

from propagation.diffraction import knife_edge_loss_db
from propagation.p1546.curves import NEGLIGIBLE_NU, clear_distance_km
from propagation.p1546.maximum import land_maximum_dbuv_m, slope_distance_km
from propagation.p1546.normal import inverse_complementary_normal
from propagation.p1546.tables import FloatArray

BoolArray = np.typing.NDArray[np.bool_]

_EARTH_RADIUS_KM = 6370.0  # as section 13 prints it
_K_FACTOR = 4 / 3
_SURFACE_REFRACTIVITY = 325.0  # N-units, median of the world (section 13)
_CLUTTER_DISTANCE_M = 27.0  # between an antenna and the clutter round it (section 9)
_NEAR_KM = 0.04  # end of the free-space zone (section 15)


def clearance_angle_correction_db(f: FloatArray, angle_deg: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Step 12, correction for the terrain clearance angle at the receiver (section 11, eq. 32).

    The text gives it for receivers on land. The published examples also apply it to receivers at
    sea wherever an angle is known, and we do as they do: leave the angle out for a receiver at sea.

    Returns
    -------
    nu, correction : arrays
        Diffraction parameter [-] and correction, 0 or less but for rounding in the text. [dB]
    """
    nu = 0.065 * np.clip(angle_deg, 0.55, 40.0) * np.sqrt(f)
    return nu, _j(0.036 * np.sqrt(f)) - _j(nu)


def troposcatter_dbuv_m(
    d: FloatArray, f: FloatArray, t: FloatArray, tx_angle_deg: FloatArray, rx_angle_deg: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Step 13, field by scatter in the troposphere (section 13, eqs. 35 and 36).

    Returns
    -------
    theta_s_deg, field_dbuv_m : arrays
        Scatter angle from the unlimited clearance angles, and the field.
    """
    bend = np.degrees(d / (_K_FACTOR * _EARTH_RADIUS_KM))
    theta = np.maximum(0.0, bend + tx_angle_deg + rx_angle_deg)
    loss = 5 * np.log10(f) - 2.5 * (np.log10(f) - 3.3) ** 2
    # 0 at 50 %, where rounding may leave a base a hair below 0
    gain = 10.1 * np.maximum(0.0, -np.log10(0.02 * t)) ** 0.7
    field = 24.4 - 20 * np.log10(d) - 10 * theta - loss + 0.15 * _SURFACE_REFRACTIVITY + gain
    return theta, field


def rx_height_correction_db(
    d: FloatArray,
    f: FloatArray,
    h1: FloatArray,
    h2: FloatArray,
    clutter_m: FloatArray,
    in_clutter: BoolArray,
    at_sea: BoolArray,
) -> tuple[FloatArray, FloatArray]:
    """Step 14, height and surroundings of the receiver (section 9, eqs. 27 to 29).

    Parameters
    ----------
    d, f, h1, h2 : array
        Path length, at least 1 [km], frequency [MHz], source height [m], receiver height [m].
    clutter_m : array
        Height of the clutter round the receiver, read where it stands in clutter. The text asks
        for 10 m or more; lower values are taken as they are, as in the published examples. [m]
    in_clutter, at_sea : array of bool
        Suburban, urban or dense urban surroundings; at or adjacent to sea. Neither: rural.

    Returns
    -------
    modified_clutter_m, correction : arrays
        R' (10 m outside clutter) and the correction. [m], [dB]
    """
    k_h2 = 3.2 + 6.2 * np.log10(f)
    modified = np.where(
        in_clutter, np.maximum(1.0, (1000 * d * clutter_m - 15 * h1) / (1000 * d - 15)), 10.0
    )  # eq. (27)
    hd = np.maximum(modified - h2, 0.0)
    nu = 0.0108 * np.sqrt(f) * np.sqrt(hd * np.degrees(np.arctan(hd / _CLUTTER_DISTANCE_M)))
    in_shadow = in_clutter & (h2 < modified)
    correction = np.where(in_shadow, 6.03 - _j(nu), k_h2 * np.log10(h2 / modified))  # eqs. (28a), (28b)
    correction = correction - np.where(in_clutter & (modified < 10), k_h2 * np.log10(10 / modified), 0.0)

    low_at_sea = at_sea & (h2 < 10)
    d10 = clear_distance_km(f, h1, 10.0)
    dh2 = clear_distance_km(f, h1, np.minimum(h2, 10.0))
    between = low_at_sea & (dh2 < d10)
    share = np.log10(d / dh2) / np.where(between, np.log10(np.where(between, d10, 10.0) / dh2), 1.0)
    return modified, np.where(low_at_sea, correction * np.clip(share, 0.0, 1.0), correction)  # eq. (29)


def tx_clutter_correction_db(f: FloatArray, antenna_agl_m: FloatArray, clutter_m: FloatArray) -> FloatArray:
    """Step 15, clutter round the transmitting antenna, 0 or less (section 10, eq. 30)."""
    hd = antenna_agl_m - clutter_m
    size = 0.0108 * np.sqrt(f) * np.sqrt(hd * np.degrees(np.arctan(hd / _CLUTTER_DISTANCE_M)))
    return -_j(np.where(hd <= 0, size, -size))


def short_path_dbuv_m(d: FloatArray, height_difference_m: FloatArray, at_1_km: FloatArray) -> FloatArray:
    """Step 17, field below 1 km from that at 1 km (section 15, eqs. 38a and 38b)."""
    s = slope_distance_km(d, height_difference_m)
    s_near = slope_distance_km(_NEAR_KM, height_difference_m)
    s_1_km = slope_distance_km(1.0, height_difference_m)
    near = land_maximum_dbuv_m(s_near)
    share = np.log10(s / s_near) / np.log10(s_1_km / s_near)
    return np.where(d <= _NEAR_KM, land_maximum_dbuv_m(s), near + (at_1_km - near) * share)


def location_correction_db(location_percent: FloatArray, sigma_db: FloatArray) -> FloatArray:
    """Step 18, from 50 % to another share of locations (section 12, eq. 33)."""
    return inverse_complementary_normal(location_percent / 100) * sigma_db


def location_sigma_db(f: FloatArray, area_width_m: FloatArray) -> FloatArray:
    """Spread of the field over a small square where the terrain is known (section 12, eq. 34)."""
    return (0.52 + 0.024 * f / 1000) * area_width_m**0.28


def _j(nu: FloatArray) -> FloatArray:
    return knife_edge_loss_db(nu, NEGLIGIBLE_NU)
