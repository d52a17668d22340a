"""Distance, bearing and points on the WGS 84 ellipsoid.

pyproj solves the geodesic (C. F. F. Karney, "Algorithms for geodesics", J. Geodesy 87, 2013,
nanometre accuracy); here are only our units and order: latitude before longitude, kilometres,
bearings in degrees true from 0 to 360. Longitudes come back from -180 up to 180.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray
from pyproj import Geod

FloatArray = NDArray[np.float64]

_WGS84 = Geod(ellps="WGS84")


def distance_and_bearing(
    lat1: ArrayLike, lon1: ArrayLike, lat2: ArrayLike, lon2: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Length of the geodesic [km] and its bearing at the first point [deg, 0 to 360].

    Inputs in degrees broadcast; both results have the common shape. NaN in, NaN out.
    Between two equal points the bearing is without meaning and given as 0.
    """
    a, b, c, d = _broadcast(lat1, lon1, lat2, lon2)
    azimuth, _, metres = _WGS84.inv(b.ravel(), a.ravel(), d.ravel(), c.ravel())
    metres = np.asarray(metres, dtype=float)
    bearing = np.where(metres == 0, 0.0, np.asarray(azimuth, dtype=float) % 360.0)
    return (metres / 1e3).reshape(a.shape), bearing.reshape(a.shape)


def destination(
    lat: ArrayLike, lon: ArrayLike, bearing_deg: ArrayLike, distance_km: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Latitude and longitude [deg] reached from a point by a bearing and a distance.

    Inputs broadcast; both results have the common shape. NaN in, NaN out.
    """
    a, b, bearing, distance = _broadcast(lat, lon, bearing_deg, distance_km)
    lon2, lat2, _ = _WGS84.fwd(b.ravel(), a.ravel(), bearing.ravel(), 1e3 * distance.ravel())
    return np.asarray(lat2, dtype=float).reshape(a.shape), np.asarray(lon2, dtype=float).reshape(a.shape)


def points_along(
    lat1: float, lon1: float, lat2: float, lon2: float, distance_km: ArrayLike
) -> tuple[FloatArray, FloatArray]:
    """Latitude and longitude [deg] at distances from the first point on the geodesic to the second.

    `distance_km` (n,) may be in any order; the results are (n,). Distance 0 gives the first point
    and the full length the second exactly as they came in, so that both ends of a path stand on
    the antennas.
    """
    distance = np.atleast_1d(np.asarray(distance_km, dtype=float))
    length, bearing = distance_and_bearing(lat1, lon1, lat2, lon2)
    lat, lon = destination(lat1, lon1, bearing, distance)
    for at_end, end_lat, end_lon in ((distance == 0, lat1, lon1), (distance == length, lat2, lon2)):
        lat[at_end], lon[at_end] = end_lat, end_lon
    return lat, lon


def rays(lat: float, lon: float, bearing_deg: ArrayLike, distance_km: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Latitudes and longitudes (m, n) [deg] at n distances from one point along m bearings.

    Interpolated by a polynomial of degree 6 through exact points of each ray, many times faster than
    `destination` and within 1 cm of it to 300 km, from 80 S to 80 N; nearer to a pole it is `destination`.
    """
    bearing, distance = np.asarray(bearing_deg, dtype=float), np.asarray(distance_km, dtype=float)
    if abs(lat) > 80:
        return destination(lat, lon, bearing[:, None], distance)
    furthest = max(float(distance.max()), 1e-9)
    knots = np.cos(np.pi * np.arange(7) / 6)
    through = np.linalg.inv(np.polynomial.chebyshev.chebvander(knots, 6))
    weights = (np.polynomial.chebyshev.chebvander(2 * distance / furthest - 1, 6) @ through).T
    knot_lat, knot_lon = destination(lat, lon, bearing[:, None], furthest * (knots + 1) / 2)
    knot_lon = lon + (knot_lon - lon + 180.0) % 360.0 - 180.0
    ray_lat, ray_lon = knot_lat @ weights, knot_lon @ weights
    if np.abs(knot_lon).max() > 179.9:
        ray_lon = (ray_lon + 180.0) % 360.0 - 180.0
    return ray_lat, ray_lon


def _broadcast(*values: ArrayLike) -> list[FloatArray]:
    return list(np.broadcast_arrays(*(np.asarray(value, dtype=float) for value in values)))
