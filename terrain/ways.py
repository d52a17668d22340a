"""Points along many geodesics of the WGS 84 ellipsoid, compiled: `geodesy.destination` for a million of them.

T. Vincenty, "Direct and inverse solutions of geodesics on the ellipsoid with application of nested equations", Survey
Review XXIII (176), 1975, direct solution; equation numbers are Vincenty's. Within 0.1 mm of Karney's.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from terrain.compiled import compiled

FloatArray = NDArray[np.float64]

_A_KM, _F = 6378.137, 1 / 298.257223563
_B_KM = _A_KM * (1 - _F)


@compiled
def points_on(
    latitude_deg: FloatArray,  # (p,)
    longitude_deg: FloatArray,
    bearing_deg: FloatArray,
    first: NDArray[np.int64],  # (p + 1,) into away_km
    away_km: FloatArray,  # (k,) of each point from its geodesic's start
) -> tuple[FloatArray, FloatArray]:
    """Latitudes and longitudes (k,) of points on geodesics (p,), longitudes from -180 up to 180. [deg]"""
    lat, lon = np.empty(away_km.size), np.empty(away_km.size)
    for p in range(latitude_deg.size):
        azimuth = math.radians(bearing_deg[p])
        sin_azimuth, cos_azimuth = math.sin(azimuth), math.cos(azimuth)
        tan_u = (1 - _F) * math.tan(math.radians(latitude_deg[p]))
        cos_u = 1 / math.sqrt(1 + tan_u**2)
        sin_u = tan_u * cos_u
        start = math.atan2(tan_u, cos_azimuth)  # eq. (1): sigma 1
        sin_alpha = cos_u * sin_azimuth  # eq. (2)
        cos2_alpha = 1 - sin_alpha**2
        u2 = cos2_alpha * (_A_KM**2 - _B_KM**2) / _B_KM**2
        a = 1 + u2 / 16384 * (4096 + u2 * (-768 + u2 * (320 - 175 * u2)))  # eq. (3)
        b = u2 / 1024 * (256 + u2 * (-128 + u2 * (74 - 47 * u2)))  # eq. (4)
        c = _F / 16 * cos2_alpha * (4 + _F * (4 - 3 * cos2_alpha))  # eq. (10)
        for k in range(first[p], first[p + 1]):
            straight = away_km[k] / (_B_KM * a)
            sigma = straight
            for _ in range(4):  # each gains more than two digits
                mean = math.cos(2 * start + sigma)  # eq. (5)
                sin, cos = math.sin(sigma), math.cos(sigma)
                curve = cos * (2 * mean**2 - 1) - b / 6 * mean * (4 * sin**2 - 3) * (4 * mean**2 - 3)
                sigma = straight + b * sin * (mean + b / 4 * curve)  # eqs. (6) and (7)
            mean, sin, cos = math.cos(2 * start + sigma), math.sin(sigma), math.cos(sigma)
            across = sin_u * sin - cos_u * cos * cos_azimuth
            lat[k] = math.degrees(
                math.atan2(
                    sin_u * cos + cos_u * sin * cos_azimuth, (1 - _F) * math.sqrt(sin_alpha**2 + across**2)
                )  # eq. (8)
            )
            sphere = math.atan2(sin * sin_azimuth, cos_u * cos - sin_u * sin * cos_azimuth)  # eq. (9)
            turned = sphere - (1 - c) * _F * sin_alpha * (
                sigma + c * sin * (mean + c * cos * (2 * mean**2 - 1))
            )  # eq. (11)
            east = longitude_deg[p] + math.degrees(turned)
            lon[k] = east - 360 if east >= 180 else east + 360 if east < -180 else east
    return lat, lon
