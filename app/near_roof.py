"""What stands close to a roof: edges that no elevation raster can be trusted with.

Within 50 m of the aerial a surface model is flattened to bare ground. In its place stand one obstacle for the
surroundings, if those are higher than the aerial, and the obstacles that the user entered.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.roof import Roof
from terrain.geodesy import distance_and_bearing
from terrain.profile import Profile

FloatArray = NDArray[np.float64]
Standing = Literal["ground", "surroundings", "obstacle"]

FLATTENED_KM = 0.05
SURROUNDINGS_KM = 0.027  # where Rec. ITU-R P.1546 places the cover round an antenna
_SAME_PLACE_KM = 1e-6


@dataclass(frozen=True, slots=True)
class Edge:
    """A straight edge across the path."""

    from_roof_km: float
    top_amsl_m: float
    what: Standing


@dataclass(frozen=True, slots=True)
class PathGround:
    """A profile as the methods take it: bare ground, and the surface with every edge."""

    distance_km: FloatArray  # (n,)
    bare_amsl_m: FloatArray  # (n,)
    surface_amsl_m: FloatArray  # (n,) at or above the bare ground, equal at both ends
    zone: NDArray[np.int8]  # (n,)
    edges: tuple[Edge, ...]

    def standing_at(self, distance_km: float) -> Standing:
        """What makes the surface at one of its points."""
        for edge in self.edges:
            if abs(self.distance_km[-1] - edge.from_roof_km - distance_km) <= _SAME_PLACE_KM:
                return edge.what
        return "ground"

    @property
    def entered(self) -> tuple[Edge, ...]:
        """The edges that the user entered."""
        return tuple(edge for edge in self.edges if edge.what == "obstacle")


def ground_for_methods(profile: Profile, roof: Roof, assumptions: Assumptions) -> PathGround:
    """Return the ground of one path with the edges near its roof."""
    x, bare = profile.distance_km, profile.bare_amsl_m
    surface = np.where(x[-1] - x <= FLATTENED_KM, bare, profile.ground_amsl_m)
    surface[0], surface[-1] = bare[0], bare[-1]
    zone = profile.zone
    edges = tuple(edge for edge in edges_towards_mast(profile, roof, assumptions) if edge.from_roof_km < x[-1])
    for edge in edges:
        at_km = x[-1] - edge.from_roof_km
        nearest = int(np.argmin(np.abs(x - at_km)))
        if abs(x[nearest] - at_km) > _SAME_PLACE_KM:
            nearest = int(np.searchsorted(x, at_km))
            bare_there, there = np.interp(at_km, x, bare), np.interp(at_km, x, surface)
            x, bare = np.insert(x, nearest, at_km), np.insert(bare, nearest, bare_there)
            surface, zone = np.insert(surface, nearest, there), np.insert(zone, nearest, zone[-1])
        if 0 < nearest < len(x) - 1:
            surface[nearest] = max(surface[nearest], edge.top_amsl_m)
    return PathGround(x, bare, surface, zone, edges)


def edges_towards_mast(profile: Profile, roof: Roof, assumptions: Assumptions) -> tuple[Edge, ...]:
    """Return the edges between the roof and the mast, whether or not they are high enough to matter."""
    ground_amsl_m = float(profile.bare_amsl_m[-1])
    _, bearing = distance_and_bearing(
        profile.latitude_deg[-1], profile.longitude_deg[-1], profile.latitude_deg[0], profile.longitude_deg[0]
    )
    edges = [
        Edge(one.distance_m / 1e3, ground_amsl_m + one.height_agl_m, "obstacle")
        for one in roof.obstacles
        if one.stands_towards(float(bearing))
    ]
    height_m = surroundings_height_m(roof, assumptions)
    if height_m > 0:
        edges.append(Edge(SURROUNDINGS_KM, ground_amsl_m + height_m, "surroundings"))
    return tuple(edges)


def surroundings_height_m(roof: Roof, assumptions: Assumptions) -> float:
    """Height above the ground of the one obstacle that stands for the surroundings; 0 if not above the aerial."""
    if roof.surroundings == "open":
        return 0.0
    height_m = assumptions.value(f"cover_{roof.surroundings}_m")
    return height_m if height_m > roof.aerial_agl_m else 0.0
