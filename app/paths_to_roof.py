"""The ground between each mast and a roof, digested once for all its emissions."""

from __future__ import annotations

import pathlib
from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.fast_paths import Line, fast_digests, is_ready
from app.kept_paths import KeptPaths
from app.near_roof import (
    Edge,
    edge_into_ray,
    edges_near_roof,
    flattened_surface_m,
    standing_towards,
    worst_first,
)
from app.roof import Roof
from app.transmitters.model import Transmitter
from propagation import p1812
from propagation.digest import PathDigest, path_digest
from propagation.errors import ProfileError, RangeError
from propagation.p1812 import PathTerms
from propagation.refraction import effective_earth_radius_km
from propagation.refractivity import refractivity
from terrain.geodesy import distance_and_bearing
from terrain.mosaic import Ground
from terrain.profile import Profile, sample_profile
from terrain.water import SEA

FloatArray = NDArray[np.float64]

NEAREST_KM = 0.05  # a mast nearer than this stands on the roof's own plot: no method here holds
NO_COAST_KM = 500.0


@dataclass(frozen=True, slots=True)
class PathKey:
    """Emissions of one mast from one height share a path."""

    transmitter: Transmitter
    antenna_agl_m: float


@dataclass(frozen=True, slots=True)
class Path:
    """One path without any frequency."""

    kinds: tuple[str, ...]  # of the rasters under it
    antenna_agl_m: float
    aerial_agl_m: float
    digest: PathDigest
    terms: PathTerms | None  # for P.1812; None: outside its range
    p1812_refusal: str  # why, else empty
    delta_n_per_km: float
    n0: float
    edges: tuple[Edge, ...]  # near the roof, worst first; no part of profile, digest and terms

    @property
    def p1546_surroundings_m(self) -> float:
        """Cover height at the aerial for P.1546, 0 for none: an obstacle entered that is worse takes its place."""
        return self.edges[0].height_m if self.edges and self.edges[0].what == "surroundings" else 0.0

    def clearance_ratio(self, frequency_mhz: float) -> float:
        """Clearance of the ray at its worst point, near edges included, in first Fresnel radii."""
        over_ground = float(self.digest.clearance_ratio(frequency_mhz))
        return min(over_ground, float(self.edges[0].clearance_ratio(frequency_mhz))) if self.edges else over_ground


@dataclass(frozen=True, slots=True)
class DrawnPath(Path):
    """A path with its profile."""

    profile: Profile
    surface_amsl_m: FloatArray  # (n,) what a ray meets, flattened near the roof; equal to the bare ground at both ends


def paths_to_roof(
    roof: Roof,
    keys: Sequence[PathKey],
    ground: Ground,
    assumptions: Assumptions,
    refractivity_maps: pathlib.Path | None = None,
) -> dict[PathKey, Path | str]:
    """Return the path of each key, or the reason why there is none.

    What was asked for before is kept; of the rest, the fast form answers what it can.
    """
    kept = KeptPaths.of(ground, roof, assumptions, refractivity_maps)
    paths: dict[PathKey, Path | str] = {key: path for key in keys if (path := kept.get(key)) is not None}
    missing = [key for key in dict.fromkeys(keys) if key not in paths]
    paths |= _fast_paths(roof, missing, ground, assumptions, refractivity_maps)
    slow = [key for key in missing if key not in paths]
    for key, path in drawn_paths_to_roof(roof, slow, ground, assumptions, refractivity_maps).items():
        paths[key] = path if isinstance(path, str) else without_profile(path)
    kept.keep({key: paths[key] for key in missing})
    return paths


def _fast_paths(
    roof: Roof,
    keys: Sequence[PathKey],
    ground: Ground,
    assumptions: Assumptions,
    refractivity_maps: pathlib.Path | None,
) -> dict[PathKey, Path | str]:
    """Return the paths that the compiled form holds, once it is ready."""
    if not keys or not is_ready(ground):
        return {}
    _, bearings = distance_and_bearing(
        roof.latitude_deg,
        roof.longitude_deg,
        np.array([key.transmitter.latitude_deg for key in keys]),
        np.array([key.transmitter.longitude_deg for key in keys]),
    )
    standing = [standing_towards(roof, bearing, assumptions) for bearing in bearings.tolist()]
    lines = [
        Line(
            key.transmitter.latitude_deg,
            key.transmitter.longitude_deg,
            key.antenna_agl_m,
            tuple(one.from_roof_km for one in near),
        )
        for key, near in zip(keys, standing, strict=True)
    ]
    return {
        keys[one.line]: Path(
            kinds=(one.kind,),
            antenna_agl_m=keys[one.line].antenna_agl_m,
            aerial_agl_m=roof.aerial_agl_m,
            digest=one.digest,
            terms=one.terms,
            p1812_refusal="",
            delta_n_per_km=one.delta_n_per_km,
            n0=one.n0,
            edges=worst_first(
                [
                    edge_into_ray(near, roof.aerial_agl_m, source_km, slope)
                    for near, (source_km, slope) in zip(standing[one.line], one.sources, strict=True)
                    if source_km > 0
                ]
            ),
        )
        for one in fast_digests(roof, lines, ground, refractivity_maps)
    }


