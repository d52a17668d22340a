"""Basic transmission loss and field strength of one path, Rec. ITU-R P.1812-7, steps in its order.

The figures of the program published for edition 8 are the same wherever the two were compared.
"""

from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.errors import RangeError
from propagation.p1812.combination import combined_loss, free_space_loss_db, short_term_gain_db
from propagation.p1812.diffraction import (
    beta0_diffraction,
    diffraction_loss_db,
    median_diffraction,
    time_interpolation_factor,
)
from propagation.p1812.ducting import ducting_loss_db
from propagation.p1812.limits import within
from propagation.p1812.locations import location_loss_db
from propagation.p1812.path import NO_COAST_KM, PathTerms, path_terms
from propagation.p1812.troposcatter import troposcatter_loss_db

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class P1812Result(PathTerms):
    """Loss, field and every term on the way, in the order of the Recommendation.

    Terms of the path keep the path's shape (...); all others broadcast over path, frequency,
    time and locations.
    """

    time_interpolation_fi: FloatArray  # eq. (40), 1 up to beta0 % of the time
    angular_interpolation_fj: FloatArray  # eq. (57)
    distance_interpolation_fk: FloatArray  # eq. (58)
    loss_free_space_db: FloatArray  # eq. (8)
    loss_los_p_db: FloatArray  # eq. (10)
    loss_los_beta0_db: FloatArray  # eq. (11)
    bullington_actual_median_db: FloatArray  # at the median Earth radius: eq. (21) over the ground
    bullington_smooth_median_db: FloatArray  # eq. (21) over the smooth Earth
    spherical_earth_median_db: FloatArray  # eq. (27)
    diffraction_median_db: FloatArray  # eq. (39)
    bullington_actual_beta0_db: FloatArray  # the same at three times the Earth's radius
    bullington_smooth_beta0_db: FloatArray
    spherical_earth_beta0_db: FloatArray
    diffraction_beta0_db: FloatArray
    diffraction_p_db: FloatArray  # eq. (41)
    loss_diffraction_median_db: FloatArray  # eq. (42)
    loss_diffraction_p_db: FloatArray  # eq. (43)
    loss_troposcatter_db: FloatArray  # eq. (44)
    loss_ducting_db: FloatArray  # eq. (46)
    loss_notional_min_los_sea_db: FloatArray  # eq. (59)
    loss_notional_min_los_ducting_db: FloatArray  # eq. (60)
    loss_diffraction_or_ducting_db: FloatArray  # eq. (61)
    loss_modified_db: FloatArray  # eq. (62)
    loss_combined_median_locations_db: FloatArray  # eq. (63)
    location_loss_db: FloatArray  # sections 4.7 and 4.8
    basic_loss_db: FloatArray  # eq. (69)
    field_1kw_dbuv_m: FloatArray  # eq. (70)
    field_dbuv_m: FloatArray  # for erp_kw


