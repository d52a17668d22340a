"""The horizon all round, as seen from an aerial."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from terrain.blocks import COARSE
from terrain.errors import PathError
from terrain.geodesy import rays
from terrain.mosaic import Ground

FloatArray = NDArray[np.float64]

# Nearer ground is the roof's own: what stands there is entered as an obstacle.
NEAREST_KM = 0.05
FARTHEST_KM = 300.0
# Steps along a bearing, as a share of the cells that stand for the ground there.
_STEP_PER_CELL = 0.7
_SPACING_WITHOUT_RASTER_M = 90.0


@dataclass(frozen=True, slots=True)
class Skyline:
    """Horizon at bearings all round, from north clockwise. All arrays (n,)."""

    bearing_deg: FloatArray  # true, 0 to below 360
    angle_deg: FloatArray  # of the horizon above the aerial's horizontal; NaN where no ground is known
    distance_km: FloatArray  # to where the horizon stands; NaN likewise
    missing_share: FloatArray  # of each bearing's points, without ground: 0 to 1

    @property
    def angle_mrad(self) -> FloatArray:
        """The angle in milliradians, as Rec. ITU-R P.1812 counts it."""
        return np.deg2rad(self.angle_deg) * 1e3


def skyline(
    ground: Ground,
    lat: float,
    lon: float,
    aerial_amsl_m: float,
    effective_earth_radius_km: float,
    reach_km: float = 60.0,
    step_deg: float = 0.5,
) -> Skyline:
    """Horizon angle and distance for every bearing from an aerial over the real ground.

    Along each bearing the ground is sampled at its raster's spacing as far as one bearing step is
    narrower than 4 samples; from there on the highest ground in cells of 4 × 4 samples stands for
    all of it (then of 16 × 16, 64 × 64), so that no far hill falls between two points or two bearings.
    The far skyline is thus that of a wedge as wide as a bearing step, not below that of its middle line.

    Parameters
    ----------
    ground : the rasters.
    lat, lon : the aerial. [deg]
    aerial_amsl_m : its height above sea level. [m]
    effective_earth_radius_km : bends the ground away as the air bends rays. [km]
    reach_km : how far to look: 0.1 to 300. [km]
    step_deg : between bearings, a whole part of 360. [deg]

    Raises
    ------
    PathError
        Position, height, radius, reach or step out of range.
    RasterError, CacheError
        As `Ground.elevation_m`.

    References
    ----------
    Angles as in Rec. ITU-R P.1812-7, Annex 1, eq. (80) to (82).
    """
    _check(lat, lon, aerial_amsl_m, effective_earth_radius_km, reach_km, step_deg)
    bearing_deg = np.asarray(np.arange(round(360 / step_deg)) * step_deg, dtype=np.float64)
    spacing_m = ground.spacing_m(lat, lon)
    if math.isnan(spacing_m):
        spacing_m = _SPACING_WITHOUT_RASTER_M
    tangent = np.full(bearing_deg.size, -np.inf)
    at_km = np.full(bearing_deg.size, np.nan)
    missing, points = np.zeros(bearing_deg.size), 0
    for cell_m, distance_km in _rings(spacing_m, reach_km, math.radians(step_deg)):
        ray_lat, ray_lon = rays(lat, lon, bearing_deg, distance_km)
        if cell_m == spacing_m:
            height_m = ground.elevation_m(ray_lat, ray_lon)
        else:
            height_m = ground.highest_elevation_m(ray_lat, ray_lon, cell_m)
        missing += np.isnan(height_m).sum(axis=1)
        points += distance_km.size
        ring_tangent, ring_km = horizon(distance_km, height_m, aerial_amsl_m, effective_earth_radius_km)
        higher = ring_tangent > tangent
        tangent = np.where(higher, ring_tangent, tangent)
        at_km = np.where(higher, ring_km, at_km)
    return Skyline(
        bearing_deg=bearing_deg,
        angle_deg=np.where(np.isfinite(tangent), np.rad2deg(np.arctan(tangent)), np.nan),
        distance_km=at_km,
        missing_share=missing / points,
    )


def horizon(
    distance_km: ArrayLike, ground_amsl_m: ArrayLike, eye_amsl_m: float, effective_earth_radius_km: float
) -> tuple[FloatArray, FloatArray]:
    """Tangent of the highest angle to any point of profiles, and the distance of that point [km].

    `distance_km` (n,) above 0 from the eye, `ground_amsl_m` (..., n), results (...). Missing ground
    (NaN) does not count; without any the tangent is -inf and the distance NaN.

    References
    ----------
    Rec. ITU-R P.1812-7, Annex 1, eq. (80) to (82): theta = 1000 arctan of this, in mrad.
    """
    d = np.asarray(distance_km, dtype=float)
    tangent = (np.asarray(ground_amsl_m, dtype=float) - eye_amsl_m) / (1e3 * d) - d / (2 * effective_earth_radius_km)
    np.copyto(tangent, -np.inf, where=np.isnan(tangent))
    at = tangent.argmax(axis=-1)
    highest = np.take_along_axis(tangent, at[..., None], axis=-1)[..., 0]
    return highest, np.where(np.isfinite(highest), d[at], np.nan)


def _rings(spacing_m: float, reach_km: float, step_rad: float) -> list[tuple[float, FloatArray]]:
    """Cell size [m] and distances [km] of the points of each ring about the aerial."""
    edges_km = [max(NEAREST_KM, spacing_m / 1e3)]
    edges_km += [max(edges_km[0], factor * spacing_m / 1e3 / step_rad) for factor in COARSE[1:]]
    rings = []
    for factor, start_km, end_km in zip(COARSE, edges_km, [*edges_km[1:], np.inf], strict=True):
        end_km = min(end_km, reach_km)
        if end_km > start_km or (factor == 1 and start_km < reach_km):
            cell_m = factor * spacing_m
            step_m = spacing_m if factor == 1 else _STEP_PER_CELL * cell_m
            points = math.ceil(1e3 * (end_km - start_km) / step_m) + 1
            rings.append((cell_m, np.linspace(start_km, end_km, points)))
    return rings


def _check(lat: float, lon: float, aerial_m: float, radius_km: float, reach_km: float, step_deg: float) -> None:
    limits = (
        ("latitude", lat, -90.0, 90.0, "degrees"),
        ("longitude", lon, -180.0, 180.0, "degrees"),
        ("aerial height above sea level", aerial_m, -500.0, 10_000.0, "m"),
        ("effective Earth radius", radius_km, 1_000.0, 1e6, "km"),
        ("reach", reach_km, 0.1, FARTHEST_KM, "km"),
        ("bearing step", step_deg, 0.1, 10.0, "degrees"),
    )
    for name, value, lowest, highest, unit in limits:
        if not lowest <= value <= highest:
            raise PathError(f"{name} {value:g} is not possible: use {lowest:g} to {highest:g} {unit}")
    if abs(360 / step_deg - round(360 / step_deg)) > 1e-9:
        raise PathError(f"bearing step {step_deg:g} does not divide the circle: use for example 0.5 degrees")