def without_profile(path: DrawnPath) -> Path:
    """Return the path alone, which takes a fiftieth of the memory."""
    return Path(**{field.name: getattr(path, field.name) for field in fields(Path)})


def drawn_paths_to_roof(
    roof: Roof,
    keys: Sequence[PathKey],
    ground: Ground,
    assumptions: Assumptions,
    refractivity_maps: pathlib.Path | None = None,
) -> dict[PathKey, DrawnPath | str]:
    """Return the path of each key with its profile, or the reason why there is none."""
    profiles: dict[str, Profile | str] = {}
    paths: dict[PathKey, DrawnPath | str] = {}
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
) -> DrawnPath | str:
    """Digest one profile for one antenna height, or say why neither method can."""
    middle = len(profile.distance_km) // 2
    delta_n_per_km, n0 = (
        one.item()
        for one in refractivity(profile.latitude_deg[middle], profile.longitude_deg[middle], refractivity_maps)
    )
    radius_km = effective_earth_radius_km(delta_n_per_km)
    surface_amsl_m = flattened_surface_m(profile)
    try:
        digest = path_digest(
            profile.distance_km,
            profile.bare_amsl_m,
            profile.zone,
            antenna_agl_m,
            roof.aerial_agl_m,
            radius_km,
            surface_amsl_m,
        )
    except (ProfileError, RangeError) as error:
        return f"no method holds on this path: {error}"
    terms, refusal = None, ""
    try:
        terms = _p1812_terms(profile, surface_amsl_m, antenna_agl_m, roof, delta_n_per_km)
    except RangeError as error:
        refusal = str(error)  # P.1546 answers alone
    return DrawnPath(
        kinds=profile.kinds,
        profile=profile,
        surface_amsl_m=surface_amsl_m,
        antenna_agl_m=antenna_agl_m,
        aerial_agl_m=roof.aerial_agl_m,
        digest=digest,
        terms=terms,
        p1812_refusal=refusal,
        delta_n_per_km=delta_n_per_km,
        n0=n0,
        edges=edges_near_roof(profile, surface_amsl_m, antenna_agl_m, roof, assumptions, radius_km.item()),
    )


def _profile(roof: Roof, mast: Transmitter, ground: Ground) -> Profile | str:
    away_km, _ = distance_and_bearing(mast.latitude_deg, mast.longitude_deg, roof.latitude_deg, roof.longitude_deg)
    if away_km < NEAREST_KM:
        return f"the mast stands {1e3 * float(away_km):.0f} m away: too near for any prediction"
    profile = sample_profile(ground, mast.latitude_deg, mast.longitude_deg, roof.latitude_deg, roof.longitude_deg)
    if profile.missing_share > 0:
        return f"{max(profile.missing_share, 0.01):.0%} of the path has no elevation: add the missing tiles"
    return profile


def _p1812_terms(
    profile: Profile, surface_amsl_m: FloatArray, antenna_agl_m: float, roof: Roof, delta_n_per_km: float
) -> PathTerms:
    """Bare ground where the Recommendation wants terrain; with the cover that stands on it, it is the surface."""
    distance_km, zone = profile.distance_km, profile.zone
    return p1812.path_terms(
        distance_km=distance_km,
        terrain_amsl_m=profile.bare_amsl_m,
        clutter_height_m=surface_amsl_m - profile.bare_amsl_m,
        zone=zone,
        tx_height_agl_m=antenna_agl_m,
        rx_height_agl_m=roof.aerial_agl_m,
        tx_latitude_deg=profile.latitude_deg[0],
        tx_longitude_deg=profile.longitude_deg[0],
        rx_latitude_deg=profile.latitude_deg[-1],
        rx_longitude_deg=profile.longitude_deg[-1],
        delta_n_per_km=delta_n_per_km,
        tx_distance_to_coast_km=to_coast_km(distance_km, zone),
        rx_distance_to_coast_km=to_coast_km(distance_km[-1] - distance_km[::-1], zone[::-1]),
    )


def to_coast_km(away_km: FloatArray, zone: NDArray[np.int8]) -> float:
    """Distance over land from the first point to the sea; 0 at sea, 500 where the path meets none."""
    at_sea = zone == SEA
    return float(away_km[int(np.argmax(at_sea))]) if at_sea.any() else NO_COAST_KM