def basic_loss(
    *,
    distance_km: ArrayLike,
    terrain_amsl_m: ArrayLike,
    clutter_height_m: ArrayLike,
    zone: ArrayLike,
    frequency_mhz: ArrayLike,
    time_percent: ArrayLike,
    tx_height_agl_m: ArrayLike,
    rx_height_agl_m: ArrayLike,
    polarisation: ArrayLike,
    tx_latitude_deg: ArrayLike,
    tx_longitude_deg: ArrayLike,
    rx_latitude_deg: ArrayLike,
    rx_longitude_deg: ArrayLike,
    delta_n_per_km: ArrayLike,
    n0: ArrayLike,
    tx_distance_to_coast_km: ArrayLike = NO_COAST_KM,
    rx_distance_to_coast_km: ArrayLike = NO_COAST_KM,
    location_percent: ArrayLike = 50.0,
    location_sigma_db: ArrayLike | None = None,
    building_entry_median_db: ArrayLike = 0.0,
    building_entry_sigma_db: ArrayLike = 0.0,
    erp_kw: ArrayLike = 1.0,
) -> P1812Result:
    """Loss not exceeded, and field exceeded, for a share of time and locations over a given path.

    Profiles run along the last axis (..., n), transmitter first; everything else broadcasts with
    their leading axes. For one path (n,), six frequencies (6, 1) and three times (3,) give (6, 3).
    NaN in an elementwise argument gives NaN. For many emissions over the same ground compute
    `path_terms` once and `loss_of_path` for each.

    Parameters
    ----------
    distance_km : array (..., n)
        From 0, rising, at least 5 points, to 0.25 ... 3000; steps may differ. [km]
    terrain_amsl_m : array (..., n)
        Bare ground. [m]
    clutter_height_m : array (..., n)
        Cover that stands on it, 0 or more; without effect at both ends. [m]
    zone : array (..., n)
        1 sea, 3 coastal land (below 100 m within 50 km of the sea), 4 inland.
    frequency_mhz : array
        30 to 6000. [MHz]
    time_percent : array
        Share of an average year, 1 to 50. [%]
    tx_height_agl_m, rx_height_agl_m : array
        Antennas above ground, 1 to 3000. [m]
    polarisation : array of str
        "horizontal" or "vertical".
    tx_latitude_deg, tx_longitude_deg, rx_latitude_deg, rx_longitude_deg : array
        Positions; only the latitude of the path's centre matters. [deg]
    delta_n_per_km : array
        Fall of refractivity over the first kilometre, below 157 (`propagation.refractivity`). [N/km]
    n0 : array
        Refractivity at sea level, 200 to 500. [N]
    tx_distance_to_coast_km, rx_distance_to_coast_km : array
        Over land along the path; 0 at sea, 500 where there is no coast. [km]
    location_percent, location_sigma_db, building_entry_median_db, building_entry_sigma_db : array
        As for `location_loss_db`; the outdoor spread may come from `location_deviation_db`.
    erp_kw : array
        Radiated power relative to a half-wave dipole, above 0. [kW]

    Returns
    -------
    P1812Result
        Loss, field strength and every intermediate term.

    Raises
    ------
    RangeError
        A quantity outside the range given here. Below 0.25 km, where published programs go on
        silently, use another method.
    ProfileError
        A profile that is no path.

    References
    ----------
    Rec. ITU-R P.1812-7, section 4.
    """
    path = path_terms(
        distance_km=distance_km,
        terrain_amsl_m=terrain_amsl_m,
        clutter_height_m=clutter_height_m,
        zone=zone,
        tx_height_agl_m=tx_height_agl_m,
        rx_height_agl_m=rx_height_agl_m,
        tx_latitude_deg=tx_latitude_deg,
        tx_longitude_deg=tx_longitude_deg,
        rx_latitude_deg=rx_latitude_deg,
        rx_longitude_deg=rx_longitude_deg,
        delta_n_per_km=delta_n_per_km,
        tx_distance_to_coast_km=tx_distance_to_coast_km,
        rx_distance_to_coast_km=rx_distance_to_coast_km,
    )
    return loss_of_path(
        path,
        frequency_mhz=frequency_mhz,
        time_percent=time_percent,
        polarisation=polarisation,
        n0=n0,
        location_percent=location_percent,
        location_sigma_db=location_sigma_db,
        building_entry_median_db=building_entry_median_db,
        building_entry_sigma_db=building_entry_sigma_db,
        erp_kw=erp_kw,
    )


