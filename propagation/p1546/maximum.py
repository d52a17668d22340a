"""Field that no path exceeds (Rec. ITU-R P.1546-6, Annex 5, section 2) and the slope path (section 14)."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]


def land_maximum_dbuv_m(d: FloatArray) -> FloatArray:
    """Free-space field for 1 kW as the Recommendation rounds it (eq. 2); distance in km."""
    field: FloatArray = 106.9 - 20 * np.log10(d)
    return field


def sea_maximum_dbuv_m(d: FloatArray, t: FloatArray) -> FloatArray:
    """Maximum of a path all over sea at a time percentage (eqs. 2 and 3)."""
    return land_maximum_dbuv_m(d) + sea_enhancement_db(d, t)


def sea_enhancement_db(d: FloatArray, t: FloatArray) -> FloatArray:
    """What ducts over sea add to free space (eq. 3)."""
    enhancement: FloatArray = 2.38 * (1 - np.exp(-d / 8.94)) * np.log10(50 / t)
    return enhancement


def slope_distance_km(d: ArrayLike, height_difference_m: ArrayLike) -> FloatArray:
    """Length of the straight line between the antennas (section 14, eqs. 37a and 37b)."""
    distance: FloatArray = np.hypot(d, np.asarray(height_difference_m, dtype=float) / 1000)
    return distance


def slope_correction_db(d: FloatArray, height_difference_m: FloatArray) -> FloatArray:
    """Correction for antennas at different heights, 0 or less (section 14, eq. 37)."""
    correction: FloatArray = 20 * np.log10(d / slope_distance_km(d, height_difference_m))
    return correction


def field_maximum_dbuv_m(d: FloatArray, t: FloatArray, sea_share: FloatArray, slope_db: FloatArray) -> FloatArray:
    """Field that the path cannot exceed (section 2, eqs. 2, 3 and 42) with its slope correction."""
    return land_maximum_dbuv_m(d) + sea_share * sea_enhancement_db(d, t) + slope_db
