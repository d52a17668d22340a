"""One profile -> what every frequency needs of it: inputs of P.1546, clearance, horizon, diffraction.

This is the reference form: plain numpy over one profile or a batch of equal length.
"""

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.constants import EARTH_RADIUS_KM
from propagation.diffraction import (
    DeltaBullington,
    bullington_edge,
    checked_profile,
    delta_bullington_of_edges,
    smooth_earth,
)
from propagation.p1546.path import path_inputs
from propagation.units import wavelength_m

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class PathDigest:
    """One path without its profile, or a batch of them: every field has the batch's shape (...)."""

    path_length_km: FloatArray
    land_km: FloatArray
    sea_km: FloatArray  # water only, not coastal land
    tx_ground_amsl_m: FloatArray
    rx_ground_amsl_m: FloatArray
    h1_source_height_m: FloatArray  # P.1546: antenna over the mean ground towards the roof
    tx_clearance_angle_deg: FloatArray  # P.1546: horizon within 15 km of the mast
    rx_clearance_angle_deg: FloatArray  # P.1546: horizon within 16 km of the roof
    effective_earth_radius_km: FloatArray  # at which the lines below are straight
    line_of_sight: NDArray[np.bool_]
    clearance: FloatArray  # at the worst point, in m per root km of d1 d2 / d
    worst_point_km: FloatArray  # from the transmitter
    obstacle_into_line_m: FloatArray  # surface and bulge above the ray there; negative: clear
    tx_over_smooth_earth_m: FloatArray
    rx_over_smooth_earth_m: FloatArray
    smooth_horizon_km: FloatArray  # range at which the smooth Earth hides the antennas from each other
    beyond_horizon: NDArray[np.bool_]
    actual_edge: FloatArray  # `diffraction.bullington_edge` over the surface
    smooth_edge: FloatArray  # over the smooth Earth
    angular_distance_mrad: FloatArray  # between both horizon rays, P.1812 eq. (84)
    actual_edge_true_earth: FloatArray  # the same three at k = 1, rays not bent at all
    smooth_edge_true_earth: FloatArray
    angular_distance_true_earth_mrad: FloatArray

    def clearance_ratio(self, frequency_mhz: ArrayLike) -> FloatArray:
        """Clearance at the worst point in first Fresnel radii; broadcasts with the batch.

        The worst point is the same at every frequency (Rec. ITU-R P.526-16, section 2.1, eq. 2).
        """
        return self.clearance / np.sqrt(1e3 * wavelength_m(frequency_mhz))

    def diffraction(self, frequency_mhz: ArrayLike, polarisation: ArrayLike) -> DeltaBullington:
        """Delta-Bullington loss at the effective Earth radius; broadcasts with the batch."""
        return delta_bullington_of_edges(
            self.actual_edge,
            self.smooth_edge,
            self.path_length_km,
            self.tx_over_smooth_earth_m,
            self.rx_over_smooth_earth_m,
            frequency_mhz,
            self.effective_earth_radius_km,
            self.sea_km / self.path_length_km,
            polarisation,
        )

    def diffraction_true_earth(self, frequency_mhz: ArrayLike, polarisation: ArrayLike) -> DeltaBullington:
        """Delta-Bullington loss at k = 1; broadcasts with the batch."""
        return delta_bullington_of_edges(
            self.actual_edge_true_earth,
            self.smooth_edge_true_earth,
            self.path_length_km,
            self.tx_over_smooth_earth_m,
            self.rx_over_smooth_earth_m,
            frequency_mhz,
            EARTH_RADIUS_KM,
            self.sea_km / self.path_length_km,
            polarisation,
        )


