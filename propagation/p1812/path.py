"""One path before any frequency: zones, ducting, horizons, smooth Earth, edges.

Rec. ITU-R P.1812-7, section 3 and Attachment 1; equation numbers are the Recommendation's.
Everything that needs the whole profile happens here, once; what is left for each frequency and
time percentage are numbers per path.
"""

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.constants import EARTH_RADIUS_KM
from propagation.diffraction import bullington_edge, checked_profile, smooth_earth
from propagation.errors import ProfileError, RangeError
from propagation.p1812.climate import SEA, beta0_percent, path_centre_latitude_deg, zone_lengths
from propagation.p1812.limits import within
from propagation.refraction import effective_earth_radius_km

FloatArray = NDArray[np.float64]

BETA0_EARTH_RADIUS_KM = 3 * EARTH_RADIUS_KM  # eq. (7)
LEAST_POINTS = 5
NO_COAST_KM = 500.0  # distance to the coast where there is none to count (section 4.5)


@dataclass(frozen=True, slots=True, kw_only=True)
class PathTerms:
    """What one path, or a batch of shape (...), brings to every frequency and time percentage."""

    path_length_km: FloatArray
    tx_antenna_amsl_m: FloatArray
    rx_antenna_amsl_m: FloatArray
    tx_distance_to_coast_km: FloatArray  # over land
    rx_distance_to_coast_km: FloatArray
    rx_at_sea: NDArray[np.bool_]
    fraction_over_sea: FloatArray  # 0 to 1
    longest_land_km: FloatArray  # inland and coastal
    longest_inland_km: FloatArray
    path_centre_latitude_deg: FloatArray
    beta0_percent: FloatArray  # eq. (5)
    median_effective_earth_radius_km: FloatArray  # eq. (6)
    line_of_sight: NDArray[np.bool_]  # over bare ground, at the median radius
    tx_horizon_distance_km: FloatArray  # eq. (80); on a line of sight to the point nearest to it
    rx_horizon_distance_km: FloatArray
    tx_horizon_angle_mrad: FloatArray  # eq. (79)
    rx_horizon_angle_mrad: FloatArray  # eqs. (81), (82)
    path_angular_distance_mrad: FloatArray  # eq. (84)
    smooth_earth_tx_uncorrected_amsl_m: FloatArray  # eq. (87)
    smooth_earth_rx_uncorrected_amsl_m: FloatArray  # eq. (88)
    smooth_earth_tx_amsl_m: FloatArray  # for ducting, eq. (92)
    smooth_earth_rx_amsl_m: FloatArray
    smooth_earth_tx_diffraction_amsl_m: FloatArray  # eq. (91)
    smooth_earth_rx_diffraction_amsl_m: FloatArray
    tx_height_above_smooth_earth_m: FloatArray  # eq. (37)
    rx_height_above_smooth_earth_m: FloatArray  # eq. (38)
    tx_effective_height_ducting_m: FloatArray  # eq. (94)
    rx_effective_height_ducting_m: FloatArray
    terrain_roughness_m: FloatArray  # eq. (95)
    actual_edge_median: FloatArray  # Bullington's edge, nu times root of the wavelength [m^0.5]
    actual_edge_beta0: FloatArray
    smooth_edge_median: FloatArray
    smooth_edge_beta0: FloatArray


