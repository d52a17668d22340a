"""What Rec. ITU-R P.1546-6 needs of a profile: source height, clearance angles, lengths over land and sea."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.diffraction import checked_profile
from propagation.errors import ProfileError

FloatArray = NDArray[np.float64]

SEA, COASTAL_LAND, INLAND = 1, 3, 4  # zones along a profile


@dataclass(frozen=True, slots=True)
class PathInputs:
    """Arguments of `field_strength` that come from the ground, all (...)."""

    path_length_km: FloatArray
    land_km: FloatArray
    sea_km: FloatArray
    tx_ground_amsl_m: FloatArray
    rx_ground_amsl_m: FloatArray
    h1_source_height_m: FloatArray
    tx_clearance_angle_deg: FloatArray
    rx_clearance_angle_deg: FloatArray


def path_inputs(
    distance_km: ArrayLike,
    ground_amsl_m: ArrayLike,
    zone: ArrayLike,
    antenna_agl_m: ArrayLike,
    aerial_agl_m: ArrayLike,
    *,
    coastal_land_is_sea: bool,
) -> PathInputs:
    """Derive the inputs of P.1546 from a profile.

    Parameters
    ----------
    distance_km, ground_amsl_m, zone : array (..., n)
        Profile from the transmitter, n >= 3; zone 1 sea, 3 coastal land, 4 inland. [km], [m], [-]
    antenna_agl_m, aerial_agl_m : array (...)
        Both antennas above ground. [m]
    coastal_land_is_sea : bool
        True counts coastal land as sea, as the published examples do; it makes sea of lowlands.

    Returns
    -------
    PathInputs
        Heights, angles and lengths, (...).

    Raises
    ------
    ProfileError
        A profile that is no path, or too coarse for a mean height.

    References
    ----------
    Rec. ITU-R P.1546-6, Annex 5, sections 3.1 (eqs. 6 and 7), 4.3a and 11; lengths by half intervals
    at the borders.
    """
    x, ground = checked_profile(distance_km, ground_amsl_m)
    x, ground = np.broadcast_arrays(x, ground)
    antenna = np.asarray(antenna_agl_m, dtype=float)
    aerial = np.asarray(aerial_agl_m, dtype=float)
    d = x[..., -1]
    source = antenna + ground[..., 0] - _mean_ground_m(x, ground)
    tx_angle = _horizon_angle_deg(x, ground, ground[..., 0] + antenna, 15.0)
    rx_angle = _horizon_angle_deg(d[..., None] - x, ground, ground[..., -1] + aerial, 16.0)
    sea = sea_length_km(x, zone, (SEA, COASTAL_LAND) if coastal_land_is_sea else (SEA,))
    return PathInputs(
        path_length_km=d,
        land_km=np.maximum(d - sea, 0.0),  # rounding leaves a hair below 0
        sea_km=sea,
        tx_ground_amsl_m=ground[..., 0],
        rx_ground_amsl_m=ground[..., -1],
        h1_source_height_m=source,
        tx_clearance_angle_deg=tx_angle,
        rx_clearance_angle_deg=rx_angle,
    )


def sea_length_km(distance_km: ArrayLike, zone: ArrayLike, counted: tuple[int, ...]) -> FloatArray:
    """Length (...) [km] in the counted zones of a profile (..., n); a border lies half way between points."""
    steps = np.diff(np.asarray(distance_km, dtype=float), axis=-1)
    inside = np.isin(np.asarray(zone), counted)
    halves = (inside[..., :-1].astype(float) + inside[..., 1:]) / 2
    length: FloatArray = (steps * halves).sum(axis=-1)
    return length


def _mean_ground_m(x: FloatArray, ground: FloatArray) -> FloatArray:
    """Mean ground 3 to 15 km from the transmitter, or 0.2 d to d on paths below 15 km.

    Between the first and the last point inside; the ground at the limits is not interpolated, as in
    the published examples. On a coarse profile this choice matters by metres.
    """
    d = x[..., -1:]
    long = d >= 15
    inside = (x >= np.where(long, 3.0, 0.2 * d)) & (x <= np.where(long, 15.0, d))
    both = inside[..., :-1] & inside[..., 1:]
    steps = np.where(both, np.diff(x, axis=-1), 0.0)
    span = steps.sum(axis=-1)
    if (span <= 0).any():
        raise ProfileError("profile is too coarse for a mean height: give 2 points 3 to 15 km from the transmitter")
    area = (steps * (ground[..., :-1] + ground[..., 1:])).sum(axis=-1) / 2
    mean: FloatArray = area / span
    return mean


def _horizon_angle_deg(away_km: FloatArray, ground: FloatArray, eye_amsl_m: FloatArray, reach_km: float) -> FloatArray:
    """Highest elevation of the ground within reach of an antenna, no Earth curvature."""
    seen = (away_km > 0) & (away_km <= reach_km)
    slope = (ground - eye_amsl_m[..., None]) / np.where(seen, 1000 * away_km, 1.0)
    highest: FloatArray = np.degrees(np.arctan(np.where(seen, slope, -np.inf).max(axis=-1)))
    return highest
