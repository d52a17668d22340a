"""What stands close to a roof: edges that no elevation raster can be trusted with.

Within 50 m of the aerial a surface model is flattened to bare ground. In its place stand one obstacle for the
surroundings, if those are higher than the aerial, and the obstacles that the user entered. Each costs what a single
knife edge costs the ray that arrives there, or less where it is a tree that the ray comes through. In the profile of
P.1812 it would cost up to 10 dB more: Bullington's construction adds that for further edges, which a house before the
aerial does not have.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.assumptions import Assumptions
from app.roof import Roof
from propagation.constants import FLATTENED_KM
from propagation.diffraction import knife_edge_loss_db
from propagation.foliage import woodland_loss_db
from propagation.units import wavelength_m
from terrain.geodesy import distance_and_bearing
from terrain.profile import Profile

FloatArray = NDArray[np.float64]
Standing = Literal["ground", "surroundings", "obstacle"]

SURROUNDINGS_KM = 0.027  # where Rec. ITU-R P.1546 places the cover round an antenna


class Near(NamedTuple):
    """Something that stands near a roof in one direction."""

    what: Standing
    from_roof_km: float
    height_m: float  # above the roof's ground
    leaves_m: float = 0.0  # of foliage on the way through; 0: it lets nothing through


@dataclass(frozen=True, slots=True)
class Edge:
    """A straight edge across the ray that arrives at an aerial."""

    what: Standing
    from_roof_km: float
    height_m: float  # above the roof's ground
    into_ray_m: float  # its top above the ray; negative: below
    size: float  # nu times the root of the wavelength [m^0.5]
    leaves_m: float = 0.0  # of foliage on the way through; 0: it lets nothing through

    def clearance_ratio(self, frequency_mhz: ArrayLike) -> FloatArray:
        """Height of the ray over the edge in first Fresnel radii (Rec. ITU-R P.526-16: nu = -sqrt(2) times it)."""
        return np.asarray(-self.size / np.sqrt(2 * wavelength_m(frequency_mhz)))

    def loss_db(self, frequency_mhz: ArrayLike) -> FloatArray:
        """Loss of the knife edge, elementwise; through a tree's leaves where that is the easier way.

        The lesser of the two is our choice; together they would let up to 3 dB more through.
        """
        over_db = knife_edge_loss_db(self.size / np.sqrt(wavelength_m(frequency_mhz)))
        return np.minimum(over_db, woodland_loss_db(frequency_mhz, self.leaves_m)) if self.leaves_m else over_db


def flattened_surface_m(profile: Profile) -> FloatArray:
    """Surface of a profile (n,) [m]: as the raster has it, but bare ground near the roof and under the mast."""
    x = profile.distance_km
    surface = np.where(x[-1] - x <= FLATTENED_KM, profile.bare_amsl_m, profile.ground_amsl_m)
    surface[0] = profile.bare_amsl_m[0]
    return surface


def standing_towards(roof: Roof, bearing_deg: float, assumptions: Assumptions) -> list[Near]:
    """Return what stands near the roof in a direction."""
    standing = [
        Near("obstacle", one.distance_m / 1e3, one.height_agl_m, one.leaves_m)
        for one in roof.obstacles
        if one.stands_towards(bearing_deg)
    ]
    cover_m = surroundings_height_m(roof, assumptions)
    if cover_m > 0:
        standing.append(Near("surroundings", SURROUNDINGS_KM, cover_m))
    return standing


def edge_into_ray(near: Near, aerial_agl_m: float, source_km: float, source_slope: float) -> Edge:
    """Return what stands at a distance as an edge into the ray from its source: that one's distance and slope [m/km].

    References
    ----------
    Rec. ITU-R P.526-16, section 4.1, eq. (26).
    """
    at_km = near.from_roof_km
    into_ray_m = near.height_m - aerial_agl_m - source_slope * at_km
    legs = 0.002 * source_km / (at_km * (source_km - at_km))
    return Edge(near.what, at_km, near.height_m, into_ray_m, into_ray_m * float(np.sqrt(legs)), near.leaves_m)


def edges_near_roof(
    profile: Profile,
    surface_amsl_m: FloatArray,
    antenna_agl_m: float,
    roof: Roof,
    assumptions: Assumptions,
    effective_earth_radius_km: float,
) -> tuple[Edge, ...]:
    """Return what stands near the roof towards the mast, worst first.

    The ray comes from the antenna, or from the horizon where the surface hides the antenna.
    """
    _, bearing = distance_and_bearing(
        profile.latitude_deg[-1], profile.longitude_deg[-1], profile.latitude_deg[0], profile.longitude_deg[0]
    )
    away_km = profile.distance_km[-1] - profile.distance_km[:-1]
    heights = surface_amsl_m[:-1].copy()
    heights[0] += antenna_agl_m
    aerial_amsl_m = float(profile.bare_amsl_m[-1]) + roof.aerial_agl_m
    slope = (heights - aerial_amsl_m) / away_km - 500 * away_km / effective_earth_radius_km  # m per km
    edges = []
    for near in standing_towards(roof, float(bearing), assumptions):
        beyond = np.flatnonzero(away_km > near.from_roof_km)
        if beyond.size == 0:
            continue  # the mast stands nearer than the obstacle
        source = int(beyond[np.argmax(slope[beyond])])
        edges.append(edge_into_ray(near, roof.aerial_agl_m, float(away_km[source]), float(slope[source])))
    return worst_first(edges)


def worst_first(edges: Sequence[Edge]) -> tuple[Edge, ...]:
    """Edges in the order of what the way over them costs."""
    return tuple(sorted(edges, key=lambda edge: -edge.size))


def surroundings_height_m(roof: Roof, assumptions: Assumptions) -> float:
    """Height above the ground of the one obstacle that stands for the surroundings; 0 if not above the aerial."""
    if roof.surroundings in ("open", "mapped") or (roof.surroundings == "trees" and roof.leaves_m > 0):
        return 0.0  # through the leaves, not over the trees
    height_m = assumptions.value(f"cover_{roof.surroundings}_m")
    return height_m if height_m > roof.aerial_agl_m else 0.0
