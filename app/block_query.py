"""A block of flats at a roof: what arrives there, and the chain proposed for it."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from pathlib import Path
from typing import Any

import numpy as np

from app.air_at import air_at
from app.assumptions import Assumptions
from app.chain.block import Answers, Arriving, propose
from app.chain.document import chain_to_document
from app.chain.parts import Aerial, Chain, Outlet, Receiver
from app.chain.windows import DEFAULT_STANDARD, level_window
from app.chain_file import stored_parts
from app.chain_notes import unused_ports
from app.errors import ChainError
from app.link_budget import hear
from app.mapped import settled
from app.margins import turn
from app.request import AssessRequest
from app.site import site_of
from app.stored_chains import stored_chain
from app.transmitters.store import Store
from app.verdict import HAVE
from terrain.mosaic import Ground

LEAST_DBUV, MOST_DBUV = 0.0, 200.0  # window where a standard says nothing of a system


@dataclass(frozen=True, slots=True)
class BlockQuestion:
    """The four answers, with the aerial by its id among parts and chains."""

    outlets: int
    layout: str
    longest_m: float
    shortest_m: float
    aerial: str
    standard: str = DEFAULT_STANDARD
    name: str = "block"


def block_document(
    request: AssessRequest,
    question: BlockQuestion,
    store: Store,
    ground: Ground,
    today: date | None = None,
    refractivity_maps: Path | None = None,
) -> dict[str, Any]:
    """Propose a chain for a block at a roof, its aerial turned its best way.

    Raises
    ------
    ChainError
        No such aerial, no channel likely received there, or answers that describe no block.
    AppError, TerrainError
        The roof is not possible.
    """
    aerial = _aerial(question.aerial, store)
    answers = Answers(
        question.outlets,
        question.layout,  # type: ignore[arg-type]  # Answers checks the word
        question.longest_m,
        question.shortest_m,
        aerial,
    )
    assumptions = Assumptions(request.assumptions)
    request, _ = settled(request, ground)
    site_of(request.roof, ground)
    air = air_at(request, request.roof, store, ground, assumptions, today, refractivity_maps).air
    multiplexes = sorted(set(air.multiplex_of))
    direct = Chain("direct", (aerial, Outlet(id="outlet", name="outlet"), Receiver(id="set", name="set")))
    if not air.fields:
        raise ChainError("block of flats: nothing is on the air in reach: choose another roof", field="roof")
    turned = turn(direct, air, request.roof, multiplexes, assumptions)
    likely = np.flatnonzero(turned.chance >= HAVE)
    heard = hear(direct, air.signals, air.used_dbuv_m, turned.pointing_deg, turned.polarisation, assumptions)
    emissions = [air.fields[e].emission for e in likely]
    windows = [level_window(one.system, one.mode, question.standard) for one in emissions]
    arriving = Arriving(
        air.signals.frequency_mhz[likely],
        np.array([one.bandwidth_mhz for one in emissions]),
        heard.level_dbuv[aerial.id][likely],
        np.array([LEAST_DBUV if one is None else one.lowest_dbuv for one in windows]),
        np.array([MOST_DBUV if one is None else one.highest_dbuv for one in windows]),
    )
    made = propose(answers, arriving, question.name)
    return {
        "chain": chain_to_document(made.chain),
        "pointing_deg": turned.pointing_deg,
        "polarisation": turned.polarisation,
        "standard": question.standard,
        "channels": [one.channel or f"{one.frequency_mhz:g} MHz" for one in emissions],
        "outlets": [
            {"name": name, "lowest_dbuv": round(float(row.min()), 1), "highest_dbuv": round(float(row.max()), 1)}
            for name, row in zip(made.chain.outlet_names, made.level_dbuv, strict=True)
        ],
        "findings": [*made.findings, *unused_ports(made.chain)],
    }


def _aerial(wanted: str, store: Store) -> Aerial:
    """Return an aerial by its id, or by the name of a stored chain that has it."""
    sold = [part for part in stored_parts(store) if isinstance(part, Aerial)]
    chains = {str(one["name"]): stored_chain(store, str(one["id"])) for one in store.list_chains()}
    known = {chain.aerial.id: chain.aerial for chain in chains.values()} | {aerial.id: aerial for aerial in sold}
    if wanted in known:
        return known[wanted]
    if wanted in chains:
        return chains[wanted].aerial
    listed = ", ".join(dict.fromkeys([*known, *chains]))
    raise ChainError(f'aerial "{wanted}" is not stored: use one of {listed}', field="aerial", allowed=listed)
