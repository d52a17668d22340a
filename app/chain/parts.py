"""The chain: what hangs between the air and the sets. Its parts are taken from here too.

A chain is a tree: aerials → filter → masthead amplifier → feeder → power inserter → launch amplifier →
splitters, taps, attenuators, equalisers → feeder → outlets → fly lead → set. A plain list of parts is its
simplest form: each part is fed by the one before, and after an outlet by the nearest splitter or tap with a
free port. The receiver at the end stands for the set behind every outlet that has none of its own.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

from app.chain.aerial_part import AERIAL_POLARISATIONS, Aerial, AerialPolarisation
from app.chain.base import Part, one_of, refuse, within, words
from app.chain.kinds import (
    Amplifier,
    Attenuator,
    Combiner,
    Equaliser,
    Feeder,
    Filter,
    FlyLead,
    LaunchAmplifier,
    MastheadAmplifier,
    MastTube,
    Outlet,
    PowerInserter,
    Receiver,
    Splitter,
    Switch,
    Tap,
)
from app.chain.tree import Tree, tree_of
from app.errors import ChainError

__all__ = [
    "AERIAL_POLARISATIONS",
    "Aerial",
    "AerialPolarisation",
    "Amplifier",
    "Attenuator",
    "Chain",
    "Combiner",
    "Equaliser",
    "Feeder",
    "Filter",
    "FlyLead",
    "LaunchAmplifier",
    "MastTube",
    "MastheadAmplifier",
    "Outlet",
    "Part",
    "PowerInserter",
    "Receiver",
    "Splitter",
    "Switch",
    "Tap",
]


RESERVED_NAME = "nothing"
MOST_PARTS = 400
LONGEST_RUN_M = 2000.0


@dataclass(frozen=True, slots=True)
class Chain:
    """Everything from the aerial to the outlets."""

    name: str  # short, as the command line and the store use it
    parts: tuple[Part, ...]
    currency: str = "EUR"
    labour_price: float | None = None  # None: not known
    visit_price: float | None = None
    already_up: bool = False  # is on the roof now, so it costs nothing
    pointing_deg: float | None = None  # true bearing; None: the best one is looked for
    polarisation: AerialPolarisation | None = None  # as mounted; None: the better one is looked for
    title: str = ""  # for people; empty: the name
    deciding_outlet: str = ""  # name of the outlet that decides; empty: every outlet counts
    tree: Tree = field(init=False, compare=False, repr=False)

    def __post_init__(self) -> None:
        """Refuse parts in an order that no signal can pass, and an impossible frame."""
        object.__setattr__(self, "parts", tuple(self.parts))
        if not self.name.strip():
            raise ChainError("the chain has no name: give it a short one", field="name")
        if self.name.strip().lower() == RESERVED_NAME:
            raise ChainError(
                f'no chain may be called "{self.name}": the word means that no aerial is up; give it another name',
                field="name",
            )
        if len(self.parts) > MOST_PARTS:
            raise ChainError(
                f'chain "{self.name}" has {len(self.parts)} parts: use at most {MOST_PARTS}',
                field="parts",
                allowed=f"at most {MOST_PARTS}",
            )
        if not self.currency.strip():
            raise ChainError(f'chain "{self.name}" has no currency: give one such as EUR', field="currency")
        for key in ("name", "title", "currency", "deciding_outlet"):
            words(self, key, getattr(self, key))
        for key in ("labour_price", "visit_price"):
            value = getattr(self, key)
            if value is not None:
                within(self, key, value, 0, 1e9, "or leave it out if it is not known")
        if self.pointing_deg is not None:
            within(self, "pointing_deg", self.pointing_deg, 0, 360, "degrees from true north")
        if self.polarisation is not None:
            one_of(self, "polarisation", self.polarisation, AERIAL_POLARISATIONS)
            if self.parts and isinstance(self.parts[0], Aerial):
                self.parts[0].check_mounting(self.polarisation)
        object.__setattr__(self, "tree", tree_of(self, self.parts))
        if self.deciding_outlet:
            self._outlet(self.deciding_outlet)
        self._check_lengths()

    def _check_lengths(self) -> None:
        """Refuse a run of feeder on whose way nothing is left of a signal."""
        for name in self.outlet_names:
            runs = [self.run_to(name, aerial.id) for aerial in self.aerials]
            for run in runs:
                length_m = sum(part.length_m for part in run if isinstance(part, Feeder))
                if length_m > LONGEST_RUN_M:
                    refuse(
                        self,
                        f'has {length_m:g} m of feeder on the way to "{name}"',
                        f"use at most {LONGEST_RUN_M:g} m",
                        "parts",
                    )

    @property
    def aerial(self) -> Aerial:
        """The first aerial: the one that the chain's pointing is of."""
        return self.aerials[0]

    @property
    def aerials(self) -> tuple[Aerial, ...]:
        """Every aerial, in order."""
        return tuple(part for part in self.parts if isinstance(part, Aerial))

    @property
    def receiver(self) -> Receiver:
        """The set behind the first outlet; the same for all unless outlets have their own."""
        return self.tree.sets[self.outlet_names[0]]

    @property
    def outlet_names(self) -> tuple[str, ...]:
        """Names of the outlets, in order."""
        return tuple(part.name for part in self.parts if isinstance(part, Outlet))

    @property
    def deciding_outlets(self) -> tuple[str, ...]:
        """Names of the outlets at which a multiplex must be receivable."""
        return (self.deciding_outlet,) if self.deciding_outlet else self.outlet_names

    @property
    def part_ids_of_feeders(self) -> tuple[str, ...]:
        """Ids of the feeders, in order: what an error of feeder and joints belongs to."""
        return tuple(part.id for part in self.parts if isinstance(part, Feeder))

    def run_to(self, outlet: str, aerial: str | None = None) -> tuple[Part, ...]:
        """Return the parts behind an aerial (by id; None: the first) on the way to one outlet, with it.

        Empty if that aerial does not feed the outlet.
        """
        wanted = aerial or self.aerial.id
        found = self._up(self._outlet(outlet).id, wanted)
        return tuple(self.tree.part(ident) for ident in reversed(found[:-1])) if found else ()

    def _up(self, ident: str, aerial: str) -> list[str]:
        """Return ids from a part up to an aerial, both with it; empty if the aerial does not feed it."""
        if ident == aerial:
            return [ident]
        for above in self.tree.fed_by[ident]:
            if rest := self._up(above, aerial):
                return [ident, *rest]
        return []

    def _outlet(self, name: str) -> Outlet:
        for part in self.parts:
            if isinstance(part, Outlet) and part.name == name:
                return part
        refuse(self, f'has no outlet "{name}"', f"use one of {', '.join(self.outlet_names)}", "outlet")

    @property
    def parts_price(self) -> float | None:
        """Price of all parts; None if one is missing."""
        return _sum(part.price for part in self.parts)

    @property
    def price(self) -> float | None:
        """Parts, labour and visit; 0 for what is already up; None if one of them is missing."""
        if self.already_up:
            return 0.0
        return _sum((self.parts_price, self.labour_price, self.visit_price))


def _sum(prices: Iterable[float | None]) -> float | None:
    total = 0.0
    for price in prices:
        if price is None:
            return None
        total += price
    return total
