"""A receiving place."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from app.errors import RoofError

Surroundings = Literal["open", "suburban", "urban", "trees"]
SURROUNDINGS: tuple[Surroundings, ...] = ("open", "suburban", "urban", "trees")

LOWEST_AERIAL_M, HIGHEST_AERIAL_M = 1.0, 200.0


@dataclass(frozen=True, slots=True)
class Obstacle:
    """Something near the roof that stands in one direction."""

    bearing_deg: float
    distance_m: float
    height_agl_m: float  # above the ground at the roof
    width_m: float


@dataclass(frozen=True, slots=True)
class Roof:
    """Position, height of the aerial, surroundings and near obstacles."""

    latitude_deg: float
    longitude_deg: float
    aerial_agl_m: float = 10.0
    surroundings: Surroundings = "open"
    obstacles: tuple[Obstacle, ...] = ()

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


def check(name: str, value: float, lowest: float, highest: float, unit: str) -> None:
    """Raise a RoofError unless value is a number from lowest to highest."""
    if not (math.isfinite(value) and lowest <= value <= highest):
        raise RoofError(
            f"{name} {value:g} is not possible: use {lowest:g} to {highest:g} {unit}",
            field=name,
            allowed=f"{lowest:g} to {highest:g}",
        )
