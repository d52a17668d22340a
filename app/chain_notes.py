"""What there is to say of a chain beside its chances: supply, levels at the outlets, ports, wind."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from app.air import Air
from app.chain.base import called
from app.chain.kinds import MastTube
from app.chain.parts import Chain, Splitter, Tap
from app.chain.powering import powering_document
from app.chain.wind import CAUTION, Mast, Mounted, check_mast
from app.chain.windows import ADJACENT_DB, SPREAD_DB, adjacent_step_db, level_window, spread_db
from app.chance import GRADES, grade
from app.errors import ChainError
from app.margins import Turned
from app.roof import Roof
from app.verdict import HAVE, Outcome


def chain_notes(
    chain: Chain, turned: Turned | None, air: Air, roof: Roof, if_powered: Outcome | None, standard: str
) -> dict[str, Any]:
    """Return the keys that a chain's entry in the answer has beside price and counts.

    `chain` as described; `turned` as it behaves, without what its supply does not reach; `if_powered` is what
    it would bring if the supply were mended.
    """
    return {
        "aerials": [] if turned is None else _aerials(turned),
        "fed_by": {ident: list(feeding) for ident, feeding in chain.tree.fed_by.items()},
        "powering": powering_document(chain),
        "if_powered": None if if_powered is None else _counts(if_powered),
        "levels": [] if turned is None else outlet_levels(turned, air, standard),
        "findings": [*unused_ports(chain), *(row["message"] for row in powering_document(chain) if row["message"])],
        "wind": wind_of(chain, roof.aerial_agl_m),
    }


def chain_cautions(notes: Mapping[str, Mapping[str, Any]], titles: Mapping[str, str]) -> list[str]:
    """Return what of the notes has to be read before anything is bought."""
    cautions = []
    for name, note in notes.items():
        title = titles[name]
        cautions += [f"{title}: {row['message']}" for row in note["powering"] if row["message"]]
        outside = [row for row in note["levels"] if row["too_strong"]]
        if outside:
            channels = sorted({channel for row in outside for channel in row["too_strong"]})
            standard = str(outside[0]["standard"]).upper().replace("EN-", "EN ")
            cautions.append(
                f"{title}: channel {', '.join(channels)} stands above the level window of {standard} "
                f"at {', '.join(row['outlet'] for row in outside)}: an attenuator or less gain brings it down."
            )
    return cautions


def _aerials(turned: Turned) -> list[dict[str, Any]]:
    first = turned.chain.aerial
    return [
        {
            "id": aerial.id,
            "name": aerial.name,
            "pointing_deg": turned.pointing_deg if aerial is first else aerial.pointing_deg,
            "polarisation": turned.polarisation if aerial is first else aerial.polarisation or turned.polarisation,
        }
        for aerial in turned.chain.aerials
    ]


def _counts(outcome: Outcome) -> dict[str, Any]:
    grades = [grade(one) for one in outcome.chance]
    return {
        "expected_count": round(float(outcome.chance.sum()), 3),
        **{word: grades.count(word) for _, word in GRADES},
    }


def outlet_levels(turned: Turned, air: Air, standard: str) -> list[dict[str, Any]]:
    """Median levels at each outlet against the window of a standard, of the emissions that are likely received.

    A window warns; what a set needs at least is in its noise figure, what it stands in its ceiling.
    """
    likely = [e for e in range(len(air.fields)) if turned.chance[e] >= HAVE]
    found = []
    for outlet in turned.median.outlets:
        weak: list[str] = []
        strong: list[str] = []
        for e in likely:
            emission = air.fields[e].emission
            window = level_window(emission.system, emission.mode, standard)
            outside = 0.0 if window is None else float(window.outside_db(outlet.level_dbuv[e]))
            label = emission.channel or f"{emission.frequency_mhz:g} MHz"
            if outside < 0:
                weak.append(label)
            elif outside > 0:
                strong.append(label)
        levels = outlet.level_dbuv[likely]
        spread = spread_db(levels)
        step = adjacent_step_db(
            levels,
            air.signals.frequency_mhz[likely],
            np.array([air.fields[e].emission.bandwidth_mhz for e in likely]),
        )
        found.append(
            {
                "outlet": outlet.name,
                "standard": standard,
                "lowest_dbuv": round(float(levels.min()), 1) if likely else None,
                "highest_dbuv": round(float(levels.max()), 1) if likely else None,
                "too_weak": sorted(set(weak)),
                "too_strong": sorted(set(strong)),
                "spread_db": round(spread, 1),
                "adjacent_db": round(step, 1),
                "is_uneven": spread > SPREAD_DB or step > ADJACENT_DB,
            }
        )
    return found


def unused_ports(chain: Chain) -> list[str]:
    """Say which ports of splitters and taps have to be closed."""
    found = []
    for part in chain.parts:
        if not isinstance(part, Splitter | Tap):
            continue
        fed = [one for one in chain.tree.order if part.id in chain.tree.fed_by[one.id]]
        tapped = sum(one.port != "through" for one in fed)
        through = isinstance(part, Tap) and tapped == len(fed)
        free = part.ports - tapped
        if free > 0:
            found.append(f"{called(part)}: close {free} unused port{'s' * (free > 1)} with 75 ohms")
        if through:
            found.append(f"{called(part)}: close the way through with 75 ohms")
    return found


def wind_of(chain: Chain, aerial_agl_m: float) -> dict[str, Any] | None:
    """Load and moment of the mast of a chain; None if no mast is described."""
    tubes = [part for part in chain.parts if isinstance(part, MastTube)]
    if not tubes:
        return None
    tube = tubes[0]
    outdoors = [aerial for aerial in chain.aerials if aerial.place == "roof"]
    unstated = [aerial.name for aerial in outdoors if aerial.wind_area_m2 is None]
    if unstated:
        message = f"state wind_area_m2 of {', '.join(unstated)}: without it the wind on the mast is not reckoned"
        return {"mast": tube.id, "moment_n_m": None, "findings": [message], "caution": CAUTION}
    mounted = [_mounted(aerial.name, aerial.wind_area_m2, aerial.above_clamp_m, tube) for aerial in outdoors]
    mast = Mast(tube.diameter_mm, tube.wall_mm, tube.free_m, tube.clamped_m, bracket_n=tube.bracket_n)
    try:
        check = check_mast(mast, mounted, aerial_agl_m)
    except ChainError as error:
        return {"mast": tube.id, "moment_n_m": None, "findings": [error.message], "caution": CAUTION}
    return {
        "mast": tube.id,
        "pressure_n_m2": check.pressure_n_m2,
        "moment_n_m": round(check.moment_n_m, 1),
        "tube_moment_n_m": round(check.tube_moment_n_m, 1),
        "upper_bracket_n": round(check.upper_bracket_n, 1),
        "lower_bracket_n": round(check.lower_bracket_n, 1),
        "findings": list(check.findings),
        "caution": CAUTION,
    }


def _mounted(name: str, area_m2: float | None, above_m: float | None, tube: MastTube) -> Mounted:
    return Mounted(name, float(area_m2 or 0), tube.free_m if above_m is None else above_m)


def with_notes(
    document: dict[str, Any], notes: Mapping[str, Mapping[str, Any]], first: Sequence[str] = ()
) -> dict[str, Any]:
    """Return the answer with what there is to say of its chains."""
    chains = {name: {**entry, **notes.get(name, {})} for name, entry in document["chains"].items()}
    titles = {name: str(entry["title"]) for name, entry in chains.items()}
    return {**document, "chains": chains, "cautions": [*first, *chain_cautions(notes, titles), *document["cautions"]]}