def path_terms(
    *,
    distance_km: ArrayLike,
    terrain_amsl_m: ArrayLike,
    clutter_height_m: ArrayLike,
    zone: ArrayLike,
    tx_height_agl_m: ArrayLike,
    rx_height_agl_m: ArrayLike,
    tx_latitude_deg: ArrayLike,
    tx_longitude_deg: ArrayLike,
    rx_latitude_deg: ArrayLike,
    rx_longitude_deg: ArrayLike,
    delta_n_per_km: ArrayLike,
    tx_distance_to_coast_km: ArrayLike = NO_COAST_KM,
    rx_distance_to_coast_km: ArrayLike = NO_COAST_KM,
) -> PathTerms:
    """Terms of a path that hold for every frequency and time percentage.

    Profile arguments are (..., n) and broadcast; all others broadcast with their leading axes.
    Inputs, units, limits and errors as `basic_loss`.

    References
    ----------
    Rec. ITU-R P.1812-7, sections 3.5 to 3.8 and Attachment 1.
    """
    x, terrain = checked_profile(distance_km, terrain_amsl_m)
    if x.shape[-1] < LEAST_POINTS:
        raise ProfileError(f"profile has {x.shape[-1]} points: P.1812 needs {LEAST_POINTS} or more")
    cover = np.asarray(clutter_height_m, dtype=float)
    if not (cover >= 0).all() or np.isinf(cover).any():
        raise ProfileError("profile has a clutter height that is negative or no number: use 0 for open ground")
    d = within("path length", x[..., -1], 0.25, 3000, "km")
    tx_height = within("transmitting antenna height", tx_height_agl_m, 1, 3000, "m")
    rx_height = within("receiving antenna height", rx_height_agl_m, 1, 3000, "m")
    to_coast = [_not_negative(km) for km in (tx_distance_to_coast_km, rx_distance_to_coast_km)]
    radius = effective_earth_radius_km(delta_n_per_km)

    sea_share, longest_land, longest_inland = zone_lengths(x, zone)
    latitude = path_centre_latitude_deg(tx_latitude_deg, tx_longitude_deg, rx_latitude_deg, rx_longitude_deg, d)
    tx_amsl, rx_amsl = terrain[..., 0] + tx_height, terrain[..., -1] + rx_height
    horizons = _horizons(x, terrain, tx_amsl, rx_amsl, radius)

    smooth = smooth_earth(x, terrain, tx_amsl, rx_amsl)
    tx_above, rx_above = tx_amsl - smooth.tx_amsl_m, rx_amsl - smooth.rx_amsl_m  # eqs. (37), (38)
    tx_base = np.minimum(smooth.tx_fit_amsl_m, terrain[..., 0])  # eq. (92)
    rx_base = np.minimum(smooth.rx_fit_amsl_m, terrain[..., -1])

    obstacles = terrain + cover  # eq. (1)
    obstacles[..., 0], obstacles[..., -1] = terrain[..., 0], terrain[..., -1]
    flat = np.zeros_like(x)
    beta0_radius = BETA0_EARTH_RADIUS_KM
    return PathTerms(
        path_length_km=d,
        tx_antenna_amsl_m=tx_amsl,
        rx_antenna_amsl_m=rx_amsl,
        tx_distance_to_coast_km=to_coast[0],
        rx_distance_to_coast_km=to_coast[1],
        rx_at_sea=np.asarray(zone)[..., -1] == SEA,
        fraction_over_sea=sea_share,
        longest_land_km=longest_land,
        longest_inland_km=longest_inland,
        path_centre_latitude_deg=latitude,
        beta0_percent=beta0_percent(latitude, longest_land, longest_inland),
        median_effective_earth_radius_km=radius,
        line_of_sight=horizons.line_of_sight,
        tx_horizon_distance_km=horizons.tx_distance_km,
        rx_horizon_distance_km=horizons.rx_distance_km,
        tx_horizon_angle_mrad=horizons.tx_angle_mrad,
        rx_horizon_angle_mrad=horizons.rx_angle_mrad,
        path_angular_distance_mrad=1000 * d / radius + horizons.tx_angle_mrad + horizons.rx_angle_mrad,
        smooth_earth_tx_uncorrected_amsl_m=smooth.tx_fit_amsl_m,
        smooth_earth_rx_uncorrected_amsl_m=smooth.rx_fit_amsl_m,
        smooth_earth_tx_amsl_m=tx_base,
        smooth_earth_rx_amsl_m=rx_base,
        smooth_earth_tx_diffraction_amsl_m=smooth.tx_amsl_m,
        smooth_earth_rx_diffraction_amsl_m=smooth.rx_amsl_m,
        tx_height_above_smooth_earth_m=tx_above,
        rx_height_above_smooth_earth_m=rx_above,
        tx_effective_height_ducting_m=tx_amsl - tx_base,  # eq. (94)
        rx_effective_height_ducting_m=rx_amsl - rx_base,
        terrain_roughness_m=_roughness_m(x, terrain, tx_base, rx_base, horizons),
        actual_edge_median=bullington_edge(x, obstacles, tx_amsl, rx_amsl, radius),
        actual_edge_beta0=bullington_edge(x, obstacles, tx_amsl, rx_amsl, beta0_radius),
        smooth_edge_median=bullington_edge(x, flat, tx_above, rx_above, radius),
        smooth_edge_beta0=bullington_edge(x, flat, tx_above, rx_above, beta0_radius),
    )


