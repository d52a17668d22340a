"""The cheapest chain that does: what a list of parts with prices can make, price against multiplexes.

Sensible chains only: each aerial alone or with each masthead amplifier, the amplifier with or without each filter
ahead of it; the cheapest feeder long enough of each cable; the cheapest splitter with enough ports; the outlets for
sale, and where there are too few, outlets at no price. Kept are those that no cheaper chain equals: the Pareto front.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path
from typing import Any

import numpy as np

from app.air import Air
from app.air_at import air_at
from app.assumptions import Assumptions
from app.chain.document import chain_to_document
from app.chain.parts import (
    Aerial,
    Chain,
    Feeder,
    Filter,
    MastheadAmplifier,
    Outlet,
    Part,
    PowerInserter,
    Receiver,
    Splitter,
)
from app.chain.powering import as_powered
from app.chain_file import stored_parts
from app.errors import ChainError, RequestError
from app.mapped import settled
from app.margins import Turned, multiplex_chances, turn
from app.request import AssessRequest
from app.site import site_of
from app.stored_chains import stored_chain
from app.transmitters.store import Store
from app.verdict import LIMIT_WORDS
from terrain.mosaic import Ground

MOST_CHAINS = 300  # tried; more parts than that are asked to be sorted out first
LEAST_STEP = 0.05  # expected multiplexes: a dearer chain must bring more than this
MEND = "keep a chain that has one with its price, or `gainworth chains import FILE` with [[parts]]"
MOVED = 0.1  # a chance that rises by more is named


@dataclass(frozen=True, slots=True)
class Wish:
    """What the chain has to be."""

    outlets: int = 1
    feeder_m: float = 15.0
    labour_price: float = 0.0
    visit_price: float = 0.0
    currency: str = "EUR"

    def __post_init__(self) -> None:
        """Refuse what nobody can build."""
        if not 1 <= self.outlets <= 64:
            raise RequestError(f"{self.outlets} outlets: use 1 to 64", field="outlets", allowed="1 to 64")
        for key, most in (("feeder_m", 1000.0), ("labour_price", 1e6), ("visit_price", 1e6)):
            value = getattr(self, key)
            if not (np.isfinite(value) and 0 <= value <= most):
                raise RequestError(f"{key} {value:g} is not possible: use 0 to {most:g}", field=key)


@dataclass(frozen=True, slots=True)
class Tried:
    """One chain of the list, and what it brings."""

    chain: Chain
    price: float
    expected_count: float
    chance: np.ndarray[Any, np.dtype[np.float64]]  # (m,)
    turned: Turned


def cheapest_document(
    request: AssessRequest,
    wish: Wish,
    store: Store,
    ground: Ground,
    today: date | None = None,
    refractivity_maps: Path | None = None,
) -> dict[str, Any]:
    """Answer with the Pareto front of price against expected multiplexes at a roof, from the stored parts.

    Raises
    ------
    ChainError
        No part for sale, or none of a kind that every chain needs.
    AppError, TerrainError
        The roof is not possible.
    """
    parts = parts_for_sale(store)
    chains = list(sensible_chains(parts, wish))
    assumptions = Assumptions({**request.assumptions, **request.stated_values})
    request, _ = settled(request, ground)
    site_of(request.roof, ground)
    air = air_at(request, request.roof, store, ground, assumptions, today, refractivity_maps).air
    multiplexes = sorted(set(air.multiplex_of))
    counted = [name for name in request.wanted or multiplexes if name in multiplexes]
    tried = [_tried(chain, air, request, multiplexes, counted, assumptions) for chain in chains] if air.fields else []
    front = pareto(tried)
    known = store.multiplexes()
    names = [known[one].name if one in known else one for one in multiplexes]
    worth = assumptions.value("worth_per_multiplex")
    return {
        "tried": len(tried),
        "multiplexes": len(multiplexes),
        "worth_per_multiplex": worth,
        "left_out": sorted(part.name for part in parts if part.price is None),
        "currency": wish.currency,
        "front": [
            {
                "chain": chain_to_document(one.chain),
                "price": one.price,
                "expected_count": round(one.expected_count, 3),
                "pointing_deg": one.turned.pointing_deg,
                "price_per_extra": None if (each := price_per_extra(before, one)) is None else round(each, 2),
                "pays": pays(before, one, worth),
                "reason": reason(before, one, air, names),
            }
            for before, one in zip([None, *front], front, strict=False)
        ],
    }


def parts_for_sale(store: Store) -> tuple[Part, ...]:
    """Stored parts with their prices; where none is stored, the priced parts of the stored chains, each once."""
    if sold := stored_parts(store):
        return sold
    chains = [stored_chain(store, str(one["id"])) for one in store.list_chains()]
    known = {part.id: part for chain in reversed(chains) for part in chain.parts if part.price is not None}
    return tuple(known.values())


def sensible_chains(parts: Sequence[Part], wish: Wish) -> Iterator[Chain]:
    """Every sensible chain of the priced parts of a list."""
    sold = [part for part in parts if part.price is not None]
    aerials = [part for part in sold if isinstance(part, Aerial)]
    amplifiers = [part for part in sold if isinstance(part, MastheadAmplifier)]
    filters = [part for part in sold if isinstance(part, Filter)]
    inserters = sorted((part for part in sold if isinstance(part, PowerInserter)), key=_price)
    feeders = _feeders(sold, wish)
    splitters = _splitter(sold, wish)
    if not aerials:
        raise ChainError(f"no aerial is for sale: {MEND}", field="parts")
    stocked = [part for part in sold if isinstance(part, Outlet)][: wish.outlets]
    heads: list[tuple[Part, ...]] = [()]
    heads += [(amplifier,) for amplifier in amplifiers]
    heads += [(one, amplifier) for one, amplifier in itertools.product(filters, amplifiers)]
    count = len(aerials) * len(heads) * len(feeders)
    if count > MOST_CHAINS:
        raise ChainError(
            f"the parts for sale make {count} chains: leave out some, {MOST_CHAINS} are tried at most", field="parts"
        )
    for number, (aerial, head, feeder) in enumerate(itertools.product(aerials, heads, feeders), 1):
        needs = any(part.draws_ma is not None for part in head)
        if needs and not inserters:
            continue
        supply = (inserters[0],) if needs else ()
        unpriced = [
            Outlet(id=f"outlet-{n}", name=f"Outlet {n}", price=0, loss_db=1.0) for n in range(1, wish.outlets + 1)
        ]
        outlets = [*stocked, *unpriced[len(stocked) :]]
        set_behind = Receiver(id="set", name="Television set")
        words = [aerial.name, *(part.name for part in head), feeder.name]
        yield Chain(
            name=f"cheapest-{number}",
            title=", ".join(words)[:110],
            parts=(aerial, *head, feeder, *supply, *splitters, *outlets, set_behind),
            currency=wish.currency,
            labour_price=wish.labour_price,
            visit_price=wish.visit_price,
        )


def _price(part: Part) -> float:
    return float(part.price or 0)


def _feeders(sold: Sequence[Part], wish: Wish) -> list[Feeder]:
    """Return the cheapest feeder of each cable that is long enough."""
    long_enough = [part for part in sold if isinstance(part, Feeder) and part.length_m >= wish.feeder_m]
    if not long_enough:
        raise ChainError(f"no feeder of {wish.feeder_m:g} m or more is for sale: {MEND}", field="parts")
    cables = dict.fromkeys(part.cable for part in long_enough)
    return [min((part for part in long_enough if part.cable == cable), key=_price) for cable in cables]


def _splitter(sold: Sequence[Part], wish: Wish) -> tuple[Splitter, ...]:
    if wish.outlets == 1:
        return ()
    fit = [part for part in sold if isinstance(part, Splitter) and part.ports >= wish.outlets]
    if not fit:
        raise ChainError(f"no splitter with {wish.outlets} ports or more is for sale: {MEND}", field="parts")
    return (min(fit, key=lambda part: (part.ports, _price(part))),)


def _tried(
    chain: Chain,
    air: Air,
    request: AssessRequest,
    multiplexes: Sequence[str],
    counted: Sequence[str],
    assumptions: Assumptions,
) -> Tried:
    turned = turn(as_powered(chain), air, request.roof, counted, assumptions)
    _, chance = multiplex_chances(turned, air, multiplexes)
    count = float(sum(chance[multiplexes.index(name)] for name in counted))
    return Tried(chain, float(chain.price or 0), count, chance, turned)


def pareto(tried: Sequence[Tried]) -> list[Tried]:
    """Return the chains that bring more than every cheaper one, cheapest first."""
    front: list[Tried] = []
    for one in sorted(tried, key=lambda one: (one.price, -one.expected_count)):
        if not front or one.expected_count > front[-1].expected_count + LEAST_STEP:
            front.append(one)
    return front


def price_per_extra(before: Tried | None, after: Tried) -> float | None:
    """What each multiplex costs that a chain of the front brings more than the one before; of the first, each."""
    extra = after.expected_count - (before.expected_count if before else 0.0)
    return (after.price - (before.price if before else 0.0)) / extra if extra > 0 else None


def pays(before: Tried | None, after: Tried, worth_per_multiplex: float) -> bool:
    """Whether what a chain brings more than the one before is worth what it costs more."""
    each = price_per_extra(before, after)
    return each is not None and each < worth_per_multiplex


def reason(before: Tried | None, after: Tried, air: Air, names: Sequence[str]) -> str:
    """Say what the step from one chain of the front to the next brings and why; `names` of the multiplexes."""
    if before is None:
        return f"The cheapest that can be built: about {after.expected_count:.1f} multiplexes."
    had = {part.id for part in before.chain.parts}
    has = {part.id for part in after.chain.parts}
    new = [part.name for part in after.chain.parts if part.id not in had]
    gone = [part.name for part in before.chain.parts if part.id not in has]
    swap = " and ".join(new) or "less"
    instead = f" for {' and '.join(gone)}" if gone else ""
    rise = after.chance - before.chance
    risen = [m for m in range(len(names)) if rise[m] > MOVED]
    limits = before.turned.held_back_by(air, sorted(set(air.multiplex_of)))
    why = (
        ", ".join(f"{names[m]} (held back by {LIMIT_WORDS.get(limits[m], limits[m])})" for m in risen)
        or "a little of each"
    )
    extra = after.expected_count - before.expected_count
    each = f"{price_per_extra(before, after):.0f} {after.chain.currency} each"
    return f"{swap}{instead}: {extra:.1f} more, {each}: {why}."
