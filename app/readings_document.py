"""What became of the readings, as part of the answer."""

from __future__ import annotations

from typing import Any

from app.evidence import Evidence, Weighed
from app.readings import reading_to_document


def readings_document(evidence: Evidence) -> dict[str, Any]:
    """Return every reading with its prediction, whether it was used and why not; what they tell of the parts."""
    posterior = evidence.posterior
    return {
        "used": sum(one.used for one in evidence.weighed),
        "items": [_item(one) for one in evidence.weighed],
        "findings": list(evidence.findings),
        "effective_share": None if posterior is None else round(posterior.effective_share, 3),
        "bounds": "none"
        if posterior is None or posterior.is_normal
        else "moment-matched"
        if posterior.picked is None
        else "sampled",
    }


def _item(one: Weighed) -> dict[str, Any]:
    return {
        **reading_to_document(one.reading),
        "used": one.used,
        "reason": one.reason,
        "read_of": one.emission,
        "predicted_db": _rounded(one.predicted_db),
        "read_db": _rounded(one.read_db),
        "spread_db": _rounded(one.spread_db),
        "surprise_sd": _rounded(one.surprise_sd),
        "candidates": list(one.candidates),
    }


def _rounded(value: float | None) -> float | None:
    return None if value is None else round(value, 2)
