"""The paths that matter: one section of the ground for each mast that a multiplex is best received from."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any

from app.errors import RequestError
from app.path_query import path_document
from app.report.drawing import path_svg
from app.roof import Roof
from terrain.errors import CoverageError, PathError
from terrain.mosaic import Ground

Document = dict[str, Any]
MOST_PATHS = 12


def masts_that_matter(
    answer: Document, chain: str, roof: Roof, ground: Ground, refractivity_maps: Path | None
) -> tuple[list[Document], int]:
    """Return up to 12 masts by bearing, those of the largest chances, and how many more there are."""
    by_id = {one["id"]: one for one in answer["emissions"]}
    masts: dict[str, list[tuple[float, Document]]] = {}
    for multiplex in answer["multiplexes"]:
        cell = multiplex["chains"].get(chain)
        if cell is not None:
            emission = by_id[cell["emission"]]
            masts.setdefault(emission["transmitter"], []).append((cell["chance"], emission))
    ranked = sorted(masts.values(), key=lambda received: -max(chance for chance, _ in received))
    shown = sorted(ranked[:MOST_PATHS], key=lambda received: float(received[0][1]["bearing_deg"]))
    rows = [_row([emission for _, emission in received], roof, ground, refractivity_maps) for received in shown]
    return rows, len(ranked) - len(rows)


def channel_words(emission: Mapping[str, Any]) -> str:
    """Return the channel, or the frequency where there is none."""
    return f"channel {emission['channel']}" if emission["channel"] else f"{emission['frequency_mhz']:g} MHz"


def bearing_words(bearing_deg: float) -> str:
    """Return whole degrees from north in three digits, 000° to 359°."""
    return f"{round(bearing_deg) % 360:03d}°"


def _row(emissions: list[Document], roof: Roof, ground: Ground, refractivity_maps: Path | None) -> Document:
    first = emissions[0]
    sentence = first["path"]["sentence"] if first["path"] else str(first["reason"])
    return {
        "title": f"{bearing_words(first['bearing_deg'])} {first['transmitter_name']}, {first['distance_km']:.0f} km",
        "sentence": sentence,
        "channels": [f"{channel_words(one)}: {_fields(one['field'])}" for one in emissions],
        "picture": _picture(first, sentence, roof, ground, refractivity_maps),
    }


def _fields(field: Mapping[str, Any]) -> str:
    by = [
        f"{words} {field[key]:.0f}"
        for key, words in (("p1812_dbuv_m", "P.1812"), ("p1546_dbuv_m", "P.1546"))
        if field[key] is not None
    ]
    return f"{', '.join(by)} dB(µV/m)"


def _picture(
    emission: Document, sentence: str, roof: Roof, ground: Ground, refractivity_maps: Path | None
) -> Document | None:
    """Draw the path to one mast; None where it has no ground, or is too short or too long for a section."""
    try:
        path = path_document(
            ground,
            emission["latitude_deg"],
            emission["longitude_deg"],
            roof.latitude_deg,
            roof.longitude_deg,
            emission["frequency_mhz"],
            emission["antenna_agl_m"],
            roof.aerial_agl_m,
            refractivity_maps=refractivity_maps,
        )
    except (RequestError, CoverageError, PathError):
        return None
    heights_m = path["drawing"]["ground_amsl_m"]
    said = (
        f"Section of the ground from the roof, left, to {emission['transmitter_name']}, right, "
        f"{min(heights_m):.0f} to {max(heights_m):.0f} m above the sea, for {channel_words(emission)}. {sentence}"
    )
    across = [one for one in roof.obstacles if one.stands_towards(emission["bearing_deg"])]
    return {"svg": path_svg(path, emission["transmitter_name"], across, said), "text": said}
