"""Steps 6 to 11 of Rec. ITU-R P.1546-6, Annex 6: from the tables to the field before corrections.

All arrays are (n,): one element is one surface of one path at one frequency and time. Section and
equation numbers are those of Annex 5.
"""

import numpy as np

from propagation.diffraction import knife_edge_loss_db
from propagation.p1546.maximum import sea_maximum_dbuv_m
from propagation.p1546.normal import inverse_complementary_normal
from propagation.p1546.tables import (
    DISTANCES_KM,
    FREQUENCIES_MHZ,
    HEIGHTS_M,
    TIMES_PERCENT,
    FloatArray,
    IntArray,
    Place,
    field_tables,
    neighbours,
    place,
)

_AT_10_M, _AT_20_M = 0, 1  # columns of the tables
_K_NU = np.array([1.35, 3.31, 6.00])  # eq. (12c), per nominal frequency
NEGLIGIBLE_NU = -0.7806  # eq. (12a); P.526 and P.1812 print -0.78


def field_over_surface_dbuv_m(
    surface: IntArray, d: FloatArray, h1: FloatArray, f: FloatArray, t: FloatArray, cap: FloatArray
) -> FloatArray:
    """Field over one surface at any time percentage (steps 6 to 10, section 7, eq. 16).

    Parameters
    ----------
    surface : array (n,)
        Index into `tables.SURFACES`.
    d, h1, f, t : array (n,)
        Path length 1 to 1000 [km], source height [m], frequency [MHz], time [%].
    cap : array (n,)
        Maximum field of the whole path. [dB(µV/m)]

    Returns
    -------
    array (n,)
        Field for 1 kW at 50 % of locations. [dB(µV/m)]
    """
    below, above = neighbours(TIMES_PERCENT, t)
    at_below = _at_time(surface, below, d, h1, f, t, cap)
    between = below != above
    if not between.any():
        return at_below
    at_above = _at_time(surface, above, d, h1, f, t, cap)
    q_below, q_above = (inverse_complementary_normal(TIMES_PERCENT[i] / 100) for i in (below, above))
    width = np.where(between, q_below - q_above, 1.0)
    share = (q_below - inverse_complementary_normal(t / 100)) / width
    return np.where(between, at_below + share * (at_above - at_below), at_below)


def mixed_path_dbuv_m(land: FloatArray, sea: FloatArray, sea_share: FloatArray) -> FloatArray:
    """Field of a path over land and sea (step 11, section 8, eqs. 22 to 26)."""
    v = np.maximum(1.0, 1 + (sea - land) / 40)
    weight = (1 - (1 - sea_share) ** (2 / 3)) ** v
    return (1 - weight) * land + weight * sea


def clear_distance_km(f: FloatArray | float, h1: FloatArray | float, h2: FloatArray | float) -> FloatArray:
    """Distance with 0.6 of the first Fresnel zone just clear over a smooth Earth (section 18, eq. 41)."""
    h1 = np.maximum(h1, 0.0)
    by_frequency = 0.0000389 * f * h1 * h2  # eq. (41a)
    by_horizon = 4.1 * (np.sqrt(h1) + np.sqrt(h2))  # eq. (41b)
    return np.maximum(0.001, by_frequency * by_horizon / (by_frequency + by_horizon))


def _at_time(
    surface: IntArray,
    time: IntArray,
    d: FloatArray,
    h1: FloatArray,
    f: FloatArray,
    t: FloatArray,
    cap: FloatArray,
) -> FloatArray:
    """Field at a nominal time and any frequency (steps 7 to 9, section 6)."""
    e = _at_time_from_curves(surface, time, d, h1, f, t, cap)
    # Over sea below 100 MHz the curves are not extrapolated at short distances: eqs. (15a) and (15b).
    d600 = clear_distance_km(600.0, h1, 10.0)
    short = (surface > 0) & (f < 100) & (d < d600)
    if short.any():
        e = e.copy()
        e[short] = _low_frequency_sea(surface[short], time[short], d[short], h1[short], f[short], t[short], d600[short])
    return e


def _low_frequency_sea(
    surface: IntArray,
    time: IntArray,
    d: FloatArray,
    h1: FloatArray,
    f: FloatArray,
    t: FloatArray,
    d600: FloatArray,
) -> FloatArray:
    df = clear_distance_km(f, h1, 10.0)
    at_df = sea_maximum_dbuv_m(df, t)
    at_d600 = _at_time_from_curves(surface, time, d600, h1, f, t, sea_maximum_dbuv_m(d600, t))
    share = np.log10(d / df) / np.log10(d600 / df)
    return np.where(d <= df, sea_maximum_dbuv_m(d, t), at_df + (at_d600 - at_df) * share)


def _at_time_from_curves(
    surface: IntArray,
    time: IntArray,
    d: FloatArray,
    h1: FloatArray,
    f: FloatArray,
    t: FloatArray,
    cap: FloatArray,
) -> FloatArray:
    at = place(FREQUENCIES_MHZ, f)
    e = _at_frequency(surface, time, at.below, d, h1, t, cap)
    if (at.below != at.above).any():
        e = at.between(e, _at_frequency(surface, time, at.above, d, h1, t, cap))  # eq. (14)
    return np.where(f > 2000, np.minimum(e, cap), e)