def stacked_paths(paths: Sequence[PathTerms]) -> PathTerms:
    """Many paths of any number of points as one batch: a new last axis runs over the paths."""
    columns = {
        field.name: np.stack(np.broadcast_arrays(*(getattr(path, field.name) for path in paths)), axis=-1)
        for field in fields(PathTerms)
    }
    return PathTerms(**columns)


@dataclass(frozen=True, slots=True)
class _Horizons:
    line_of_sight: NDArray[np.bool_]
    tx_point: NDArray[np.intp]  # index in the profile
    rx_point: NDArray[np.intp]
    tx_distance_km: FloatArray
    rx_distance_km: FloatArray
    tx_angle_mrad: FloatArray
    rx_angle_mrad: FloatArray


def _horizons(
    x: FloatArray, terrain: FloatArray, tx_amsl: FloatArray, rx_amsl: FloatArray, radius: FloatArray
) -> _Horizons:
    """Classification and radio horizons over bare ground, eqs. (77)-(83)."""
    d = x[..., -1]
    inner, ground = x[..., 1:-1], terrain[..., 1:-1]
    back = d[..., None] - inner
    tx, rx, twice_radius = tx_amsl[..., None], rx_amsl[..., None], 2 * radius[..., None]

    forward_angles = 1000 * np.arctan((ground - tx) / (1000 * inner) - inner / twice_radius)  # eq. (77)
    to_rx = 1000 * np.arctan((rx_amsl - tx_amsl) / (1000 * d) - d / (2 * radius))  # eq. (78)
    highest = forward_angles.max(axis=-1)
    line_of_sight = ~(highest > to_rx)

    backward_angles = 1000 * np.arctan((ground - rx) / (1000 * back) - back / twice_radius)  # eq. (82)
    to_tx = 1000 * np.arctan((tx_amsl - rx_amsl) / (1000 * d) - d / (2 * radius))  # eq. (81)

    ray = (tx * back + rx * inner) / d[..., None]
    above_ray = ground + inner * back * 1000 / twice_radius - ray
    nearest = above_ray * np.sqrt(d[..., None] / (inner * back))  # eq. (83), up to a constant
    nearest_point = 1 + _last_largest(nearest)

    tx_point = np.where(line_of_sight, nearest_point, 1 + forward_angles.argmax(axis=-1))
    rx_point = np.where(line_of_sight, nearest_point, 1 + _last_largest(backward_angles))
    return _Horizons(
        line_of_sight=line_of_sight,
        tx_point=tx_point,
        rx_point=rx_point,
        tx_distance_km=_at(x, tx_point),
        rx_distance_km=d - _at(x, rx_point),
        tx_angle_mrad=np.maximum(highest, to_rx),  # eq. (79)
        rx_angle_mrad=np.where(line_of_sight, to_tx, backward_angles.max(axis=-1)),
    )


def _roughness_m(
    x: FloatArray, terrain: FloatArray, tx_base: FloatArray, rx_base: FloatArray, horizons: _Horizons
) -> FloatArray:
    """Highest ground over the smooth Earth between both horizons, eqs. (93) and (95)."""
    slope = (rx_base - tx_base) / x[..., -1]
    above = terrain - (tx_base[..., None] + slope[..., None] * x)
    # where two slopes are equal but for rounding, the receiver's horizon may come first
    first = np.minimum(horizons.tx_point, horizons.rx_point)[..., None]
    last = np.maximum(horizons.tx_point, horizons.rx_point)[..., None]
    index = np.arange(x.shape[-1])
    roughness: FloatArray = np.where((index >= first) & (index <= last), above, -np.inf).max(axis=-1)
    return roughness


def _last_largest(values: FloatArray) -> NDArray[np.intp]:
    return np.asarray(values.shape[-1] - 1 - values[..., ::-1].argmax(axis=-1))


def _at(x: FloatArray, point: NDArray[np.intp]) -> FloatArray:
    every = np.broadcast_to(x, (*point.shape, x.shape[-1]))
    return np.take_along_axis(every, point[..., None], axis=-1)[..., 0]


def _not_negative(distance_to_coast_km: ArrayLike) -> FloatArray:
    distance = np.asarray(distance_to_coast_km, dtype=float)
    if (distance < 0).any():
        raise RangeError(
            f"distance to the coast {distance.min():g} km is negative: "
            f"use 0 at sea and {NO_COAST_KM:g} where there is no coast"
        )
    return distance
