"""Rec. ITU-R P.1546-6, point to area for 30 to 4000 MHz: Annex 6, steps 1 to 20, in their order."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.p1546 import corrections, curves, maximum
from propagation.p1546.inputs import Inputs, checked_inputs

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class P1546Result:
    """Field, loss and every intermediate value, all of the inputs' common shape.

    NaN where a step does not apply. Fields are for 1 kW e.r.p. unless said.
    """

    h1_m: FloatArray  # height used with the curves over land (step 5)
    field_maximum_dbuv_m: FloatArray  # cap with the slope term
    field_after_step11_dbuv_m: FloatArray  # from the curves, land and sea combined
    tca_nu: FloatArray  # step 12
    tca_correction_db: FloatArray
    tropo_theta_s_deg: FloatArray  # step 13
    tropo_field_dbuv_m: FloatArray
    rx_modified_clutter_height_m: FloatArray  # step 14
    rx_height_correction_db: FloatArray
    tx_clutter_correction_db: FloatArray  # step 15
    slope_path_correction_db: FloatArray  # step 16
    field_short_path_dbuv_m: FloatArray  # step 17, below 1 km
    field_location_corrected_dbuv_m: FloatArray  # step 18, where the share of locations is not 50 %
    field_1kw_dbuv_m: FloatArray  # step 19, after the cap
    basic_loss_db: FloatArray  # step 20
    field_dbuv_m: FloatArray  # for the stated power


def field_strength(
    *,
    frequency_mhz: ArrayLike,
    time_percent: ArrayLike,
    path_length_km: ArrayLike,
    h1_source_height_m: ArrayLike,
    rx_height_agl_m: ArrayLike,
    rx_environment: ArrayLike,
    land_km: ArrayLike | None = None,
    cold_sea_km: ArrayLike = 0.0,
    warm_sea_km: ArrayLike = 0.0,
    tx_height_agl_m: ArrayLike | None = None,
    tx_clutter_height_m: ArrayLike | None = None,
    rx_clutter_height_m: ArrayLike | None = None,
    tx_clearance_angle_deg: ArrayLike | None = None,
    rx_clearance_angle_deg: ArrayLike | None = None,
    tx_ground_amsl_m: ArrayLike | None = None,
    rx_ground_amsl_m: ArrayLike | None = None,
    terrain_information: ArrayLike = True,
    location_percent: ArrayLike = 50.0,
    location_sigma_db: ArrayLike | None = None,
    location_area_width_m: ArrayLike | None = None,
    erp_kw: ArrayLike = 1.0,
) -> P1546Result:
    """Field strength exceeded for a share of time at a share of locations.

    Inputs broadcast. NaN in a required input gives NaN out; None or NaN in an optional one leaves
    out its step, as said below.

    Parameters
    ----------
    frequency_mhz : array
        30 to 4000. [MHz]
    time_percent : array
        1 to 50. [%]
    path_length_km : array
        Horizontal distance, above 0, up to 1000. [km]
    h1_source_height_m : array
        Antenna over the mean ground 3 to 15 km (from 15 km) or 0.2 d to d (below) from it; see
        `path.path_inputs`. Taken as 3000 above that; 3 m at least over sea. [m]
    rx_height_agl_m : array
        Receiving antenna over ground: 1 or more, at sea 3 or more. [m]
    rx_environment : array of str
        "rural", "suburban", "urban", "dense_urban" or "sea" (at or adjacent to it).
    land_km, cold_sea_km, warm_sea_km : array
        Length over each surface; land may be left out as the rest. A path over both kinds of sea
        counts as warm. [km]
    tx_height_agl_m : array, optional
        Transmitting antenna over ground; without it no slope path and no transmitter clutter, and
        no path below 1 km. [m]
    tx_clutter_height_m : array, optional
        Clutter round the transmitter; without it step 15 is left out. [m]
    rx_clutter_height_m : array
        Clutter round the receiver; needed in suburban, urban and dense urban surroundings. [m]
    tx_clearance_angle_deg, rx_clearance_angle_deg : array, optional
        Elevation of the horizon within 15 and 16 km; without the receiver's no step 12, without
        both no step 13. [deg]
    tx_ground_amsl_m, rx_ground_amsl_m : array, optional
        Ground under both antennas, for the slope path; without both the antennas' heights stand
        alone. [m]
    terrain_information : array of bool
        False: the ground is not known and h1_source_height_m is a planner's estimate; then short
        paths use tx_height_agl_m (section 3.1), and the spread over locations is wider.
    location_percent : array
        1 to 99. [%]
    location_sigma_db : array, optional
        Spread over locations; without it from location_area_width_m, or for unknown terrain from
        the surroundings. [dB]
    location_area_width_m : array, optional
        Side of the square area. [m]
    erp_kw : array
        Radiated power, above 0. [kW]

    Returns
    -------
    P1546Result
        Field, loss and every term.

    Raises
    ------
    RangeError
        An input outside the Recommendation, naming the range.

    References
    ----------
    Rec. ITU-R P.1546-6 (08/2019), Annexes 5 and 6.
    """
    given = checked_inputs(
        frequency_mhz=frequency_mhz,
        time_percent=time_percent,
        path_length_km=path_length_km,
        land_km=land_km,
        cold_sea_km=cold_sea_km,
        warm_sea_km=warm_sea_km,
        h1_source_height_m=h1_source_height_m,
        tx_height_agl_m=tx_height_agl_m,
        rx_height_agl_m=rx_height_agl_m,
        rx_environment=rx_environment,
        tx_clutter_height_m=tx_clutter_height_m,
        rx_clutter_height_m=rx_clutter_height_m,
        tx_clearance_angle_deg=tx_clearance_angle_deg,
        rx_clearance_angle_deg=rx_clearance_angle_deg,
        tx_ground_amsl_m=tx_ground_amsl_m,
        rx_ground_amsl_m=rx_ground_amsl_m,
        terrain_information=terrain_information,
        location_percent=location_percent,
        location_sigma_db=location_sigma_db,
        location_area_width_m=location_area_width_m,
        erp_kw=erp_kw,
    )
    terms = _steps(given)
    return P1546Result(**{name: values.reshape(given.shape) for name, values in terms.items()})


def _steps(given: Inputs) -> dict[str, FloatArray]:
    f, t, d = given.frequency_mhz, given.time_percent, given.path_length_km
    ha, h2 = given.tx_height_agl_m, given.rx_height_agl_m
    difference = given.height_difference_m  # NaN without the antenna's height
    d_step = np.maximum(d, 1.0)  # below 1 km, steps 5 to 16 are those of 1 km (section 15)

    h1 = _height_for_curves_m(given)
    field_maximum = maximum.field_maximum_dbuv_m(
        d, t, given.sea_share, _or_0(maximum.slope_correction_db(d, difference))
    )

    e = after_step11 = _land_and_sea(given, d_step, h1, field_maximum)

    tca_nu, tca = corrections.clearance_angle_correction_db(f, given.rx_clearance_angle_deg)  # step 12
    e = e + _or_0(tca)
    theta_s, tropo = corrections.troposcatter_dbuv_m(
        d_step, f, t, given.tx_clearance_angle_deg, given.rx_clearance_angle_deg
    )
    e = np.where(np.isnan(tropo), e, np.maximum(e, tropo))  # step 13
    modified_clutter, rx_height = corrections.rx_height_correction_db(
        d_step, f, h1, h2, given.rx_clutter_height_m, given.rx_in_clutter, given.rx_at_sea
    )
    e = e + rx_height  # step 14
    tx_clutter = corrections.tx_clutter_correction_db(f, ha, given.tx_clutter_height_m)
    e = e + _or_0(tx_clutter)  # step 15
    slope = maximum.slope_correction_db(d_step, difference)
    e = e + _or_0(slope)  # step 16

    short = d < 1 - 1e-9  # a length of 1 km with rounding is 1 km
    short_path = np.where(short, corrections.short_path_dbuv_m(d, difference, e), np.nan)
    e = np.where(short, short_path, e)  # step 17

    off_median = (given.location_percent != 50) & ~given.rx_at_sea
    by_location = corrections.location_correction_db(given.location_percent, _sigma_db(given))
    e = np.where(off_median, e + by_location, e)  # step 18
    location_corrected = np.where(off_median, e, np.nan)

    e = np.minimum(e, field_maximum)  # step 19
    return {
        "h1_m": h1,
        "field_maximum_dbuv_m": field_maximum,
        "field_after_step11_dbuv_m": after_step11,
        "tca_nu": tca_nu,
        "tca_correction_db": tca,
        "tropo_theta_s_deg": theta_s,
        "tropo_field_dbuv_m": tropo,
        "rx_modified_clutter_height_m": modified_clutter,
        "rx_height_correction_db": rx_height,
        "tx_clutter_correction_db": tx_clutter,
        "slope_path_correction_db": slope,
        "field_short_path_dbuv_m": short_path,
        "field_location_corrected_dbuv_m": location_corrected,
        "field_1kw_dbuv_m": e,
        "basic_loss_db": 139.3 - e + 20 * np.log10(f),  # step 20, section 17, eq. (40)
        "field_dbuv_m": e + 10 * np.log10(given.erp_kw),
    }


def _height_for_curves_m(given: Inputs) -> FloatArray:
    """Height h1 of the source (section 3, eqs. 4 to 7)."""
    source, ha, d = given.h1_source_height_m, given.tx_height_agl_m, given.path_length_km
    unknown_ground = ~given.terrain_information & (d < 15) & ~np.isnan(ha)
    by_distance = ha + (source - ha) * (d - 3) / 12  # eq. (5)
    h1 = np.where(unknown_ground, np.where(d <= 3, ha, by_distance), source)  # eqs. (4), (6), (7)
    h1 = np.minimum(h1, 3000.0)
    # The text calls heights below 3 m over sea unreliable; the published programs raise them to 3 m.
    return np.where(given.sea_share >= 1, np.maximum(h1, 3.0), h1)


def _land_and_sea(given: Inputs, d: FloatArray, h1: FloatArray, cap: FloatArray) -> FloatArray:
    """Field of both surfaces over the whole path, combined (steps 5 to 11)."""
    has_land, has_sea = given.sea_share < 1, given.sea_share > 0
    has_land |= np.isnan(given.sea_share)
    sea_surface = np.where(given.warm_sea_km > 0, 2, 1)
    # On a mixed path the text uses h1 for land and at least 3 m for sea.
    both = [np.concatenate([x[has_land], x[has_sea]]) for x in (d, given.frequency_mhz, given.time_percent, cap)]
    heights = np.concatenate([h1[has_land], np.maximum(h1[has_sea], 3.0)])
    surface = np.concatenate([np.zeros(np.count_nonzero(has_land), dtype=int), sea_surface[has_sea]])
    fields = curves.field_over_surface_dbuv_m(surface, both[0], heights, both[1], both[2], both[3])

    land, sea = np.full(d.shape, np.nan), np.full(d.shape, np.nan)
    land[has_land], sea[has_sea] = np.split(fields, [np.count_nonzero(has_land)])
    mixed = curves.mixed_path_dbuv_m(land, sea, given.sea_share)
    return np.where(has_land & has_sea, mixed, np.where(has_sea, sea, land))


def _sigma_db(given: Inputs) -> FloatArray:
    """Spread over locations: given, else of the area, else of the surroundings (section 12)."""
    of_area = corrections.location_sigma_db(given.frequency_mhz, given.location_area_width_m)
    derived = np.where(given.terrain_information, of_area, given.sigma_of_surroundings_db)
    return np.where(np.isnan(given.location_sigma_db), derived, given.location_sigma_db)


def _or_0(term: FloatArray) -> FloatArray:
    return np.where(np.isnan(term), 0.0, term)