def path_digest(
    distance_km: ArrayLike,
    ground_amsl_m: ArrayLike,
    zone: ArrayLike,
    antenna_agl_m: ArrayLike,
    aerial_agl_m: ArrayLike,
    effective_earth_radius_km: ArrayLike,
    surface_amsl_m: ArrayLike | None = None,
) -> PathDigest:
    """Digest a profile.

    Parameters
    ----------
    distance_km, ground_amsl_m, zone : array (..., n)
        Profile from the transmitter, n >= 3; bare ground; zone 1 sea, 3 coastal land, 4 inland. [km], [m], [-]
    antenna_agl_m, aerial_agl_m : array (...)
        Antenna on the mast and aerial on the roof, above ground. [m]
    effective_earth_radius_km : array (...)
        At the median refractivity. [km]
    surface_amsl_m : array (..., n), optional
        What a ray meets between the ends, cover included: it decides sight, clearance and diffraction, while
        heights, angles and the smooth Earth are those of the bare ground. Without it the ground is bare. [m]

    Returns
    -------
    PathDigest
        Everything of shape (...).

    Raises
    ------
    ProfileError
        A profile that is no path: unordered, too short or coarse, or with missing ground.

    References
    ----------
    Rec. ITU-R P.1546-6, Annex 5, sections 3.1, 4.3a and 11; Rec. ITU-R P.1812-7, section 4.3 and
    Attachment 1; Rec. ITU-R P.526-16, sections 2.1 and 4.5.
    """
    x, ground = checked_profile(distance_km, ground_amsl_m)
    surface = ground if surface_amsl_m is None else checked_profile(x, surface_amsl_m)[1]
    radius = np.asarray(effective_earth_radius_km, dtype=float)
    inputs = path_inputs(x, ground, zone, antenna_agl_m, aerial_agl_m, coastal_land_is_sea=False)
    tx_amsl = inputs.tx_ground_amsl_m + np.asarray(antenna_agl_m, dtype=float)
    rx_amsl = inputs.rx_ground_amsl_m + np.asarray(aerial_agl_m, dtype=float)
    d = inputs.path_length_km
    clearance, point_km, into_line = _worst_point(x, surface, tx_amsl, rx_amsl, radius)

    smooth = smooth_earth(x, ground, tx_amsl, rx_amsl)
    tx_over, rx_over = tx_amsl - smooth.tx_amsl_m, rx_amsl - smooth.rx_amsl_m
    horizon = np.sqrt(2 * radius) * (np.sqrt(0.001 * tx_over) + np.sqrt(0.001 * rx_over))  # P.1812 eq. (22)
    flat = np.zeros_like(x)
    return PathDigest(
        path_length_km=d,
        land_km=inputs.land_km,
        sea_km=inputs.sea_km,
        tx_ground_amsl_m=inputs.tx_ground_amsl_m,
        rx_ground_amsl_m=inputs.rx_ground_amsl_m,
        h1_source_height_m=inputs.h1_source_height_m,
        tx_clearance_angle_deg=inputs.tx_clearance_angle_deg,
        rx_clearance_angle_deg=inputs.rx_clearance_angle_deg,
        effective_earth_radius_km=radius,
        line_of_sight=clearance >= 0,
        clearance=clearance,
        worst_point_km=point_km,
        obstacle_into_line_m=into_line,
        tx_over_smooth_earth_m=tx_over,
        rx_over_smooth_earth_m=rx_over,
        smooth_horizon_km=horizon,
        beyond_horizon=d > horizon,
        actual_edge=bullington_edge(x, surface, tx_amsl, rx_amsl, radius),
        smooth_edge=bullington_edge(x, flat, tx_over, rx_over, radius),
        angular_distance_mrad=_angular_distance_mrad(x, ground, tx_amsl, rx_amsl, radius),
        actual_edge_true_earth=bullington_edge(x, surface, tx_amsl, rx_amsl, EARTH_RADIUS_KM),
        smooth_edge_true_earth=bullington_edge(x, flat, tx_over, rx_over, EARTH_RADIUS_KM),
        angular_distance_true_earth_mrad=_angular_distance_mrad(
            x, ground, tx_amsl, rx_amsl, np.asarray(EARTH_RADIUS_KM)
        ),
    )


def stacked_digests(digests: Sequence[PathDigest]) -> PathDigest:
    """Many digests as one batch: a new last axis runs over them; a path may come more than once."""
    return PathDigest(
        *(
            np.stack(np.broadcast_arrays(*(getattr(digest, field.name) for digest in digests)), axis=-1)
            for field in fields(PathDigest)
        )
    )


def _worst_point(
    x: FloatArray, ground: FloatArray, tx_amsl: FloatArray, rx_amsl: FloatArray, radius: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Where the ground comes nearest to the ray in Fresnel radii: clearance, place, height into the line."""
    inner, to_rx = x[..., 1:-1], x[..., -1:] - x[..., 1:-1]
    d = x[..., -1:]
    ray = (tx_amsl[..., None] * to_rx + rx_amsl[..., None] * inner) / d
    above = ground[..., 1:-1] + 500 / radius[..., None] * (inner * to_rx) - ray
    normalised = -above / np.sqrt(inner * to_rx / d)
    worst = normalised.argmin(axis=-1)[..., None]

    def at_worst(values: FloatArray) -> FloatArray:
        picked: FloatArray = np.take_along_axis(np.broadcast_to(values, normalised.shape), worst, axis=-1)
        return picked[..., 0]

    return at_worst(normalised), at_worst(inner), at_worst(above)


def _angular_distance_mrad(
    x: FloatArray, ground: FloatArray, tx_amsl: FloatArray, rx_amsl: FloatArray, radius: FloatArray
) -> FloatArray:
    """Angle between both horizon rays (Rec. ITU-R P.1812-7, Attachment 1, eqs. 77 to 84); 0 in sight."""
    d, inner = x[..., -1], x[..., 1:-1]
    to_rx = d[..., None] - inner
    double = 2 * radius[..., None]
    from_tx = np.arctan((ground[..., 1:-1] - tx_amsl[..., None]) / (1000 * inner) - inner / double).max(axis=-1)
    from_rx = np.arctan((ground[..., 1:-1] - rx_amsl[..., None]) / (1000 * to_rx) - to_rx / double).max(axis=-1)
    direct = np.arctan((rx_amsl - tx_amsl) / (1000 * d) - d / (2 * radius))
    back = np.arctan((tx_amsl - rx_amsl) / (1000 * d) - d / (2 * radius))
    hidden = from_tx > direct
    angle = d / radius + np.where(hidden, from_tx + from_rx, direct + back)
    return np.asarray(1000 * angle)
