"""The logbook: over all roofs with readings, what was predicted against what was read.

Each figure is compared with the prediction before any reading. In units of its own spread z = (read - predicted) /
spread, a model that is right has a mean of z near 0 and a spread of z near 1. A scale of the spread is learnt only
from five readings or more, and cautiously: with PRIOR_READINGS readings' worth of belief in 1,

    scale² = (PRIOR_READINGS + sum z²) / (PRIOR_READINGS + n)        (mean of the inverse-gamma posterior, prior mean 1)
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from app.planner import assess
from app.readings import RANGES
from app.request import AssessRequest
from app.roof import Roof
from app.transmitters.store import Store
from terrain.mosaic import Ground

LEAST_READINGS = 5
PRIOR_READINGS = 10.0


def learnt_scale(surprises: Sequence[float]) -> float | None:
    """Return by what the spread of the model should be multiplied, None from fewer than five readings.

    `surprises` are the differences from the prediction in units of its spread.
    """
    z = np.asarray(surprises, dtype=float)
    if z.size < LEAST_READINGS:
        return None
    return float(np.sqrt((PRIOR_READINGS + (z**2).sum()) / (PRIOR_READINGS + z.size)))


def logbook(store: Store, ground: Ground) -> dict[str, Any]:
    """Return every stored figure beside its prediction, and mean and spread over all."""
    entries: list[dict[str, Any]] = []
    left_out: list[dict[str, Any]] = []
    for latitude_deg, longitude_deg in _roofs(store):
        request = AssessRequest(Roof(latitude_deg, longitude_deg))
        for item in assess(request, store, ground)["readings"]["items"]:
            place = {"latitude_deg": latitude_deg, "longitude_deg": longitude_deg}
            if item["kind"] in RANGES and item["spread_db"] is not None:
                difference = item["read_db"] - item["predicted_db"]
                entries.append(
                    {
                        **place,
                        **{key: item.get(key) for key in ("id", "day", "kind", "read_of", "read_db", "predicted_db")},
                        "difference_db": round(difference, 2),
                        "spread_db": item["spread_db"],
                        "used": item["used"],
                    }
                )
            elif item["kind"] in RANGES:
                left_out.append({**place, "id": item.get("id"), "reason": item["reason"]})
    return {"entries": entries, "left_out": left_out, "summary": _summary(entries)}


def _roofs(store: Store) -> list[tuple[float, float]]:
    """Places with readings; those that would be read together count once."""
    places: list[tuple[float, float]] = []
    done: set[str] = set()
    for document in store.list_readings():
        if document["id"] not in done:
            place = (document["latitude_deg"], document["longitude_deg"])
            places.append(place)
            done.update(one["id"] for one in store.readings_near(*place))
    return places


def _summary(entries: Sequence[dict[str, Any]]) -> dict[str, Any]:
    used = [one for one in entries if one["used"]]
    if not used:
        return {"readings": 0, "mean_db": None, "spread_db": None, "scale": None, "mean_in_spreads": None}
    difference = np.array([one["difference_db"] for one in used])
    z = difference / np.array([one["spread_db"] for one in used])
    scale = learnt_scale(z.tolist())
    return {
        "readings": len(used),
        "mean_db": round(float(difference.mean()), 2),
        "spread_db": round(float(difference.std(ddof=1)), 2) if len(used) > 1 else None,
        "mean_in_spreads": round(float(z.mean()), 2),
        "scale": None if scale is None else round(scale, 3),
    }


def told(document: dict[str, Any]) -> str:
    """Return the logbook in lines."""
    from app.lists import table

    summary = document["summary"]
    if not summary["readings"]:
        return "no figure was read yet: `gainworth readings add`"
    spread = "" if summary["spread_db"] is None else f", spread {summary['spread_db']:.1f} dB"
    scale = (
        f"a scale of the spread is learnt from {LEAST_READINGS} readings on"
        if summary["scale"] is None
        else f"spread of the model should be times {summary['scale']:.2f}"
    )
    mean = f"read less predicted {summary['mean_db']:+.1f} dB on average{spread}"
    return f"{summary['readings']} readings used: {mean}; {scale}\n" + table(document["entries"], "")
