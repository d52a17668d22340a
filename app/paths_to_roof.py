"""The ground between each mast and a roof, digested once for all its emissions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.roof import Roof
from app.transmitters.model import Transmitter
from propagation import p1812
from propagation.digest import PathDigest, path_digest
from propagation.errors import ProfileError, RangeError
from propagation.p1812 import PathTerms
from propagation.refraction import effective_earth_radius_km
from propagation.refractivity import refractivity
from terrain.mosaic import Ground
from terrain.profile import Profile, sample_profile

NEAREST_KM = 0.05  # a mast nearer than this stands on the roof's own plot: no method here holds
SEA = 1
NO_COAST_KM = 500.0
FLATTENED_KM = 0.05  # no cover and no surface counts this near to the aerial: one local obstacle does
LOCAL_OBSTACLE_KM = 0.027  # where P.1546 places it


@dataclass(frozen=True, slots=True)
class PathKey:
    """Emissions of one mast from one height share a path."""

    transmitter: Transmitter
    antenna_agl_m: float


@dataclass(frozen=True, slots=True)
class Path:
    """One path without any frequency."""

    profile: Profile
    antenna_agl_m: float
    digest: PathDigest
    terms: PathTerms | None  # for P.1812; None: outside its range
    n0: float
    local_obstacle_m: float  # its height above the ground at the roof; 0: none


def paths_to_roof(
    roof: Roof, keys: Sequence[PathKey], ground: Ground, assumptions: Assumptions
) -> dict[PathKey, Path | str]:
    """Return the path of each key, or the reason why there is none."""
    profiles: dict[str, Profile | str] = {}
    paths: dict[PathKey, Path | str] = {}
    for key in keys:
        if key in paths:
            continue
        mast = key.transmitter
        if mast.id not in profiles:
            profiles[mast.id] = _profile(roof, mast, ground)
        profile = profiles[mast.id]
        paths[key] = profile if isinstance(profile, str) else path_over(profile, key.antenna_agl_m, roof, assumptions)
    return paths


def path_over(profile: Profile, antenna_agl_m: float, roof: Roof, assumptions: Assumptions) -> Path | str:
    """Digest one profile for one antenna height, or say why neither method can."""
    middle = len(profile.distance_km) // 2
    delta_n_per_km, n0 = (
        one.item() for one in refractivity(profile.latitude_deg[middle], profile.longitude_deg[middle])
    )
    near_roof = profile.distance_km[-1] - profile.distance_km <= FLATTENED_KM
    ground_amsl_m = np.where(near_roof, profile.ground_amsl_m[-1], profile.ground_amsl_m)
    obstacle_m = local_obstacle_m(roof, assumptions)
    try:
        digest = path_digest(
            profile.distance_km,
            ground_amsl_m,
            profile.zone,
            antenna_agl_m,
            roof.aerial_agl_m,
            effective_earth_radius_km(delta_n_per_km),
        )
    except (ProfileError, RangeError) as error:
        return f"no method holds on this path: {error}"
    try:
        terms = _p1812_terms(profile, ground_amsl_m, antenna_agl_m, roof, obstacle_m, delta_n_per_km)
    except RangeError:
        terms = None  # P.1546 answers alone
    return Path(profile, antenna_agl_m, digest, terms, n0, obstacle_m)


def local_obstacle_m(roof: Roof, assumptions: Assumptions) -> float:
    """Height of the one obstacle that stands for the surroundings, above the roof's ground; 0 if below the aerial."""
    if roof.surroundings == "open":
        return 0.0
    height_m = assumptions.value(f"cover_{roof.surroundings}_m")
    return height_m if height_m > roof.aerial_agl_m else 0.0


def _profile(roof: Roof, mast: Transmitter, ground: Ground) -> Profile | str:
    profile = sample_profile(ground, mast.latitude_deg, mast.longitude_deg, roof.latitude_deg, roof.longitude_deg)
    if profile.distance_km[-1] < NEAREST_KM:
        return f"the mast stands {profile.distance_km[-1] * 1e3:.0f} m away: too near for any prediction"
    if profile.missing_share > 0:
        return f"{max(profile.missing_share, 0.01):.0%} of the path has no elevation: add the missing tiles"
    return profile


def _p1812_terms(
    profile: Profile,
    ground_amsl_m: NDArray[np.float64],
    antenna_agl_m: float,
    roof: Roof,
    obstacle_m: float,
    delta_n_per_km: float,
) -> PathTerms:
    distance_km, zone = profile.distance_km, profile.zone
    cover_m = np.zeros_like(distance_km)
    at_km = distance_km[-1] - LOCAL_OBSTACLE_KM
    if obstacle_m > 0 and at_km > 0:
        place = int(np.searchsorted(distance_km, at_km))
        distance_km = np.insert(distance_km, place, at_km)
        ground_amsl_m = np.insert(ground_amsl_m, place, ground_amsl_m[-1])
        zone = np.insert(zone, place, zone[-1])
        cover_m = np.insert(cover_m, place, obstacle_m)
    return p1812.path_terms(
        distance_km=distance_km,
        terrain_amsl_m=ground_amsl_m,
        clutter_height_m=cover_m,
        zone=zone,
        tx_height_agl_m=antenna_agl_m,
        rx_height_agl_m=roof.aerial_agl_m,
        tx_latitude_deg=profile.latitude_deg[0],
        tx_longitude_deg=profile.longitude_deg[0],
        rx_latitude_deg=profile.latitude_deg[-1],
        rx_longitude_deg=profile.longitude_deg[-1],
        delta_n_per_km=delta_n_per_km,
        tx_distance_to_coast_km=_to_coast_km(distance_km, zone),
        rx_distance_to_coast_km=_to_coast_km(distance_km[-1] - distance_km[::-1], zone[::-1]),
    )


def _to_coast_km(away_km: NDArray[np.float64], zone: NDArray[np.int8]) -> float:
    """Distance over land from the first point to the sea; 0 at sea, 500 where the path meets none."""
    at_sea = zone == SEA
    return float(away_km[int(np.argmax(at_sea))]) if at_sea.any() else NO_COAST_KM
