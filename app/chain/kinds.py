"""Kinds of parts behind the aerial, each with what it may be."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import ClassVar

from app.chain.base import Part, refuse, rising, within
from app.chain.tables import CABLES, SPLITTERS
from app.errors import ChainError


@dataclass(frozen=True, slots=True, kw_only=True)
class Amplifier(Part):
    """What amplifiers have in common."""

    gain_db: float
    noise_figure_db: float
    rated_output_dbuv: float | None = None  # two carriers, third-order products 60 dB down
    powered: bool = True  # False: its supply has failed or does not reach it
    unpowered_loss_db: float = 25.0  # what still leaks through then; common practice, no source

    def __post_init__(self) -> None:
        """Refuse an amplifier that no physics allows."""
        Part.__post_init__(self)
        within(self, "gain_db", self.gain_db, 0, 60, "dB")
        within(self, "noise_figure_db", self.noise_figure_db, 0, 20, "dB")
        within(self, "unpowered_loss_db", self.unpowered_loss_db, 0, 100, "dB")
        if self.rated_output_dbuv is not None:
            within(self, "rated_output_dbuv", self.rated_output_dbuv, 60, 140, "dB(µV) across 75 ohms")


@dataclass(frozen=True, slots=True, kw_only=True)
class MastheadAmplifier(Amplifier):
    """An amplifier close to the aerial."""

    kind: ClassVar[str] = "masthead-amplifier"


@dataclass(frozen=True, slots=True, kw_only=True)
class LaunchAmplifier(Amplifier):
    """An amplifier indoors, ahead of the splitters or taps."""

    kind: ClassVar[str] = "launch-amplifier"


@dataclass(frozen=True, slots=True, kw_only=True)
class Feeder(Part):
    """A length of coaxial cable."""

    kind: ClassVar[str] = "feeder"

    passes_dc: bool = True
    cable: str  # a class of the table of cables
    length_m: float

    def __post_init__(self) -> None:
        """Refuse a cable that the table does not hold, and an impossible length."""
        Part.__post_init__(self)
        if self.cable not in CABLES:
            listed = ", ".join(CABLES)
            raise ChainError(
                f'{self.kind} "{self.name}": cable "{self.cable}" is not known: use {listed}',
                field="cable",
                allowed=listed,
            )
        within(self, "length_m", self.length_m, 0, 1000, "m")


@dataclass(frozen=True, slots=True, kw_only=True)
class FlyLead(Feeder):
    """The lead from the outlet to the set."""

    kind: ClassVar[str] = "fly-lead"


@dataclass(frozen=True, slots=True, kw_only=True)
class Filter(Part):
    """Lets a band pass: against mobile networks, FM radio or one strong channel."""

    kind: ClassVar[str] = "filter"

    loss_db: tuple[tuple[float, float], ...]  # (frequency_mhz, loss), straight lines between, ends held

    def __post_init__(self) -> None:
        """Refuse a curve of one point or a filter that amplifies."""
        Part.__post_init__(self)
        rising(self, "loss_db", self.loss_db, "[frequency_mhz, loss_db]", (1, 6000, "MHz"), "loss")
        for _, loss_db in self.loss_db:
            within(self, "loss_db: loss", loss_db, 0, 100, "dB")


@dataclass(frozen=True, slots=True, kw_only=True)
class Attenuator(Part):
    """Takes the same from every frequency."""

    kind: ClassVar[str] = "attenuator"

    loss_db: float

    def __post_init__(self) -> None:
        """Refuse an attenuator that amplifies."""
        Part.__post_init__(self)
        within(self, "loss_db", self.loss_db, 0, 60, "dB")


@dataclass(frozen=True, slots=True, kw_only=True)
class Equaliser(Part):
    """Takes more from low frequencies, as cable takes more from high ones."""

    kind: ClassVar[str] = "equaliser"

    slope_db: float  # taken at low_mhz more than at high_mhz
    loss_db: float = 1.0  # at high_mhz and above
    low_mhz: float = 470.0
    high_mhz: float = 694.0

    def __post_init__(self) -> None:
        """Refuse a slope the wrong way."""
        Part.__post_init__(self)
        within(self, "slope_db", self.slope_db, 0, 40, "dB")
        within(self, "loss_db", self.loss_db, 0, 20, "dB")
        within(self, "low_mhz", self.low_mhz, 1, 6000, "MHz")
        within(self, "high_mhz", self.high_mhz, 1, 6000, "MHz")
        if self.high_mhz <= self.low_mhz:
            refuse(self, f"high_mhz {self.high_mhz:g} is not above low_mhz", "swap them", "high_mhz")


@dataclass(frozen=True, slots=True, kw_only=True)
class PowerInserter(Part):
    """Puts the supply of amplifiers on the feeder."""

    kind: ClassVar[str] = "power-inserter"

    passes_dc: bool = True
    supply_v: float
    most_ma: float
    loss_db: float = 0.5

    def __post_init__(self) -> None:
        """Refuse a supply that gives nothing or is no safe low voltage."""
        Part.__post_init__(self)
        within(self, "supply_v", self.supply_v, 1, 60, "V, safety extra-low voltage")
        within(self, "most_ma", self.most_ma, 1, 5000, "mA")
        within(self, "loss_db", self.loss_db, 0, 20, "dB")


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
class Tap(Part):
    """Takes a little for its ports and lets the rest through to the next floor."""

    kind: ClassVar[str] = "tap"

    tap_loss_db: float  # to each tapped port
    through_loss_db: float
    ports: int = 1

    def __post_init__(self) -> None:
        """Refuse a tap that gives more than it gets."""
        Part.__post_init__(self)
        within(self, "ports", self.ports, 1, 8, "ports")
        within(self, "tap_loss_db", self.tap_loss_db, 1, 40, "dB to each port")
        within(self, "through_loss_db", self.through_loss_db, 0, 20, "dB")
        shares = self.ports * 10 ** (-self.tap_loss_db / 10) + 10 ** (-self.through_loss_db / 10)
        if shares > 1 + 1e-9:
            refuse(
                self,
                f"gives out {shares:.2f} of what it gets",
                "use a larger tap_loss_db or through_loss_db",
                "through_loss_db",
            )


@dataclass(frozen=True, slots=True, kw_only=True)
class Combiner(Part):
    """Adds the signals of two or more aerials."""

    kind: ClassVar[str] = "combiner"

    loss_db: float = 4.0  # from each input; a same-band hybrid, common practice
    bands_mhz: tuple[tuple[float, float], ...] = ()  # of each input, in order; empty: all take everything
    rejection_db: float = 20.0  # of an input outside its band

    def __post_init__(self) -> None:
        """Refuse a combiner that gives more than it gets."""
        Part.__post_init__(self)
        within(self, "rejection_db", self.rejection_db, 3, 80, "dB")
        within(self, "loss_db", self.loss_db, 0, 40, "dB")
        for low, high in self.bands_mhz:
            within(self, "bands_mhz", low, 0, 20000, "MHz")
            within(self, "bands_mhz", high, low, 20000, "MHz")


@dataclass(frozen=True, slots=True, kw_only=True)
class Switch(Part):
    """Lets through one of several aerials at a time."""

    kind: ClassVar[str] = "switch"

    loss_db: float = 1.0

    def __post_init__(self) -> None:
        """Refuse a switch that amplifies."""
        Part.__post_init__(self)
        within(self, "loss_db", self.loss_db, 0, 40, "dB")


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
    """The set behind every outlet, or behind one."""

    kind: ClassVar[str] = "receiver"

    price: float | None = 0.0  # it stands there already
    noise_figure_db: float | None = None  # None: the planning value of the system received
    most_total_dbuv: float | None = None  # level of everything together that it stands; None: assumption

    def __post_init__(self) -> None:
        """Refuse a set that no physics allows."""
        Part.__post_init__(self)
        if self.noise_figure_db is not None:
            within(self, "noise_figure_db", self.noise_figure_db, 0, 30, "dB")
        if self.most_total_dbuv is not None:
            within(self, "most_total_dbuv", self.most_total_dbuv, 60, 130, "dB(µV) across 75 ohms")


@dataclass(frozen=True, slots=True, kw_only=True)
class MastTube(Part):
    """The tube that carries the aerials, with its brackets; no signal passes it."""

    kind: ClassVar[str] = "mast"

    diameter_mm: float
    wall_mm: float
    free_m: float  # from the upper clamp to the top
    clamped_m: float  # between the clamps
    bracket_n: float | None = None  # what its maker lets one bracket carry

    def __post_init__(self) -> None:
        """Refuse a tube that is none."""
        Part.__post_init__(self)
        within(self, "diameter_mm", self.diameter_mm, 10, 200, "mm")
        within(self, "wall_mm", self.wall_mm, 0.5, self.diameter_mm / 2, "mm")
        within(self, "free_m", self.free_m, 0, 20, "m")
        within(self, "clamped_m", self.clamped_m, 0.1, 10, "m between the clamps")
        if self.bracket_n is not None:
            within(self, "bracket_n", self.bracket_n, 1, 1e6, "N")


def tapped_ports(part: Part) -> int:
    """How many parts a part may feed; the way on through a tap not counted."""
    return part.ports if isinstance(part, Splitter | Tap) else 1
