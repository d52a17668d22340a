"""What hangs between the air and the sets: the parts of a chain, and the chain.

A chain is an ordered list. Without a splitter it is one run: aerial, …, outlet, receiver. After a
splitter each run up to the next outlet is one branch: aerial, …, splitter, [feeder,] outlet, [feeder,]
outlet, …, receiver. The receiver at the end stands for the set behind every outlet.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Collection, Iterable
from dataclasses import dataclass
from typing import ClassVar, Literal, NoReturn

from app.chain.tables import CABLES, SPLITTERS
from app.errors import ChainError

AerialPolarisation = Literal["horizontal", "vertical"]
AERIAL_POLARISATIONS: tuple[AerialPolarisation, ...] = ("horizontal", "vertical")
PATTERNS = ("class", "dipole")
PLACES = ("roof", "loft")


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """One thing that is bought and mounted. Its errors go with its id."""

    kind: ClassVar[str] = "part"

    id: str  # the same in two chains: the same thing, kept when one replaces the other
    name: str
    price: float | None = None  # in the chain's currency; None: not known

    def __post_init__(self) -> None:
        """Refuse a part without an id or a name, or with an impossible price."""
        for key in ("id", "name"):
            if not getattr(self, key).strip():
                refuse(self, f"{key} is empty", f"give it a short {key}", key)
        if self.price is not None:
            within(self, "price", self.price, 0, 1e9, "or leave it out if it is not known")


@dataclass(frozen=True, slots=True, kw_only=True)
class Aerial(Part):
    """The antenna on the roof or in the loft."""

    kind: ClassVar[str] = "aerial"

    gain_dbd: tuple[tuple[float, float], ...]  # (frequency_mhz, gain over a half-wave dipole), rising
    beamwidth_deg: float  # between the half-power points, horizontally; 360: round
    front_to_back_db: float  # how far the pattern falls at most; 0: round, or a dipole
    pattern: Literal["class", "dipole"] = "class"
    polarisation: AerialPolarisation | None = None  # None: may be mounted either way
    place: Literal["roof", "loft"] = "roof"
    measured: bool = True  # False: own build whose gain nobody measured

    def __post_init__(self) -> None:
        """Refuse a gain table or a pattern that describes no aerial."""
        Part.__post_init__(self)
        one_of(self, "pattern", self.pattern, PATTERNS)
        one_of(self, "place", self.place, PLACES)
        if self.polarisation is not None:
            one_of(self, "polarisation", self.polarisation, AERIAL_POLARISATIONS)
        self._check_gain()
        within(self, "beamwidth_deg", self.beamwidth_deg, 1, 360, "degrees between the half-power points")
        within(self, "front_to_back_db", self.front_to_back_db, 0, 60, "dB")
        if self.pattern == "class":
            if self.beamwidth_deg == 360 and self.front_to_back_db != 0:
                refuse(
                    self,
                    "a beamwidth of 360 degrees means round",
                    "set front_to_back_db to 0",
                    "front_to_back_db",
                )
            if self.beamwidth_deg < 360 and self.front_to_back_db <= 3:
                refuse(
                    self,
                    f"front_to_back_db {self.front_to_back_db:g} leaves no half-power beamwidth",
                    'use more than 3 dB, pattern "dipole", or a beamwidth of 360 degrees for a round one',
                    "front_to_back_db",
                )

    def _check_gain(self) -> None:
        count = len(self.gain_dbd)
        if count < 2:
            came = "is empty" if count == 0 else "has one point"
            refuse(
                self,
                f"the gain table {came}",
                "give at least two pairs [frequency_mhz, gain_dbd]",
                "gain_dbd",
            )
        for frequency_mhz, gain_dbd in self.gain_dbd:
            within(self, "gain_dbd: frequency", frequency_mhz, 30, 6000, "MHz")
            within(self, "gain_dbd: gain", gain_dbd, -40, 40, "dBd")
        frequencies = [pair[0] for pair in self.gain_dbd]
        for low, high in itertools.pairwise(frequencies):
            if high <= low:
                refuse(
                    self,
                    f"in the gain table {high:g} MHz follows {low:g} MHz",
                    "sort it by rising frequency",
                    "gain_dbd",
                )


@dataclass(frozen=True, slots=True, kw_only=True)
class MastheadAmplifier(Part):
    """An amplifier close to the aerial."""

    kind: ClassVar[str] = "masthead-amplifier"

    gain_db: float
    noise_figure_db: float
    rated_output_dbuv: float | None = None  # two carriers, third-order products 60 dB down

    def __post_init__(self) -> None:
        """Refuse an amplifier that no physics allows."""
        Part.__post_init__(self)
        within(self, "gain_db", self.gain_db, 0, 60, "dB")
        within(self, "noise_figure_db", self.noise_figure_db, 0, 20, "dB")
        if self.rated_output_dbuv is not None:
            within(self, "rated_output_dbuv", self.rated_output_dbuv, 60, 140, "dB(µV) across 75 ohms")


@dataclass(frozen=True, slots=True, kw_only=True)
class Feeder(Part):
    """A length of coaxial cable."""

    kind: ClassVar[str] = "feeder"

    cable: str  # a class of the table of cables
    length_m: float

    def __post_init__(self) -> None:
        """Refuse a cable that the table does not hold, and an impossible length."""
        Part.__post_init__(self)
        one_of(self, "cable", self.cable, tuple(CABLES))
        within(self, "length_m", self.length_m, 0, 1000, "m")


@dataclass(frozen=True, slots=True, kw_only=True)
class Splitter(Part):
    """Shares the signal evenly between its ports."""

    kind: ClassVar[str] = "splitter"

    ports: int
    loss_db: float | None = None  # to each port; None: by the table of splitters

    def __post_init__(self) -> None:
        """Refuse a splitter that divides by fewer than two, or whose loss nobody states."""
        Part.__post_init__(self)
        within(self, "ports", self.ports, 2, 64, "ports")
        if self.loss_db is None:
            if self.ports not in SPLITTERS:
                listed = ", ".join(str(ports) for ports in SPLITTERS)
                refuse(
                    self,
                    f"there is no table loss for {self.ports} ports",
                    f"use {listed}, or state loss_db",
                    "ports",
                )
        else:
            least = 10 * math.log10(self.ports)  # even shares of the power
            within(self, "loss_db", self.loss_db, math.floor(least * 100) / 100, 40, "dB to each port")


@dataclass(frozen=True, slots=True, kw_only=True)
class Outlet(Part):
    """The socket in the wall; its name tells the room."""

    kind: ClassVar[str] = "outlet"

    loss_db: float = 0.0

    def __post_init__(self) -> None:
        """Refuse an outlet that amplifies."""
        Part.__post_init__(self)
        within(self, "loss_db", self.loss_db, 0, 40, "dB")


@dataclass(frozen=True, slots=True, kw_only=True)
class Receiver(Part):
    """The set behind every outlet."""

    kind: ClassVar[str] = "receiver"

    price: float | None = 0.0  # it stands there already
    noise_figure_db: float | None = None  # None: the planning value of the system received

    def __post_init__(self) -> None:
        """Refuse a set that no physics allows."""
        Part.__post_init__(self)
        if self.noise_figure_db is not None:
            within(self, "noise_figure_db", self.noise_figure_db, 0, 30, "dB")


@dataclass(frozen=True, slots=True)
class Chain:
    """Everything from the aerial to the outlets, in order."""

    name: str  # short, as the command line and the store use it
    parts: tuple[Part, ...]
    currency: str = "EUR"
    labour_price: float | None = None  # None: not known
    visit_price: float | None = None
    already_up: bool = False  # is on the roof now, so it costs nothing
    pointing_deg: float | None = None  # true bearing; None: the best one is looked for
    polarisation: AerialPolarisation | None = None  # as mounted; None: the better one is looked for
    title: str = ""  # for people; empty: the name

    def __post_init__(self) -> None:
        """Refuse parts in an order that no signal can pass, and an impossible frame."""
        object.__setattr__(self, "parts", tuple(self.parts))
        if not self.name.strip():
            raise ChainError("the chain has no name: give it a short one", field="name")
        if not self.currency.strip():
            raise ChainError(f'chain "{self.name}" has no currency: give one such as EUR', field="currency")
        for key in ("labour_price", "visit_price"):
            value = getattr(self, key)
            if value is not None:
                within(self, key, value, 0, 1e9, "or leave it out if it is not known")
        if self.pointing_deg is not None:
            within(self, "pointing_deg", self.pointing_deg, 0, 360, "degrees from true north")
        if self.polarisation is not None:
            one_of(self, "polarisation", self.polarisation, AERIAL_POLARISATIONS)
        self._check_order()

    def _check_order(self) -> None:
        if not self.parts or not isinstance(self.parts[0], Aerial):
            refuse(self, "does not begin with an aerial", "make an aerial its first part", "parts")
        if not isinstance(self.parts[-1], Receiver):
            refuse(self, "does not end with a receiver", "make a receiver its last part", "parts")
        ids = [part.id for part in self.parts]
        for part in self.parts:
            if ids.count(part.id) > 1:
                refuse(
                    part,
                    f'id "{part.id}" appears twice in chain "{self.name}"',
                    "give each part its own id",
                    "id",
                )
        for part in self.parts[1:-1]:
            if isinstance(part, Aerial | Receiver):
                refuse(part, "stands in the middle of the chain", f"keep one {part.kind} only", "parts")
        self._check_outlets()

    def _check_outlets(self) -> None:
        names = self.outlet_names
        if not names:
            refuse(self, "has no outlet", "add an outlet before the receiver", "parts")
        for name in names:
            if names.count(name) > 1:
                refuse(self, f'has two outlets named "{name}"', "name each by its room", "parts")
        if not isinstance(self.parts[-2], Outlet):
            refuse(self.parts[-2], "leads to no outlet", "put an outlet after it", "parts")
        splitters = [part for part in self.parts if isinstance(part, Splitter)]
        if len(splitters) > 1:
            refuse(splitters[1], "follows another splitter", "use one splitter with enough ports", "parts")
        if not splitters:
            if len(names) > 1:
                refuse(
                    self,
                    f"feeds {len(names)} outlets without a splitter",
                    "add one before the first outlet",
                    "parts",
                )
            return
        splitter = splitters[0]
        first = next(index for index, part in enumerate(self.parts) if isinstance(part, Outlet))
        if first < self.parts.index(splitter):
            refuse(splitter, "stands behind an outlet", "put it before the first outlet", "parts")
        if len(names) > splitter.ports:
            refuse(
                splitter,
                f"has {splitter.ports} ports and feeds {len(names)} outlets",
                "use a larger one or remove an outlet",
                "ports",
            )

    @property
    def aerial(self) -> Aerial:
        """The part that catches the field."""
        first = self.parts[0]
        assert isinstance(first, Aerial)  # by __post_init__
        return first

    @property
    def receiver(self) -> Receiver:
        """The set at the end."""
        last = self.parts[-1]
        assert isinstance(last, Receiver)  # by __post_init__
        return last

    @property
    def outlet_names(self) -> tuple[str, ...]:
        """Names of the outlets, in order."""
        return tuple(part.name for part in self.parts if isinstance(part, Outlet))

    @property
    def part_ids_of_feeders(self) -> tuple[str, ...]:
        """Ids of the feeders, in order: what an error of feeder and joints belongs to."""
        return tuple(part.id for part in self.parts if isinstance(part, Feeder))

    def run_to(self, outlet: str) -> tuple[Part, ...]:
        """Return the parts behind the aerial that the signal passes on its way to one outlet, with it."""
        if outlet not in self.outlet_names:
            refuse(self, f'has no outlet "{outlet}"', f"use one of {', '.join(self.outlet_names)}", "outlet")
        trunk: list[Part] = []
        branch: list[Part] = []
        for part in self.parts[1:]:
            branch.append(part)
            if isinstance(part, Splitter):
                trunk, branch = branch, []
            elif isinstance(part, Outlet):
                if part.name == outlet:
                    break
                branch = []
        return (*trunk, *branch)

    @property
    def parts_price(self) -> float | None:
        """Price of all parts; None if one is missing."""
        return _sum(part.price for part in self.parts)

    @property
    def price(self) -> float | None:
        """Parts, labour and visit; 0 for what is already up; None if one of them is missing."""
        return self.price_without(())

    def price_without(self, kept: Collection[str]) -> float | None:
        """Return the price if the parts with these ids are up already; None if another one is missing."""
        if self.already_up:
            return 0.0
        bought = (part.price for part in self.parts if part.id not in kept)
        return _sum((*bought, self.labour_price, self.visit_price))


def refuse(what: Part | Chain, came: str, mend: str, field: str) -> NoReturn:
    """Raise the ChainError that names the part, what is wrong with it and the mend."""
    kind = what.kind if isinstance(what, Part) else "chain"
    raise ChainError(f'{kind} "{what.name}": {came}: {mend}', field=field)


def within(what: Part | Chain, key: str, value: float, lowest: float, highest: float, unit: str) -> None:
    """Raise a ChainError unless value is a number from lowest to highest."""
    if not (math.isfinite(value) and lowest <= value <= highest):
        kind = what.kind if isinstance(what, Part) else "chain"
        raise ChainError(
            f'{kind} "{what.name}": {key} {value:g} is not possible: use {lowest:g} to {highest:g} {unit}',
            field=key,
            allowed=f"{lowest:g} to {highest:g}",
        )


def one_of(what: Part | Chain, key: str, value: str, allowed: Collection[str]) -> None:
    """Raise a ChainError unless value is one of the allowed words."""
    if value not in allowed:
        kind = what.kind if isinstance(what, Part) else "chain"
        raise ChainError(
            f'{kind} "{what.name}": {key} "{value}" is not known: use {", ".join(allowed)}',
            field=key,
            allowed=", ".join(allowed),
        )


def _sum(prices: Iterable[float | None]) -> float | None:
    total = 0.0
    for price in prices:
        if price is None:
            return None
        total += price
    return total
