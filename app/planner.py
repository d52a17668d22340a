"""The way of one request: roof, emissions, fields, chains, chances, verdict."""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from datetime import date
from pathlib import Path
from typing import Any, TypeVar

import numpy as np

from app.aiming import aimed
from app.air import Air
from app.air_at import air_at
from app.answer import answer_document
from app.answer_cells import probability
from app.assumptions import Assumptions
from app.cautions import off_air_notes
from app.chain.parts import Chain
from app.chain.powering import as_powered
from app.chain.windows import DEFAULT_STANDARD
from app.chain_notes import chain_notes, with_notes
from app.chance import Knowledge
from app.declination import compass_text
from app.errors import RequestError
from app.mapped import credits_of, settled
from app.margins import Turned, multiplex_chances, turn
from app.reading_value import Readable
from app.request import NOTHING, AssessRequest
from app.roof_readings import Place, evidence_at, what_can_be_read
from app.site import site_of
from app.stored_chains import stored_chain
from app.transmitters.store import Store
from app.verdict import Outcome, Verdict, compare, nothing, ranked, wanted_multiplexes
from terrain.mosaic import Ground

T = TypeVar("T")


def assess(
    request: AssessRequest,
    store: Store,
    ground: Ground,
    today: date | None = None,
    refractivity_maps: Path | None = None,
) -> dict[str, Any]:
    """Answer one request with the document of the interface, the same for API and command line.

    Raises
    ------
    AppError, TerrainError
        The roof, a name or a value is not possible: the message says what is.
    """
    assumptions = Assumptions({**request.assumptions, **request.stated_values})
    chains = chains_of(request, store)
    request, told = settled(request, ground)
    roof = request.roof
    compass = compass_text(roof.latitude_deg, roof.longitude_deg, today or date.today())
    site = site_of(roof, ground, told)
    heard = air_at(request, request.roof, store, ground, assumptions, today, refractivity_maps)
    off_air = off_air_notes(request, store, heard.on_the_air, today or date.today())
    site = replace(site, compass=compass, cautions=(*site.cautions, *off_air))
    fields, air = heard.fields, heard.air
    multiplexes = sorted(set(air.multiplex_of))
    chosen = _wanted_ids(request, store)
    counted = [one for one in chosen or multiplexes if one in multiplexes]

    def turned_best(chain: Chain, known: Knowledge | None) -> Turned:
        best = aimed(chain, air, request.roof, counted, assumptions)
        return turn(best, air, request.roof, counted, assumptions, known)

    turned = _for_each(chains, lambda chain: turned_best(as_powered(chain), None)) if air.fields else {}
    place = Place(request, store, ground, heard, turned, assumptions, refractivity_maps)
    evidence = evidence_at(place)
    known = evidence.posterior
    if known is not None:
        turned = _for_each(chains, lambda chain: turned_best(as_powered(chain), known))
    outcomes = _for_each(chains, lambda chain: _outcome(turned[chain.name], air, multiplexes)) if turned else {}
    readables = what_can_be_read(place, turned, known)
    verdicts = _verdicts(request, chains, outcomes, multiplexes, chosen, assumptions, readables)
    mended = {
        chain.name: _outcome(turned_best(chain, known), air, multiplexes)
        for chain in chains
        if turned and as_powered(chain) != chain
    }
    notes = {
        chain.name: chain_notes(
            chain, turned.get(chain.name), air, request.roof, mended.get(chain.name), DEFAULT_STANDARD
        )
        for chain in chains
    }
    document = answer_document(
        request, assumptions, site, store, fields, air, multiplexes, chains, turned, outcomes, verdicts, evidence
    )
    return with_notes(document, notes) | {"credits": credits_of(ground)}


def chains_of(request: AssessRequest, store: Store) -> list[Chain]:
    """Return the chains in question, the one that is up now among them."""
    asked: Sequence[str | Chain]
    asked = request.chains if request.chains is not None else [str(one["name"]) for one in store.list_chains()]
    chains = [one if isinstance(one, Chain) else stored_chain(store, one) for one in asked]
    names = [chain.name for chain in chains]
    for name in names:
        if names.count(name) > 1:
            raise RequestError(
                f'two chains are named "{name}": give each its own name',
                field="chains",
                allowed="different names",
            )
    if request.now not in (None, NOTHING, *names):
        chains.insert(0, stored_chain(store, str(request.now)))
    if not chains:
        raise RequestError(
            "no chain is stored and none came with the request: name or describe at least one", field="chains"
        )
    currencies = sorted({chain.currency for chain in chains})
    if len(currencies) > 1:
        raise RequestError(
            f"the chains are priced in {', '.join(currencies)}: use one currency to compare them",
            field="chains",
            allowed="one currency",
        )
    return chains


def _wanted_ids(request: AssessRequest, store: Store) -> list[str]:
    """Return the wanted multiplexes, given by id or by name."""
    if request.wanted is None:
        return []
    known = store.multiplexes()
    by_name = {multiplex.name: multiplex.id for multiplex in known.values()}
    ids = []
    for one in request.wanted:
        if one not in known and one not in by_name:
            names = ", ".join(f"{m.id} ({m.name})" for m in list(known.values())[:20])
            raise RequestError(f'multiplex "{one}" is not known: use one of {names}', field="wanted", allowed=names)
        ids.append(one if one in known else by_name[one])
    return list(dict.fromkeys(ids))


def _for_each(chains: Sequence[Chain], work: Callable[[Chain], T]) -> dict[str, T]:
    """Return what work makes of each chain, by name: side by side, as numpy lets several cores at it."""
    with ThreadPoolExecutor(min(len(chains), os.cpu_count() or 1)) as pool:
        return {chain.name: made for chain, made in zip(chains, pool.map(work, chains), strict=True)}


def _outcome(turned: Turned, air: Air, multiplexes: Sequence[str]) -> Outcome:
    draws, chance = multiplex_chances(turned, air, multiplexes)
    # Judged as they are written, so that what is gained, lost or wanted fits the grades beside it.
    chance = np.array([probability(one) for one in chance])
    return Outcome(turned.chain.name, turned.chain, draws, chance, turned.held_back_by(air, multiplexes))


def _verdicts(
    request: AssessRequest,
    chains: Sequence[Chain],
    outcomes: dict[str, Outcome],
    multiplexes: Sequence[str],
    chosen: Sequence[str],
    assumptions: Assumptions,
    readables: Sequence[Readable],
) -> list[Verdict]:
    """Return the verdict on every candidate, best first."""
    if not outcomes:
        return []
    in_question = [outcomes[chain.name] for chain in chains]
    if request.now == NOTHING:
        baseline = nothing(len(multiplexes))
        compared = [baseline, *in_question]
    else:
        baseline = outcomes[request.now or chains[0].name]
        compared = in_question
    present = [one for one in chosen if one in multiplexes]
    wanted = present if chosen else wanted_multiplexes(multiplexes, compared)
    return ranked(
        [
            compare(
                candidate,
                baseline,
                in_question,
                multiplexes,
                wanted,
                assumptions.value("worth_per_multiplex"),
                baseline_is_up=request.now is not None,
                readables=readables,
                reading_cost=assumptions.value("reading_cost"),
            )
            for candidate in in_question
            if candidate is not baseline
        ]
    )
