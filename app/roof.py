"""A receiving place."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from app.errors import RequestError, RoofError

Surroundings = Literal["mapped", "open", "suburban", "urban", "trees"]
SURROUNDINGS: tuple[Surroundings, ...] = ("open", "suburban", "urban", "trees", "mapped")

LOWEST_AERIAL_M, HIGHEST_AERIAL_M = 1.0, 200.0
DEEPEST_LEAVES_M = 300.0
FARTHEST_OBSTACLE_M, HIGHEST_OBSTACLE_M = 2000.0, 500.0  # beyond, the elevation rasters show it


@dataclass(frozen=True, slots=True)
class Obstacle:
    """Something near the roof that stands in one direction; `Roof` checks its values."""

    bearing_deg: float
    distance_m: float
    height_agl_m: float  # above the ground at the roof
    width_m: float
    leaves_m: float = 0.0  # of foliage on the way through it; 0: it lets nothing through

    def stands_towards(self, bearing_deg: float) -> bool:
        """Whether a direction from the roof falls within its width."""
        away_deg = abs((bearing_deg - self.bearing_deg + 180) % 360 - 180)
        return away_deg <= math.degrees(math.atan2(self.width_m / 2, self.distance_m))


@dataclass(frozen=True, slots=True)
class Roof:
    """Position, height of the aerial, surroundings and near obstacles."""

    latitude_deg: float
    longitude_deg: float
    aerial_agl_m: float = 10.0
    surroundings: Surroundings = "open"  # "mapped": as land cover shows them, open where there is none
    obstacles: tuple[Obstacle, ...] = ()
    leaves_m: float = 0.0  # of foliage that the signals pass just before the aerial

    def __post_init__(self) -> None:
        """Refuse what cannot be a roof, saying what can."""
        check("latitude_deg", self.latitude_deg, -90, 90, "degrees north")
        check("longitude_deg", self.longitude_deg, -180, 180, "degrees east")
        check("aerial_agl_m", self.aerial_agl_m, LOWEST_AERIAL_M, HIGHEST_AERIAL_M, "m above the ground")
        if self.surroundings not in SURROUNDINGS:
            raise RoofError(
                f'surroundings "{self.surroundings}" are not known: use {", ".join(SURROUNDINGS)}',
                field="surroundings",
                allowed=", ".join(SURROUNDINGS),
            )
        check("leaves_m", self.leaves_m, 0, DEEPEST_LEAVES_M, "m of leaves before the aerial")
        for number, one in enumerate(self.obstacles):
            place = f"obstacles.{number}"
            check(f"{place}.bearing_deg", one.bearing_deg, 0, 360, "degrees from north")
            check(f"{place}.distance_m", one.distance_m, 1, FARTHEST_OBSTACLE_M, "m from the aerial")
            check(f"{place}.height_agl_m", one.height_agl_m, 0, HIGHEST_OBSTACLE_M, "m above the ground at the roof")
            check(f"{place}.width_m", one.width_m, 0.5, FARTHEST_OBSTACLE_M, "m across")
            check(f"{place}.leaves_m", one.leaves_m, 0, DEEPEST_LEAVES_M, "m of leaves to pass through")


WORDS = {
    "latitude_deg": "latitude",
    "longitude_deg": "longitude",
    "aerial_agl_m": "height of the aerial",
    "antenna_agl_m": "height of the antenna",
    "frequency_mhz": "frequency",
}


def check(
    name: str,
    value: float,
    lowest: float,
    highest: float,
    unit: str,
    kind: type[RequestError] = RoofError,
) -> None:
    """Raise an error of that kind unless value is a number from lowest to highest."""
    if not (math.isfinite(value) and lowest <= value <= highest):
        raise kind(
            f"{WORDS.get(name, name)} {value:g} is not possible: use {lowest:g} to {highest:g} {unit}",
            field=name,
            allowed=f"{lowest:g} to {highest:g}",
        )
