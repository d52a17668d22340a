"""Roofs side by side with the same chains, and what the share of time asked for changes."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from app.planner import assess
from app.request import AVAILABILITIES, AssessRequest
from app.site import place
from app.transmitters.store import Store
from terrain.mosaic import Ground


def side_by_side(requests: Sequence[AssessRequest], store: Store, ground: Ground) -> dict[str, Any]:
    """Return for each roof the counts of every chain and, at 50, 90 and 99 % of time, the answers.

    `changes` counts the candidates whose answer is not the same at all three; `differs` those whose answer at the
    request's own share of time differs between the roofs.
    """
    roofs = [_one(request, store, ground) for request in requests]
    answers = [roof["answers"] for roof in roofs]
    shared = [name for name in answers[0] if all(name in one for one in answers)]
    return {
        "roofs": roofs,
        "differs": [
            name
            for name in shared
            if len(
                {one[name][str(request.availability_percent)] for one, request in zip(answers, requests, strict=True)}
            )
            > 1
        ],
    }


def _one(request: AssessRequest, store: Store, ground: Ground) -> dict[str, Any]:
    by_share = {share: assess(replace(request, availability_percent=share), store, ground) for share in AVAILABILITIES}
    mine = by_share[request.availability_percent]
    answers: dict[str, dict[str, str | None]] = {}
    for share, document in by_share.items():
        for verdict in document["verdicts"]:
            answers.setdefault(verdict["candidate"], {})[str(share)] = verdict["answer"]
    return {
        "latitude_deg": request.roof.latitude_deg,
        "longitude_deg": request.roof.longitude_deg,
        "chains": {
            name: {
                "expected_count": {
                    str(share): document["chains"][name]["expected_count"] for share, document in by_share.items()
                },
                "pointings": [one["pointing_deg"] for one in chain["pointings"]],
            }
            for name, chain in mine["chains"].items()
        },
        "answers": answers,
        "changes": sum(len(set(one.values())) > 1 for one in answers.values()),
    }


def told(document: dict[str, Any]) -> str:
    """Return the roofs side by side in lines."""
    from app.lists import table

    rows = []
    names = list(document["roofs"][0]["chains"])
    for name in names:
        for share in map(str, AVAILABILITIES):
            row: dict[str, Any] = {"chain": name, "time": f"{share} %"}
            for number, roof in enumerate(document["roofs"], 1):
                count = roof["chains"][name]["expected_count"][share]
                answer = roof["answers"].get(name, {}).get(share)
                row[f"roof {number}"] = f"{count:.1f}" + (f", {answer}" if answer else "")
            rows.append(row)
    lines = [
        f"roof {number}: {place(roof['latitude_deg'], roof['longitude_deg'])}, "
        f"{roof['changes']} of {len(roof['answers'])} answers change with the share of time"
        for number, roof in enumerate(document["roofs"], 1)
    ]
    if len(document["roofs"]) > 1:
        lines.append(f"the answer differs between the roofs for: {', '.join(document['differs']) or 'no candidate'}")
    return "\n".join([table(rows, "no chain"), *lines])
