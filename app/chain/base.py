"""What every part of a chain has, and how one is refused."""

from __future__ import annotations

import itertools
import math
from collections.abc import Collection
from dataclasses import dataclass
from typing import ClassVar, Literal, NoReturn, Protocol

from app.errors import ChainError

Port = Literal["", "through"]
PORTS: tuple[Port, ...] = ("", "through")
LONGEST_WORDS = 120  # of an id or name, as the store takes them


class Named(Protocol):
    """A part or a chain: a refusal calls it by its name."""

    @property
    def name(self) -> str:
        """The name people gave it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """One thing that is bought and mounted. Its errors go with its id.

    `after` says what feeds it. Left empty in a list of parts it is the part before; after an outlet it is the
    nearest splitter or tap with a free port.
    """

    kind: ClassVar[str] = "part"

    id: str  # the same in two chains: the same thing, kept when one replaces the other
    name: str
    price: float | None = None  # in the chain's currency; None: not known
    after: tuple[str, ...] = ()  # ids of what feeds it; several at a combiner or switch
    port: Port = ""  # of a tap that feeds it: "" a tapped port, "through" the way on
    passes_dc: bool = False  # lets the supply of an amplifier through
    draws_ma: float | None = None  # from a power inserter; None: nothing, or it has its own supply
    needs_v: float = 0.0  # least voltage it works with

    def __post_init__(self) -> None:
        """Refuse a part without an id or a name, or with an impossible price or supply."""
        for key in ("id", "name"):
            value = getattr(self, key)
            if not value.strip():
                refuse(self, f"{key} is empty", f"give it a short {key}", key)
            words(self, key, value)
        if "/" in self.id:  # it is part of an address
            refuse(self, f'id is "{self.id}"', "leave out the slash", "id")
        if self.price is not None:
            within(self, "price", self.price, 0, 1e9, "or leave it out if it is not known")
        if self.draws_ma is not None:
            within(self, "draws_ma", self.draws_ma, 0, 5000, "mA, or leave it out if it has its own supply")
        within(self, "needs_v", self.needs_v, 0, 60, "V")
        one_of(self, "port", self.port, PORTS)


def called(what: Named) -> str:
    """Kind and name, as a message calls it; a chain by its title."""
    return f'{getattr(what, "kind", "chain")} "{getattr(what, "title", "") or what.name}"'


def _id(what: Named) -> str | None:
    return getattr(what, "id", None)


def refuse(what: Named, came: str, mend: str, field: str) -> NoReturn:
    """Raise the ChainError that names the part, what is wrong with it and the mend."""
    raise ChainError(f"{called(what)}: {came}: {mend}", field=field, part=_id(what))


def within(what: Named, key: str, value: float, lowest: float, highest: float, unit: str) -> None:
    """Raise a ChainError unless value is a number from lowest to highest."""
    if not (math.isfinite(value) and lowest <= value <= highest):
        raise ChainError(
            f"{called(what)}: {key} {value:g} is not possible: use {lowest:g} to {highest:g} {unit}",
            field=key,
            allowed=f"{lowest:g} to {highest:g}",
            part=_id(what),
        )


def words(what: Named, key: str, value: str) -> None:
    """Raise a ChainError unless value can be shown and kept as a name."""
    if len(value) > LONGEST_WORDS or not value.isprintable():
        refuse(what, f"{key} is {value!r:.60}", f"use at most {LONGEST_WORDS} printable characters", key)


def one_of(what: Named, key: str, value: str, allowed: Collection[str]) -> None:
    """Raise a ChainError unless value is one of the allowed words."""
    if value not in allowed:
        raise ChainError(
            f'{called(what)}: {key} "{value}" is not known: use {", ".join(word or chr(34) * 2 for word in allowed)}',
            field=key,
            allowed=", ".join(allowed),
            part=_id(what),
        )


def rising(
    what: Named, key: str, table: tuple[tuple[float, float], ...], unit: str, x: tuple[float, float, str], y: str
) -> None:
    """Raise a ChainError unless a table has two points or more, in range and sorted by its first column.

    `x` is least, most and unit of the first column; `unit` what a pair is, `y` the quantity in the second.
    """
    if len(table) < 2:
        came = "is empty" if not table else "has one point"
        refuse(what, f"the {y} table {came}", f"give at least two pairs {unit}", key)
    lowest, highest, x_unit = x
    for first, _ in table:
        within(what, f"{key}: {'frequency' if x_unit == 'MHz' else 'angle'}", first, lowest, highest, x_unit)
    for (low, _), (high, _) in itertools.pairwise(table):
        if high <= low:
            refuse(
                what,
                f"in the {y} table {high:g} {x_unit} follows {low:g} {x_unit}",
                "sort it by rising frequency" if x_unit == "MHz" else "sort it by rising angle",
                key,
            )
