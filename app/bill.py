"""What changing to a chain costs, line by line: what is bought, what of what is up stays, labour and visit."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Any, Literal

from app.chain.parts import Chain, Feeder, Part

What = Literal["part", "labour", "visit", "baseline"]
State = Literal["bought", "kept", "taken down", "set off"]

# Where and how a part stands, what it costs, and what was measured on it: the same thing may differ in these.
NOT_THE_THING = frozenset(
    {
        "name", "price", "after", "port", "powered", "pointing_deg", "polarisation", "place", "building",
        "above_clamp_m", "wind_area_m2", "measured", "pattern", "cuts", "beamwidth_deg", "front_to_back_db",
        "reflection", "gain_includes_mismatch",
    }
)  # fmt: skip

UNIT = re.compile(r"_(dbuv|dbd|db|mhz|ma|mm|m2|m|v|n|deg)$")


@dataclass(frozen=True, slots=True)
class Line:
    """One thing that is paid for, or not."""

    what: What
    state: State
    name: str
    price: float | None  # None: not known
    part: Part | None = None
    note: str = ""  # why it is bought although something of its id is up

    @property
    def pays(self) -> float | None:
        """What it adds to the sum; None if it has to be bought and its price is not known."""
        if self.state == "set off":
            return None if self.price is None else -self.price
        return self.price if self.state == "bought" else 0.0


def bill(candidate: Chain | None, baseline: Chain | None, baseline_is_up: bool) -> tuple[Line, ...]:
    """Lines whose sum is what changing from the baseline to the candidate costs; none if nothing changes.

    Where the baseline is up, its parts are kept where the candidate has them too, and the others come down. Where
    nobody said what is up, the candidate is bought whole and the baseline's price set off against it.
    """
    if candidate is None or candidate == baseline:
        return ()
    up = {part.id: part for part in baseline.parts} if baseline and baseline_is_up else {}
    lines = [_part_line(part, up.get(part.id), candidate.already_up) for part in candidate.parts]
    state: State = "kept" if candidate.already_up else "bought"
    lines += [
        Line("labour", state, "Labour", candidate.labour_price),
        Line("visit", state, "Visit", candidate.visit_price),
    ]
    there = {part.id for part in candidate.parts}
    lines += [Line("part", "taken down", one.name, one.price, one) for one in up.values() if one.id not in there]
    if baseline and not baseline_is_up:
        lines.append(Line("baseline", "set off", baseline.title or baseline.name, baseline.price))
    return tuple(lines)


def total(lines: Sequence[Line]) -> float | None:
    """Sum of a bill; None if one price that counts is not known."""
    amounts = [line.pays for line in lines]
    known = [amount for amount in amounts if amount is not None]
    return sum(known, 0.0) if len(known) == len(amounts) else None


def is_same_thing(part: Part, up: Part) -> bool:
    """Whether a part can be the one that is up: alike in what is bought. A feeder may be cut shorter."""
    if type(part) is not type(up):
        return False
    if isinstance(part, Feeder) and isinstance(up, Feeder):
        return part.cable == up.cable and part.length_m <= up.length_m
    compared = [one.name for one in fields(part) if one.name not in NOT_THE_THING]
    return all(getattr(part, name) == getattr(up, name) for name in compared)


def bill_document(lines: Sequence[Line]) -> list[dict[str, Any]]:
    """Return the lines for the answer."""
    return [
        {
            "what": line.what,
            "state": line.state,
            "part": None if line.part is None else line.part.id,
            "kind": None if line.part is None else line.part.kind,
            "name": line.name,
            "detail": "" if line.part is None else detail(line.part),
            "price": line.price,
            "pays": line.pays,
            "note": line.note,
        }
        for line in lines
    ]


def detail(part: Part) -> str:
    """How much of a thing that is bought by length; empty for all others."""
    return f"{part.length_m:g} m of {part.cable}" if isinstance(part, Feeder) else ""


def _part_line(part: Part, up: Part | None, already_up: bool) -> Line:
    if already_up or (up is not None and is_same_thing(part, up)):
        return Line("part", "kept", part.name, part.price, part)
    if up is None:
        return Line("part", "bought", part.name, part.price, part)
    return Line("part", "bought", part.name, part.price, part, _difference(part, up))


def _difference(part: Part, up: Part) -> str:
    """Say in what a part that is up differs from the one that is wanted."""
    if isinstance(part, Feeder) and isinstance(up, Feeder):
        return f"up now are {detail(up)}"
    if type(part) is not type(up):
        return f"up now is a {up.kind} of the same id"
    names = [one.name for one in fields(part) if one.name not in NOT_THE_THING]
    differs = [UNIT.sub("", name).replace("_", " ") for name in names if getattr(part, name) != getattr(up, name)]
    return f"the one up now differs in {' and '.join(dict.fromkeys(differs))}"
