"""What the ground and the latitude do to the air: zones, centre of the path, incidence of ducting.

Rec. ITU-R P.1812-7, sections 3.5 to 3.7; equation numbers are the Recommendation's.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.constants import EARTH_RADIUS_KM
from propagation.errors import ProfileError

FloatArray = NDArray[np.float64]

SEA, COASTAL_LAND, INLAND = 1, 3, 4  # zone codes


def zone_lengths(distance_km: FloatArray, zone: ArrayLike) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Sea share of a path and its longest runs over land.

    A run counts from its first to its last point and half of the interval to the next zone.

    Parameters
    ----------
    distance_km : array (..., n)
        Rising from 0. [km]
    zone : array (..., n)
        1 sea, 3 coastal land, 4 inland.

    Returns
    -------
    array (...) each
        Share over sea [-]; longest run over any land [km]; longest run inland [km].

    Raises
    ------
    ProfileError
        Another zone code.

    References
    ----------
    Rec. ITU-R P.1812-7, sections 3.2.1 and 3.6.
    """
    zones = np.asarray(zone)
    unknown = ~np.isin(zones, (SEA, COASTAL_LAND, INLAND))
    if unknown.any():
        raise ProfileError(
            f"zone {zones[unknown].flat[0]} is not known: use 1 for sea, 3 for coastal land, 4 for inland"
        )
    x, zones = np.broadcast_arrays(distance_km, zones)
    half = np.diff(x, axis=-1) / 2
    share = np.zeros(x.shape)  # stretch of the path that each point stands for
    share[..., :-1] += half
    share[..., 1:] += half
    over_sea = np.where(zones == SEA, share, 0.0).sum(axis=-1) / x[..., -1]
    return np.minimum(over_sea, 1.0), _longest_run(share, zones != SEA), _longest_run(share, zones == INLAND)


def _longest_run(share: FloatArray, inside: NDArray[np.bool_]) -> FloatArray:
    passed = np.cumsum(share, axis=-1)
    passed_outside = np.maximum.accumulate(np.where(inside, 0.0, passed), axis=-1)
    longest: FloatArray = np.where(inside, passed - passed_outside, 0.0).max(axis=-1)
    return longest


def path_centre_latitude_deg(
    tx_latitude_deg: ArrayLike,
    tx_longitude_deg: ArrayLike,
    rx_latitude_deg: ArrayLike,
    rx_longitude_deg: ArrayLike,
    path_length_km: ArrayLike,
) -> FloatArray:
    """Latitude half the path length from the transmitter along the great circle to the receiver.

    Elementwise; NaN in, NaN out. Degrees and km in, degrees out. On a sphere of 6371 km, as the
    published examples do: the path length comes from the profile and need not fit the positions.
    """
    lat1, lon1, lat2, lon2 = (
        np.radians(np.asarray(angle, dtype=float))
        for angle in (tx_latitude_deg, tx_longitude_deg, rx_latitude_deg, rx_longitude_deg)
    )
    east = np.sin(lon2 - lon1) * np.cos(lat2)
    north = np.cos(lat1) * np.sin(lat2) - np.sin(lat1) * np.cos(lat2) * np.cos(lon2 - lon1)
    bearing = np.arctan2(east, north)
    half_way = np.asarray(path_length_km, dtype=float) / (2 * EARTH_RADIUS_KM)
    sine = np.sin(lat1) * np.cos(half_way) + np.cos(lat1) * np.sin(half_way) * np.cos(bearing)
    return np.asarray(np.degrees(np.arcsin(np.clip(sine, -1, 1))))


def inland_weight(longest_inland_km: ArrayLike) -> FloatArray:
    """Weight of the longest inland run, tau of eq. (3): 0 without one, towards 1 beyond 100 km."""
    return np.asarray(-np.expm1(-4.12e-4 * np.asarray(longest_inland_km, dtype=float) ** 2.41))


def beta0_percent(
    centre_latitude_deg: ArrayLike, longest_land_km: ArrayLike, longest_inland_km: ArrayLike
) -> FloatArray:
    """Share of the time with a lapse of refractivity above 100 N/km in the lowest 100 m.

    Elementwise; NaN in, NaN out. Latitude of the path's centre in degrees, runs over land in km.

    References
    ----------
    Rec. ITU-R P.1812-7, section 3.6, eqs. (2)-(5).
    """
    latitude = np.abs(np.asarray(centre_latitude_deg, dtype=float))
    tau = inland_weight(longest_inland_km)
    land = 10 ** (-np.asarray(longest_land_km, dtype=float) / (16 - 6.6 * tau))
    mu1 = np.minimum(1.0, (land + 10 ** (-5 * (0.496 + 0.354 * tau))) ** 0.2)  # eq. (2)
    polar = latitude > 70
    below = np.minimum(latitude, 70)  # the polar value of eq. (5), 4.17, is 10^(1.67 - 0.015 * 70)
    mu4 = np.where(polar, mu1**0.3, mu1 ** (-0.935 + 0.0176 * below))  # eq. (4)
    beta: FloatArray = np.where(polar, 4.17, 10 ** (-0.015 * below + 1.67)) * mu1 * mu4  # eq. (5)
    return beta