def loss_of_path(
    path: PathTerms,
    *,
    frequency_mhz: ArrayLike,
    time_percent: ArrayLike,
    polarisation: ArrayLike,
    n0: ArrayLike,
    location_percent: ArrayLike = 50.0,
    location_sigma_db: ArrayLike | None = None,
    building_entry_median_db: ArrayLike = 0.0,
    building_entry_sigma_db: ArrayLike = 0.0,
    erp_kw: ArrayLike = 1.0,
) -> P1812Result:
    """Loss and field of emissions over paths whose terms are known; the profile is not needed.

    All arguments broadcast with the path's shape (...). Units, limits, errors as `basic_loss`.
    """
    frequency = within("frequency", frequency_mhz, 30, 6000, "MHz")
    time = within("share of time", time_percent, 1, 50, "%")
    refractivity = np.asarray(n0, dtype=float)
    absent = (refractivity < 200) | (refractivity > 500)
    if absent.any():
        raise RangeError(f"sea-level refractivity {refractivity[absent].flat[0]:g} N occurs nowhere: use 200 to 500 N")
    power = np.asarray(erp_kw, dtype=float)
    if (power <= 0).any():
        raise RangeError(f"radiated power {power.min():g} kW gives no field: use more than 0 kW")

    free_space = free_space_loss_db(path, frequency)  # 4.2
    los_p = free_space + short_term_gain_db(path, time)
    los_beta0 = free_space + short_term_gain_db(path, path.beta0_percent)

    median = median_diffraction(path, frequency, polarisation)  # 4.3
    beta0 = beta0_diffraction(path, frequency, polarisation)
    fi = time_interpolation_factor(time, path.beta0_percent)
    diffraction_p = diffraction_loss_db(median.loss_db, beta0.loss_db, time, fi)
    loss_diffraction_median = free_space + median.loss_db  # eq. (42)
    loss_diffraction_p = los_p + diffraction_p  # eq. (43)

    troposcatter = troposcatter_loss_db(
        frequency, path.path_length_km, path.path_angular_distance_mrad, refractivity, time
    )  # 4.4
    ducting = ducting_loss_db(path, frequency, time)  # 4.5
    combined = combined_loss(
        path,
        time,
        los_p_db=los_p,
        los_beta0_db=los_beta0,
        diffraction_p_db=diffraction_p,
        loss_diffraction_median_db=loss_diffraction_median,
        loss_diffraction_p_db=loss_diffraction_p,
        loss_ducting_db=ducting,
        loss_troposcatter_db=troposcatter,
        time_interpolation_fi=fi,
    )  # 4.6
    locations = location_loss_db(
        location_percent,
        location_sigma_db,
        path.rx_at_sea,
        building_entry_median_db,
        building_entry_sigma_db,
    )  # 4.7, 4.8
    loss = np.maximum(los_p, combined.combined_db + locations)  # 4.9, eq. (69)
    field_1kw = 199.36 + 20 * np.log10(frequency / 1000) - loss  # 4.10, eq. (70)

    return P1812Result(
        **{field.name: getattr(path, field.name) for field in fields(PathTerms)},
        time_interpolation_fi=fi,
        angular_interpolation_fj=combined.angular_interpolation_fj,
        distance_interpolation_fk=combined.distance_interpolation_fk,
        loss_free_space_db=free_space,
        loss_los_p_db=los_p,
        loss_los_beta0_db=los_beta0,
        bullington_actual_median_db=median.actual_db,
        bullington_smooth_median_db=median.smooth_db,
        spherical_earth_median_db=median.spherical_db,
        diffraction_median_db=median.loss_db,
        bullington_actual_beta0_db=beta0.actual_db,
        bullington_smooth_beta0_db=beta0.smooth_db,
        spherical_earth_beta0_db=beta0.spherical_db,
        diffraction_beta0_db=beta0.loss_db,
        diffraction_p_db=diffraction_p,
        loss_diffraction_median_db=loss_diffraction_median,
        loss_diffraction_p_db=loss_diffraction_p,
        loss_troposcatter_db=troposcatter,
        loss_ducting_db=ducting,
        loss_notional_min_los_sea_db=combined.notional_min_los_sea_db,
        loss_notional_min_los_ducting_db=combined.notional_min_los_ducting_db,
        loss_diffraction_or_ducting_db=combined.diffraction_or_ducting_db,
        loss_modified_db=combined.modified_db,
        loss_combined_median_locations_db=combined.combined_db,
        location_loss_db=locations,
        basic_loss_db=loss,
        field_1kw_dbuv_m=field_1kw,
        field_dbuv_m=field_1kw + 10 * np.log10(power),
    )