def _at_frequency(
    surface: IntArray,
    time: IntArray,
    frequency: IntArray,
    d: FloatArray,
    h1: FloatArray,
    t: FloatArray,
    cap: FloatArray,
) -> FloatArray:
    """Field at a nominal time and frequency (step 8, sections 4 and 5)."""
    across = place(DISTANCES_KM, d)
    up = place(HEIGHTS_M, np.maximum(h1, HEIGHTS_M[0]))
    e = up.between(
        _column(surface, time, frequency, up.below, across),
        _column(surface, time, frequency, up.above, across),
    )  # eq. (8)
    e = np.minimum(e, cap)
    low = h1 < HEIGHTS_M[0]
    for mask, field in ((low & (surface == 0), _low_over_land), (low & (surface > 0), _low_over_sea)):
        if mask.any():
            e[mask] = field(*(x[mask] for x in (surface, time, frequency, d, h1, t, cap)))
    return e


def _column(surface: IntArray, time: IntArray, frequency: IntArray, height: IntArray, across: Place) -> FloatArray:
    """Tabulated field of one height, interpolated in distance (section 5, eq. 13)."""
    field = field_tables().field_dbuv_m
    return across.between(
        field[surface, time, frequency, across.below, height],
        field[surface, time, frequency, across.above, height],
    )


def _at_10_and_20_m(
    surface: IntArray, time: IntArray, frequency: IntArray, d: FloatArray
) -> tuple[FloatArray, FloatArray]:
    across = place(DISTANCES_KM, np.maximum(d, DISTANCES_KM[0]))
    at_10 = np.full(d.shape, _AT_10_M)
    at_20 = np.full(d.shape, _AT_20_M)
    return _column(surface, time, frequency, at_10, across), _column(surface, time, frequency, at_20, across)


def _height_change_db(h: FloatArray | float, frequency: IntArray) -> FloatArray:
    """Correction for terrain that hides a source below 0 m, by its angle over 9 km (eq. 12)."""
    nu = _K_NU[frequency] * np.degrees(np.arctan(-np.asarray(h) / 9000))
    return 6.03 - knife_edge_loss_db(nu, NEGLIGIBLE_NU)


def _below_10_m(e10: FloatArray, e20: FloatArray, h1: FloatArray, frequency: IntArray) -> FloatArray:
    """Field for source heights from 0 to 10 m, and below 0 m (sections 4.2 and 4.3, eqs. 9 and 12).

    Section 4.3 offers two ways for negative heights; this is the one that is continuous at 0 m,
    and that of the published examples. The maximum field does not cap it: step 19 does.
    """
    at_0 = e10 + 0.5 * ((e10 - e20) + _height_change_db(-10.0, frequency))  # eqs. (9a), (9b)
    return np.where(h1 < 0, at_0 + _height_change_db(h1, frequency), at_0 + 0.1 * h1 * (e10 - at_0))


def _low_over_land(
    surface: IntArray,
    time: IntArray,
    frequency: IntArray,
    d: FloatArray,
    h1: FloatArray,
    t: FloatArray,
    cap: FloatArray,
) -> FloatArray:
    e10, e20 = _at_10_and_20_m(surface, time, frequency, d)
    return _below_10_m(e10, e20, h1, frequency)


def _low_over_sea(
    surface: IntArray,
    time: IntArray,
    frequency: IntArray,
    d: FloatArray,
    h1: FloatArray,
    t: FloatArray,
    cap: FloatArray,
) -> FloatArray:
    """Field over sea for source heights from 3 to 10 m (section 4.2, eqs. 10 and 11)."""
    nominal = FREQUENCIES_MHZ[frequency]
    near = clear_distance_km(nominal, h1, 10.0)  # eq. (10a)
    far = clear_distance_km(nominal, 20.0, 10.0)  # eq. (10b)
    e10, e20 = _at_10_and_20_m(surface, time, frequency, d)
    # A published program takes the natural logarithm of 2 here; the text has one logarithm for both.
    log_height = np.log10(h1 / 10) / np.log10(2)
    by_height = e10 + (e20 - e10) * log_height

    far10, far20 = _at_10_and_20_m(surface, time, frequency, far)
    at_near = sea_maximum_dbuv_m(near, t)
    at_far = far10 + (far20 - far10) * log_height
    middle = at_near + (at_far - at_near) * np.log10(d / near) / np.log10(far / near)  # eq. (11b)

    share = np.maximum(0.0, (d - far) / d)
    beyond = by_height * (1 - share) + _below_10_m(e10, e20, h1, frequency) * share  # eq. (11c)
    within = np.where(d <= near, sea_maximum_dbuv_m(d, t), middle)  # eq. (11a)
    return np.minimum(np.where(d >= far, beyond, within), cap)
