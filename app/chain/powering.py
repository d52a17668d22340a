"""Whether the supply reaches every part that needs one, through passing parts, with enough voltage left."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from app.chain.base import Part, called
from app.chain.parts import Amplifier, Chain, Feeder, PowerInserter
from app.chain.tables import CABLES


@dataclass(frozen=True, slots=True)
class Supplied:
    """One part that needs a supply on the cable."""

    part: Part
    supply: PowerInserter | None  # the one that would feed it
    voltage_v: float | None  # that arrives; None: nothing does
    blocked_by: Part | None  # the first part on the way that lets no supply through
    message: str  # empty: it is fed; else what is wrong and the mend

    @property
    def is_fed(self) -> bool:
        """Whether it works."""
        return not self.message


def powering(chain: Chain) -> tuple[Supplied, ...]:
    """Supply of every part that draws current from the cable, in the order of the signal.

    Each part takes its current along the one way from the nearest power inserter that reaches it; where the tree
    lets none through, the way to the nearest tells what blocks it. Drop in voltage: the loop resistance of each
    feeder times all current that passes it. A supply whose current is not enough feeds none.
    """
    users = [part for part in chain.tree.order if part.draws_ma is not None]
    supplies = [part for part in chain.tree.order if isinstance(part, PowerInserter)]
    ways = {user.id: _way(chain, user, supplies) for user in users}
    current: dict[str, float] = {}  # mA through each part
    for user in users:
        supply, way = ways[user.id]
        if supply is None or _blocking(way) is not None:
            continue
        for part in (*way, supply):
            current[part.id] = current.get(part.id, 0.0) + float(user.draws_ma or 0)
    return tuple(_supplied(user, *ways[user.id], current) for user in users)


def as_powered(chain: Chain) -> Chain:
    """Return the chain as it behaves: amplifiers that no supply reaches pass only what leaks through them."""
    dead = {one.part.id for one in powering(chain) if not one.is_fed and isinstance(one.part, Amplifier)}
    if not dead:
        return chain
    parts = tuple(
        replace(part, powered=False) if isinstance(part, Amplifier) and part.id in dead else part
        for part in chain.parts
    )
    return replace(chain, parts=parts)


def _way(chain: Chain, user: Part, supplies: Sequence[PowerInserter]) -> tuple[PowerInserter | None, list[Part]]:
    """Return the supply of a part and the parts between; one that passes DC all the way first, then the shortest."""
    beside: dict[str, set[str]] = {part.id: set() for part in chain.tree.order}
    for part in chain.tree.order:
        for above in chain.tree.fed_by[part.id]:
            beside[part.id].add(above)
            beside[above].add(part.id)
    came: dict[str, str] = {user.id: ""}
    reached = [user.id]
    for ident in reached:
        for other in sorted(beside[ident] - set(came)):
            came[other] = ident
            reached.append(other)
    found: list[tuple[bool, int, PowerInserter, list[Part]]] = []
    for supply in supplies:
        if supply.id not in came:
            continue
        way: list[Part] = []
        at = came[supply.id]
        while at and at != user.id:
            way.append(chain.tree.part(at))
            at = came[at]
        found.append((_blocking(way) is not None, len(way), supply, way))
    if not found:
        return None, []
    best = min(found, key=lambda one: one[:2])
    return best[2], best[3]


def _blocking(way: Sequence[Part]) -> Part | None:
    return next((part for part in way if not part.passes_dc), None)


def _supplied(user: Part, supply: PowerInserter | None, way: list[Part], current: dict[str, float]) -> Supplied:
    if supply is None:
        mend = "put a power inserter on its feeder, or leave out draws_ma if it has its own supply"
        return Supplied(user, None, None, None, f"{called(user)} has no supply: {mend}")
    blocking = _blocking(way)
    if blocking is not None:
        message = (
            f'{called(blocking)} lets no supply through from "{supply.name}" to "{user.name}": '
            f"use one that passes DC, or put the power inserter between it and {user.name}"
        )
        return Supplied(user, supply, None, blocking, message)
    if current[supply.id] > supply.most_ma:
        message = (
            f"{called(supply)} gives {supply.most_ma:g} mA and {current[supply.id]:g} mA are drawn: "
            "use a stronger supply or a second one"
        )
        return Supplied(user, supply, None, None, message)
    drop_v = sum(_ohm(part) * current[part.id] / 1000 for part in way)
    voltage_v = supply.supply_v - drop_v
    if voltage_v < user.needs_v:
        message = (
            f"{called(user)} needs {user.needs_v:g} V and gets {voltage_v:.1f} V, {drop_v:.1f} V are lost on the way: "
            "use a thicker or shorter feeder, or a higher supply that the part allows"
        )
        return Supplied(user, supply, voltage_v, None, message)
    return Supplied(user, supply, voltage_v, None, "")


def _ohm(part: Part) -> float:
    return part.length_m / 1000 * CABLES[part.cable].loop_ohm_per_km if isinstance(part, Feeder) else 0.0


def powering_document(chain: Chain) -> list[dict[str, object]]:
    """Rows for the answer: each part that needs a supply, what arrives there and what is wrong."""
    return [
        {
            "part": one.part.id,
            "name": one.part.name,
            "draws_ma": one.part.draws_ma,
            "supply": None if one.supply is None else one.supply.id,
            "voltage_v": None if one.voltage_v is None else round(one.voltage_v, 2),
            "blocked_by": None if one.blocked_by is None else one.blocked_by.id,
            "is_fed": one.is_fed,
            "message": one.message or None,
        }
        for one in powering(chain)
    ]
