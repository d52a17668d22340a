"""What turning, raising or doubling the aerial would change.

Pointing: the chance of every multiplex for each whole degree, chain by chain, and what interference takes there.
Height: the same question at 2 to 25 m. Two aerials: one against two alike through a combiner and through a switch,
each turned its best way.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from datetime import date
from pathlib import Path
from typing import Any

import numpy as np

from app.aiming import aimed
from app.air import Air
from app.air_at import air_at
from app.assumptions import Assumptions
from app.chain.parts import Aerial, Chain, Combiner, Part, Switch
from app.chain.powering import as_powered
from app.chance import rows_of
from app.mapped import settled
from app.margins import Turned, chance_of_each, multiplex_chances, turn
from app.planner import chains_of
from app.request import AssessRequest
from app.site import site_of
from app.transmitters.store import Store
from terrain.mosaic import Ground

HEIGHTS_M = (2.0, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0, 12.0, 15.0, 20.0, 25.0)
LEAST_DIFFERENCE = 0.05  # expected multiplexes: less is no difference to a person


def sweep_document(
    request: AssessRequest,
    store: Store,
    ground: Ground,
    heights_m: Sequence[float] = HEIGHTS_M,
    today: date | None = None,
    refractivity_maps: Path | None = None,
) -> dict[str, Any]:
    """Answer all three sweeps for the chains of a request; an empty list of heights leaves that sweep out.

    Raises
    ------
    AppError, TerrainError
        The roof or a chain is not possible.
    """
    assumptions = Assumptions(request.assumptions)
    chains = chains_of(request, store)
    request, _ = settled(request, ground)
    site_of(request.roof, ground)
    air = air_at(request, request.roof, store, ground, assumptions, today, refractivity_maps).air
    multiplexes = sorted(set(air.multiplex_of))
    turned = {chain.name: _turned(chain, air, request, multiplexes, assumptions) for chain in chains}
    return {
        "multiplexes": multiplexes,
        "pointing": {name: pointing_sweep(one, air, multiplexes) for name, one in turned.items()},
        "height": height_sweep(request, chains, store, ground, assumptions, heights_m, today, refractivity_maps),
        "two_aerials": {
            chain.name: two_aerials(chain, air, request, multiplexes, assumptions)
            for chain in chains
            if len(chain.aerials) == 1
        },
    }


def pointing_sweep(turned: Turned, air: Air, multiplexes: Sequence[str]) -> dict[str, Any]:
    """Chance of each multiplex and what interference costs it, for each whole degree; alternatives independent.

    Both in the polarisation that is best. The cost is the fall from C/N to C/(N + I) of the emission most likely
    received in that direction, in the time state that decides. [dB]
    """
    acting, rows = air.company.acting, rows_of(air.multiplex_of)
    chance = chance_of_each(turned.sweep.chance, air.multiplex_of, multiplexes, acting)
    lost_db = {}
    for name in multiplexes:
        owned = [e for e in rows[name] if acting[e]]
        likeliest = turned.sweep.chance[:, owned].argmax(axis=1)[:, None]
        lost_db[name] = np.take_along_axis(turned.sweep.lost_db[:, owned], likeliest, axis=1)[:, 0]
    return {
        "polarisation": turned.polarisation,
        "best_deg": turned.pointing_deg,
        "chance_by_degree": {name: np.round(one, 3).tolist() for name, one in chance.items()},
        "interference_db_by_degree": {name: np.round(one, 2).tolist() for name, one in lost_db.items()},
    }


def height_sweep(
    request: AssessRequest,
    chains: Sequence[Chain],
    store: Store,
    ground: Ground,
    assumptions: Assumptions,
    heights_m: Sequence[float],
    today: date | None = None,
    refractivity_maps: Path | None = None,
) -> list[dict[str, Any]]:
    """Expected multiplexes of each chain at each height, turned its best way there."""
    found = []
    for height_m in heights_m:
        roof = replace(request.roof, aerial_agl_m=height_m)
        there = replace(request, roof=roof)
        air = air_at(there, roof, store, ground, assumptions, today, refractivity_maps).air
        multiplexes = sorted(set(air.multiplex_of))
        rows = {}
        for chain in chains:
            turned = _turned(chain, air, there, multiplexes, assumptions)
            _, chance = multiplex_chances(turned, air, multiplexes)
            rows[chain.name] = {
                "expected_count": round(float(chance.sum()), 3),
                "pointing_deg": turned.pointing_deg,
                "chance": {name: round(float(one), 3) for name, one in zip(multiplexes, chance, strict=True)},
            }
        found.append({"aerial_agl_m": height_m, "chains": rows})
    return found


def two_aerials(
    chain: Chain, air: Air, request: AssessRequest, multiplexes: Sequence[str], assumptions: Assumptions
) -> dict[str, Any]:
    """One aerial against two alike, through a combiner and through a switch, and which of them does best."""
    ways: dict[str, Chain] = {
        "one": chain,
        "combiner": doubled(chain, Combiner(id="combiner", name="Combiner")),
        "switch": doubled(chain, Switch(id="switch", name="Switch")),
    }
    rows: dict[str, Any] = {}
    for word, one in ways.items():
        turned = _turned(one, air, request, multiplexes, assumptions)
        _, chance = multiplex_chances(turned, air, multiplexes)
        rows[word] = {
            "expected_count": round(float(chance.sum()), 3),
            "pointings_deg": [
                turned.pointing_deg,
                *(aerial.pointing_deg for aerial in turned.chain.aerials[1:]),
            ],
        }
    counts = {word: row["expected_count"] for word, row in rows.items()}
    best = max(counts, key=lambda word: (counts[word] - LEAST_DIFFERENCE * (word != "one"), word == "one"))
    return {**rows, "best": best, "sentence": _sentence(counts, best)}


def doubled(chain: Chain, joint: Combiner | Switch) -> Chain:
    """Return a chain with a second aerial like its first, both through a combiner or switch right behind them."""
    first = chain.aerial
    taken = {part.id for part in chain.parts}
    joint = replace(joint, id=_free(joint.id, taken))
    second = replace(first, id=_free(f"{first.id}-second", taken), name=f"{first.name}, second", pointing_deg=None)
    parts: list[Part] = [first, second, replace(joint, after=(first.id, second.id))]
    for part in chain.parts:
        if part is first:
            continue
        above = chain.tree.fed_by.get(part.id, part.after)
        parts.append(
            part
            if isinstance(part, Aerial)
            else replace(part, after=tuple(joint.id if ident == first.id else ident for ident in above))
        )
    return replace(chain, parts=tuple(parts))


def _turned(chain: Chain, air: Air, request: AssessRequest, counted: Sequence[str], assumptions: Assumptions) -> Turned:
    fed = as_powered(chain)
    return turn(aimed(fed, air, request.roof, counted, assumptions), air, request.roof, counted, assumptions)


def _free(ident: str, taken: set[str]) -> str:
    number = 2
    wanted = ident
    while wanted in taken:
        wanted, number = f"{ident}-{number}", number + 1
    return wanted


def _sentence(counts: dict[str, float], best: str) -> str:
    if best == "one":
        return "A second aerial brings nothing here: keep one."
    other = "switch" if best == "combiner" else "combiner"
    return (
        f"Two aerials through a {best} bring {counts[best] - counts['one']:+.1f} multiplexes, "
        f"through a {other} {counts[other] - counts['one']:+.1f}."
    )
