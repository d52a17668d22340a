"""A path told in one sentence, from the terms that are really the largest."""

from __future__ import annotations

from typing import Literal

Kind = Literal["clear", "grazing", "obstructed", "beyond the horizon"]

CLEAR_RATIO = 0.6  # of the first Fresnel radius: no diffraction loss to speak of (Rec. ITU-R P.526)


def path_kind(clearance_ratio: float, beyond_horizon: bool) -> Kind:
    """Return the kind of path that decides the spread; beyond the smooth Earth's horizon comes first."""
    if beyond_horizon:
        return "beyond the horizon"
    if clearance_ratio >= CLEAR_RATIO:
        return "clear"
    return "grazing" if clearance_ratio >= 0 else "obstructed"


def path_sentence(
    kind: Kind,
    distance_km: float,
    worst_point_km: float,
    into_line_m: float,
    clearance_ratio: float,
    sea_share: float,
) -> str:
    """Tell the path from the transmitter's mast to the aerial.

    worst_point_km counts from the roof, as a person there looks; into_line_m is how far ground and
    Earth bulge stand above the straight ray there, negative below it.
    """
    sea = f", {sea_share:.0%} of the way over sea" if sea_share >= 0.05 else ""
    start = f"{_kilometres(distance_km)}{sea}"
    place = _kilometres(worst_point_km)
    if kind == "beyond the horizon":
        if into_line_m > 0:
            into = f"ground and the Earth's curve at {place} stand {into_line_m:.0f} m into the line"
            return f"{start}, beyond the horizon: {into}."
        return f"{start}, at the edge of the horizon: the line passes {-into_line_m:.0f} m over the ground at {place}."
    if kind == "clear":
        over = f"{-into_line_m:.0f} m over the ground at its tightest, {place} away"
        return f"{start}, a clear line: it passes {over}."
    if kind == "grazing":
        share = f"{clearance_ratio:.1f} of the first Fresnel radius"
        return f"{start}, in sight but tight: only {-into_line_m:.0f} m over the ground at {place}, {share}."
    return f"{start}, blocked: the ground at {place} stands {into_line_m:.0f} m into the line."


def _kilometres(distance_km: float) -> str:
    return f"{distance_km:.0f} km" if distance_km >= 10 else f"{distance_km:.1f} km"
