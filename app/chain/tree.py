"""Who feeds whom: the parts of a chain as a tree with its roots at the aerials."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from app.chain.aerial_part import Aerial
from app.chain.base import Named, Part, refuse
from app.chain.kinds import Combiner, FlyLead, MastTube, Outlet, Receiver, Splitter, Switch, Tap, tapped_ports


@dataclass(frozen=True, slots=True)
class Tree:
    """Parts in the order of the signal, with what feeds each and the set behind each outlet."""

    order: tuple[Part, ...]  # feeding parts first; without receivers
    fed_by: dict[str, tuple[str, ...]]  # id of a part: ids of what feeds it
    leads: dict[str, tuple[FlyLead, ...]]  # name of an outlet: fly leads behind it
    sets: dict[str, Receiver]  # name of an outlet: the set behind it

    def part(self, ident: str) -> Part:
        """Return the part with an id."""
        return next(part for part in self.order if part.id == ident)


def tree_of(chain: Named, parts: Sequence[Part]) -> Tree:
    """Tree of a list of parts.

    Raises
    ------
    ChainError
        A part that nothing feeds or that leads nowhere, a loop, more branches than ports: the part and the mend.
    """
    if not parts or not isinstance(parts[0], Aerial):
        refuse(chain, "does not begin with an aerial", "make an aerial its first part", "parts")
    _check_ids(chain, parts)
    parts = [part for part in parts if not isinstance(part, MastTube)]  # carries aerials, passes no signal
    outlets = [part for part in parts if isinstance(part, Outlet)]
    general = _general_set(chain, parts)
    if not outlets:
        refuse(chain, "has no outlet", "add an outlet before the receiver", "parts")
    names = [outlet.name for outlet in outlets]
    for name in names:
        if names.count(name) > 1:
            refuse(chain, f'has two outlets named "{name}"', "name each by its room", "parts")
    kept = [part for part in parts if part is not general]
    fed_by = _fed_by(chain, kept)
    feeds: dict[str, list[Part]] = {part.id: [] for part in kept}
    for part in kept:
        for ident in fed_by[part.id]:
            feeds[ident].append(part)
    order = _ordered(kept, fed_by)
    for part in kept:
        _check_branches(part, feeds[part.id])
    leads: dict[str, tuple[FlyLead, ...]] = {}
    sets: dict[str, Receiver] = {}
    for outlet in outlets:
        leads[outlet.name], sets[outlet.name] = _behind(chain, outlet, feeds, general)
    return Tree(tuple(part for part in order if not isinstance(part, Receiver)), fed_by, leads, sets)


def _check_ids(chain: Named, parts: Sequence[Part]) -> None:
    seen: set[str] = set()
    for part in parts:
        if part.id in seen:
            came = f'id "{part.id}" appears twice'
            refuse(part, came, "give each part its own id", "id")
        seen.add(part.id)


def _general_set(chain: Named, parts: Sequence[Part]) -> Receiver | None:
    """Return the set behind every outlet that has none of its own."""
    sets = [part for part in parts if isinstance(part, Receiver)]
    free = [one for one in sets if not one.after]
    if not sets or (free and parts[-1] is not free[-1]):
        refuse(chain, "does not end with a receiver", "make a receiver its last part", "parts")
    if len(free) > 1:
        refuse(
            free[0],
            "stands in the middle of the chain",
            "keep one receiver for all outlets, or say after which outlet it stands",
            "after",
        )
    return free[0] if free else None


def _fed_by(chain: Named, parts: Sequence[Part]) -> dict[str, tuple[str, ...]]:
    """Return what feeds each part: as it says, else by its place in the list."""
    known = {part.id: part for part in parts}
    fed: dict[str, tuple[str, ...]] = {}
    used: dict[str, int] = {part.id: 0 for part in parts}
    for index, part in enumerate(parts):
        for ident in part.after:
            if ident not in known:
                listed = ", ".join(known)
                refuse(part, f'is fed by "{ident}", which is no part of the chain', f"use one of {listed}", "after")
        if part.after:
            fed[part.id] = part.after
        elif isinstance(part, Aerial):
            fed[part.id] = ()
        else:
            fed[part.id] = _by_place(chain, parts, index, fed, used)
        for ident in fed[part.id]:
            used[ident] += part.port != "through"
        joins = isinstance(part, Combiner | Switch)
        if joins and len(fed[part.id]) < 2:
            refuse(part, f"is fed by {len(fed[part.id])} part", "name two or more aerials or feeders in after", "after")
        if len(fed[part.id]) > 1 and not joins:
            refuse(part, f"is fed by {len(fed[part.id])} parts", "put a combiner or a switch before it", "after")
        if part.port == "through" and not isinstance(known[fed[part.id][0]], Tap):
            refuse(part, "is fed by the way through of a part that is no tap", "leave out port", "port")
    return fed


def _by_place(
    chain: Named, parts: Sequence[Part], index: int, fed: dict[str, tuple[str, ...]], used: dict[str, int]
) -> tuple[str, ...]:
    part, before = parts[index], parts[index - 1]
    if isinstance(part, Combiner | Switch):
        taken = {ident for ids in fed.values() for ident in ids}
        return tuple(one.id for one in parts[:index] if one.id not in taken)
    ends = isinstance(before, Outlet | FlyLead | Receiver)
    if not ends or isinstance(part, FlyLead) or (isinstance(part, Receiver) and ends):
        return (before.id,)
    for earlier in reversed(parts[:index]):
        if isinstance(earlier, Splitter | Tap) and used[earlier.id] < tapped_ports(earlier):
            return (earlier.id,)
    return _no_branch(chain, parts, index)


def _no_branch(chain: Named, parts: Sequence[Part], index: int) -> tuple[str, ...]:
    """Refuse a part behind an outlet that no port is left for."""
    part = parts[index]
    outlets = sum(isinstance(one, Outlet) for one in parts)
    if isinstance(part, Splitter):
        refuse(part, "stands behind an outlet", "put it before the first outlet", "parts")
    branching = [one for one in parts[:index] if isinstance(one, Splitter | Tap)]
    if branching:
        full = branching[-1]
        refuse(
            full,
            f"has {tapped_ports(full)} ports and feeds {outlets} outlets",
            "use a larger one or remove an outlet",
            "ports",
        )
    if isinstance(part, Outlet):
        mend = "add one before the first outlet"
        refuse(chain, f"feeds {outlets} outlets without a splitter", mend, "parts")
    refuse(part, "leads to no outlet", "put an outlet after it", "parts")


def _ordered(parts: Sequence[Part], fed_by: dict[str, tuple[str, ...]]) -> list[Part]:
    """Return the parts with what feeds them first; a loop is refused."""
    order: list[Part] = []
    placed: set[str] = set()
    waiting = list(parts)
    while waiting:
        ready = [part for part in waiting if placed.issuperset(fed_by[part.id])]
        if not ready:
            loop = ", ".join(part.id for part in waiting[:8])
            refuse(
                waiting[0], f"feeds itself in a loop ({loop})", "let the signal run one way, from an aerial", "after"
            )
        order += ready
        placed |= {part.id for part in ready}
        waiting = [part for part in waiting if part.id not in placed]
    return order


def _check_branches(part: Part, fed: Sequence[Part]) -> None:
    if isinstance(part, Receiver):
        if fed:
            refuse(fed[0], "is fed by a receiver", "put it before the outlet", "after")
        return
    if not fed and isinstance(part, Aerial):
        refuse(part, "feeds nothing", "put a combiner or a switch after it, or keep one aerial only", "parts")
    if not fed and not isinstance(part, Outlet | FlyLead):
        refuse(part, "leads to no outlet", "put an outlet after it", "parts")
    if isinstance(part, Outlet | FlyLead):
        for one in fed:
            if not isinstance(one, FlyLead | Receiver):
                mend = "only a fly lead or a receiver goes there; for a riser use a tap"
                refuse(one, f'is plugged into {part.kind} "{part.name}"', mend, "after")
    through = [one for one in fed if one.port == "through"]
    tapped = len(fed) - len(through)
    if len(through) > 1:
        refuse(part, f"feeds {len(through)} parts through", "it has one way on: use a splitter", "port")
    if tapped > tapped_ports(part):
        branches = isinstance(part, Splitter | Tap)
        what = "outlets" if all(isinstance(one, Outlet) for one in fed) else "parts"
        refuse(
            part,
            f"has {tapped_ports(part)} ports and feeds {tapped} {what}" if branches else f"feeds {tapped} parts",
            "use a larger one or remove an outlet" if branches else "put a splitter after it",
            "ports" if branches else "after",
        )


def _behind(
    chain: Named, outlet: Outlet, feeds: dict[str, list[Part]], general: Receiver | None
) -> tuple[tuple[FlyLead, ...], Receiver]:
    """Return the fly leads and the set behind an outlet."""
    leads: list[FlyLead] = []
    at: Part = outlet
    while feeds[at.id]:
        at = feeds[at.id][0]
        if isinstance(at, Receiver):
            return tuple(leads), at
        assert isinstance(at, FlyLead)  # by _check_branches
        leads.append(at)
    if general is None:
        refuse(outlet, "has no set behind it", "add a receiver as the last part", "parts")
    return tuple(leads), general
