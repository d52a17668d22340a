"""The ground between each mast and a roof, digested once for all its emissions."""

from __future__ import annotations

import pathlib
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.near_roof import Edge, PathGround, ground_for_methods
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
from terrain.water import SEA

FloatArray = NDArray[np.float64]

NEAREST_KM = 0.05  # a mast nearer than this stands on the roof's own plot: no method here holds
NO_COAST_KM = 500.0
NO_EDGE = -np.inf


@dataclass(frozen=True, slots=True)
class PathKey:
    """Emissions of one mast from one height share a path."""

    transmitter: Transmitter
    antenna_agl_m: float


@dataclass(frozen=True, slots=True)
class Path:
    """One path without any frequency."""

    profile: Profile
    ground: PathGround
    antenna_agl_m: float
    digest: PathDigest
    terms: PathTerms | None  # for P.1812; None: outside its range
    p1812_refusal: str  # why, else empty
    delta_n_per_km: float
    n0: float
    surroundings_m: float  # P.1546's cover height at the aerial, above the roof's ground; 0: none
    entered_edge: float  # nu times the root of the wavelength of the worst obstacle entered [m^0.5]; -inf: none


def paths_to_roof(
    roof: Roof,
    keys: Sequence[PathKey],
    ground: Ground,
    assumptions: Assumptions,
    refractivity_maps: pathlib.Path | None = None,
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
        paths[key] = (
            profile
            if isinstance(profile, str)
            else path_over(profile, key.antenna_agl_m, roof, assumptions, refractivity_maps)
        )
    return paths


def path_over(
    profile: Profile,
    antenna_agl_m: float,
    roof: Roof,
    assumptions: Assumptions,
    refractivity_maps: pathlib.Path | None = None,
) -> Path | str:
    """Digest one profile for one antenna height, or say why neither method can."""
    middle = len(profile.distance_km) // 2
    delta_n_per_km, n0 = (
        one.item()
        for one in refractivity(profile.latitude_deg[middle], profile.longitude_deg[middle], refractivity_maps)
    )
    line = ground_for_methods(profile, roof, assumptions)
    try:
        digest = path_digest(
            line.distance_km,
            line.bare_amsl_m,
            line.zone,
            antenna_agl_m,
            roof.aerial_agl_m,
            effective_earth_radius_km(delta_n_per_km),
            line.surface_amsl_m,
        )
    except (ProfileError, RangeError) as error:
        return f"no method holds on this path: {error}"
    terms, refusal = None, ""
    try:
        terms = _p1812_terms(profile, line, antenna_agl_m, roof, delta_n_per_km)
    except RangeError as error:
        refusal = str(error)  # P.1546 answers alone
    aerial_amsl_m = float(digest.rx_ground_amsl_m) + roof.aerial_agl_m
    worst = max(line.edges, key=lambda edge: (edge.top_amsl_m - aerial_amsl_m) / edge.from_roof_km, default=None)
    return Path(
        profile=profile,
        ground=line,
        antenna_agl_m=antenna_agl_m,
        digest=digest,
        terms=terms,
        p1812_refusal=refusal,
        delta_n_per_km=delta_n_per_km,
        n0=n0,
        surroundings_m=float(worst.top_amsl_m - digest.rx_ground_amsl_m)
        if worst is not None and worst.what == "surroundings"
        else 0.0,
        entered_edge=max(_edge(one, digest, antenna_agl_m, roof.aerial_agl_m) for one in line.entered)
        if worst is not None and worst.what == "obstacle"
        else NO_EDGE,
    )


def _profile(roof: Roof, mast: Transmitter, ground: Ground) -> Profile | str:
    profile = sample_profile(ground, mast.latitude_deg, mast.longitude_deg, roof.latitude_deg, roof.longitude_deg)
    if profile.distance_km[-1] < NEAREST_KM:
        return f"the mast stands {profile.distance_km[-1] * 1e3:.0f} m away: too near for any prediction"
    if profile.missing_share > 0:
        return f"{max(profile.missing_share, 0.01):.0%} of the path has no elevation: add the missing tiles"
    return profile


def _p1812_terms(
    profile: Profile, line: PathGround, antenna_agl_m: float, roof: Roof, delta_n_per_km: float
) -> PathTerms:
    """Bare ground where the Recommendation wants terrain; with the cover that stands on it, it is the surface."""
    return p1812.path_terms(
        distance_km=line.distance_km,
        terrain_amsl_m=line.bare_amsl_m,
        clutter_height_m=line.surface_amsl_m - line.bare_amsl_m,
        zone=line.zone,
        tx_height_agl_m=antenna_agl_m,
        rx_height_agl_m=roof.aerial_agl_m,
        tx_latitude_deg=profile.latitude_deg[0],
        tx_longitude_deg=profile.longitude_deg[0],
        rx_latitude_deg=profile.latitude_deg[-1],
        rx_longitude_deg=profile.longitude_deg[-1],
        delta_n_per_km=delta_n_per_km,
        tx_distance_to_coast_km=to_coast_km(line.distance_km, line.zone),
        rx_distance_to_coast_km=to_coast_km(line.distance_km[-1] - line.distance_km[::-1], line.zone[::-1]),
    )


def to_coast_km(away_km: FloatArray, zone: NDArray[np.int8]) -> float:
    """Distance over land from the first point to the sea; 0 at sea, 500 where the path meets none."""
    at_sea = zone == SEA
    return float(away_km[int(np.argmax(at_sea))]) if at_sea.any() else NO_COAST_KM


def _edge(edge: Edge, digest: PathDigest, antenna_agl_m: float, aerial_agl_m: float) -> float:
    """How far an obstacle stands into what arrives at the aerial: nu times the root of the wavelength. [m^0.5]

    P.1546 has no profile in which it could stand. The ray comes from the mast, or from the horizon of the bare
    ground where that is higher, which the Recommendation's clearance angle pays for (Annex 5, section 11). The
    knife edge is that of Rec. ITU-R P.526-16, section 4.1, eq. (26).
    """
    d, away = float(digest.path_length_km), edge.from_roof_km
    aerial_amsl_m = float(digest.rx_ground_amsl_m) + aerial_agl_m
    antenna_amsl_m = float(digest.tx_ground_amsl_m) + antenna_agl_m
    to_mast = (antenna_amsl_m - aerial_amsl_m) / d - 500 * d / float(digest.effective_earth_radius_km)  # m per km
    to_horizon = 1e3 * float(np.tan(np.radians(digest.rx_clearance_angle_deg)))
    into_ray_m = edge.top_amsl_m - aerial_amsl_m - max(to_mast, to_horizon) * away
    return into_ray_m * float(np.sqrt(0.002 * d / (away * (d - away))))
