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
    kind: Kind, distance_km: float, worst_point_km: float, into_line_m: float, clearance_ratio: float, sea_share: float
) -> str:
    """Tell the path from the transmitter's mast to the aerial.

    worst_point_km counts from the roof, as a person there looks; into_line_m is how far ground and
    Earth bulge stand above the straight ray there, negative below it.
    """
    ground = "ground"
    sea = f", {sea_share:.0%} of the way over sea" if sea_share >= 0.05 else ""
    length = f"{distance_km:.0f} km" if distance_km >= 10 else f"{distance_km:.1f} km"
    place = f"{worst_point_km:.0f} km" if worst_point_km >= 10 else f"{worst_point_km:.1f} km"
    if kind == "beyond the horizon":
        if into_line_m > 0:
            return f"{length}{sea}, beyond the horizon: {ground} and the Earth's curve at {place} stand {into_line_m:.0f} m into the line."
        return f"{length}{sea}, at the edge of the horizon: the line passes {-into_line_m:.0f} m over the {ground} at {place}."
    if kind == "clear":
        return f"{length}{sea}, a clear line: it passes {-into_line_m:.0f} m over the {ground} at its tightest, {place} away."
    if kind == "grazing":
        share = f"{clearance_ratio:.1f} of the first Fresnel radius"
        return f"{length}{sea}, in sight but tight: only {-into_line_m:.0f} m over the {ground} at {place}, {share}."
    return f"{length}{sea}, blocked: the {ground} at {place} stands {into_line_m:.0f} m into the line."
