"""A path told in one sentence, from the terms that are really the largest."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from app.near_roof import Standing

Kind = Literal["clear", "grazing", "obstructed", "beyond the horizon"]

CLEAR_RATIO = 0.6  # of the first Fresnel radius: no diffraction loss to speak of (Rec. ITU-R P.526)
WORTH_TELLING_DB = 3.0


@dataclass(frozen=True, slots=True)
class PathStory:
    """The terms of one path that a sentence can be made of."""

    kind: Kind
    distance_km: float
    worst_point_km: float  # from the roof, as a person there looks
    into_line_m: float  # surface and Earth's curve above the straight ray there; negative: below it
    clearance_ratio: float
    sea_share: float
    standing: Standing  # what it is there
    near: Standing  # what stands near the roof, "ground" for nothing
    near_km: float  # its distance from the aerial
    near_edge_db: float  # its loss
    bulge_m: float  # the Earth's curve there
    diffraction_loss_db: float  # of the ground, without what stands near the roof
    curve_loss_db: float  # the part of it that the smooth Earth adds
    brought_back_db: float  # what scatter and ducts make good of it


def path_kind(clearance_ratio: float, beyond_horizon: bool) -> Kind:
    """Return the kind of path that decides the spread; beyond the smooth Earth's horizon comes first."""
    if beyond_horizon:
        return "beyond the horizon"
    if clearance_ratio >= CLEAR_RATIO:
        return "clear"
    return "grazing" if clearance_ratio >= 0 else "obstructed"


def path_sentence(story: PathStory) -> str:
    """Tell the path from the transmitter's mast to the aerial."""
    sea = f", {story.sea_share:.0%} of the way over sea" if story.sea_share >= 0.05 else ""
    return f"{_length(story.distance_km)}{sea}, {_line(story)}{_costs(story)}."


def _line(story: PathStory) -> str:
    into_m, what = story.into_line_m, _what(story)
    if story.kind == "beyond the horizon":
        if into_m > 0:
            return f"beyond the horizon: {what} {into_m:.0f} m into the line"
        return f"at the edge of the horizon: the line passes {-into_m:.0f} m over {_under(story)}"
    if story.kind == "clear":
        return f"a clear line: it passes {-into_m:.0f} m over {_under(story)} at its tightest"
    if story.kind == "grazing":
        # Never rounded up to where a line counts as clear.
        share = f"{math.floor(100 * story.clearance_ratio) / 100:g} of the first Fresnel radius"
        return f"in sight but tight: only {abs(into_m):.0f} m over {_under(story)}, {share}"
    return f"blocked: {what} {into_m:.0f} m into the line"


def _what(story: PathStory) -> str:
    """Name what stands in the line, with its verb."""
    if story.standing != "ground":
        return f"{_near(story)} {'stands' if story.standing == 'obstacle' else 'reaches'}"
    if story.bulge_m >= story.into_line_m:
        return f"the Earth's curve lifts the ground at {_length(story.worst_point_km)}"
    return f"the ground at {_length(story.worst_point_km)} stands"


def _under(story: PathStory) -> str:
    if story.standing != "ground":
        return _near(story)
    return f"the ground at {_length(story.worst_point_km)}"


def _costs(story: PathStory) -> str:
    """Say what it costs, and what other ways of propagation make good of it."""
    if story.standing != "ground":
        told = f", which costs {story.near_edge_db:.0f} dB" if story.near_edge_db >= WORTH_TELLING_DB else ""
        return told + _further("the ground on the way", story.diffraction_loss_db) + _brought_back(story)
    near = _further(_near(story), story.near_edge_db)
    loss_db = story.diffraction_loss_db
    if loss_db < WORTH_TELLING_DB:
        return near
    if story.kind == "clear" or story.into_line_m <= 0 < story.curve_loss_db:
        by = "the curve of the Earth" if story.curve_loss_db >= loss_db / 2 else "the ground below it"
        told = f"; {by} still takes {loss_db:.0f} dB"
    else:
        told = f", which costs {loss_db:.0f} dB"
    return told + _brought_back(story) + near


def _further(what: str, loss_db: float) -> str:
    return f"; {what} takes {loss_db:.0f} dB more" if loss_db >= WORTH_TELLING_DB else ""


def _brought_back(story: PathStory) -> str:
    if story.brought_back_db < WORTH_TELLING_DB:
        return ""
    return f"; scatter and layers in the air bring back {story.brought_back_db:.0f} dB"


def _near(story: PathStory) -> str:
    if story.near == "obstacle":
        return f"the obstacle {_length(story.near_km)} from the aerial"
    return "what stands round the roof"


def _length(distance_km: float) -> str:
    if distance_km < 1:
        return f"{1e3 * distance_km:.0f} m"
    return f"{distance_km:.0f} km" if distance_km >= 10 else f"{distance_km:.1f} km"
