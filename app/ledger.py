"""Every gain and loss from the radiated power to the margin, in both time states."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from app.air import Air
from app.assumptions import Assumptions
from app.company import STATES, Company, State
from app.disturbance import Effect
from app.fields import EmissionField
from app.margins import Turned
from app.outlet_ledger import Book, Step, book_of
from app.request import AssessRequest

METHOD_SOURCES = {"p1812": "Rec. ITU-R P.1812-7, 50 % of time", "p1546": "Rec. ITU-R P.1546-6, 50 % of time"}
NEEDED = "C/N that the mode needs"  # the step of the link budget before which interference counts
Line = tuple[str, float, str]  # step, value in dB, source
Books = Mapping[State, Book]  # of one chain, by time state
NAMED = 3  # interferers with a line of their own


def ledger(
    turned: Turned,
    e: int,
    field: EmissionField,
    air: Air,
    books: Books,
    outlet: str,
    before: Mapping[State, Sequence[Step]],
) -> list[dict[str, Any]]:
    """Steps of one emission to one outlet, the state that decides last; each state ends with its margin.

    `before` is `to_the_field` of the emission, the same for all chains and outlets.
    """
    rows: list[dict[str, Any]] = []
    behind: list[Line] = []
    states = sorted(STATES, key=lambda one: one == turned.state(e))
    for state in states:
        if not behind or not _alike(turned, e, field.fade_db):
            behind = books[state].values(e, outlet)[1:]  # the first is the field, which the steps before end with
        reception = turned.raised if state == "b" else turned.faded
        place = next(one for one in reception.outlets if one.name == outlet)
        at = next(k for k, line in enumerate(behind) if line[0] == NEEDED)
        total = before[state][-1].total
        change_db = float(place.cn_db[e]) - total - sum(line[1] for line in behind[:at])
        company = _company_lines(turned.effects[state], air.company, e, state, change_db)
        rows += [_row(step.step, step.value_db, step.total, step.source, state) for step in before[state]]
        for name, value_db, source in (*behind[:at], *company, *behind[at:]):
            total += value_db
            rows.append(_row(name, value_db, total, source, state))
    return rows


def to_the_field(field: EmissionField, availability_percent: int) -> dict[State, list[Step]]:
    """Steps from the radiated power to the field at the aerial, in both time states."""
    faded: dict[State, float] = {"a": field.fade_db, "b": 0.0}
    return {state: _to_the_field(field, availability_percent, faded_db, state) for state, faded_db in faded.items()}


def books_of(turned: Turned, air: Air, request: AssessRequest, assumptions: Assumptions) -> Books:
    """Gather what the ledgers of one chain are written from, in both time states."""
    fields: dict[State, NDArray[np.float64]] = {"a": air.used_dbuv_m - air.fade_db, "b": air.used_dbuv_m}
    return {
        state: book_of(
            turned.chain,
            air.signals,
            field,
            turned.pointing_deg,
            turned.polarisation,
            assumptions,
            request.roof.surroundings,
            load_dbuv_m=air.used_dbuv_m,
            beside=air.beside,
        )
        for state, field in fields.items()
    }


def _alike(turned: Turned, e: int, fade_db: float) -> bool:
    """Whether everything behind the field does the same in both states: C/N differs by the fade alone."""
    alone = {state: effect.cn_db[e] - effect.gain_db[e] for state, effect in turned.effects.items()}
    return bool(abs(alone["b"] - alone["a"] - fade_db) < 1e-9)


def _row(step: str, value_db: float, total: float, source: str, state: State) -> dict[str, Any]:
    return {
        "step": step,
        "value_db": round(value_db, 2) + 0.0,
        "total": round(total, 2) + 0.0,
        "source": source,
        "state": state,
    }


def _to_the_field(field: EmissionField, availability_percent: int, faded_db: float, state: State) -> list[Step]:
    """Steps from the radiated power to the field at the aerial."""
    assert field.path is not None  # only emissions with an answer have a ledger
    power_db = 10 * float(np.log10(field.erp_kw))
    lines = [
        (
            f"radiated power towards the roof, {field.erp_kw:.3g} kW ERP",
            power_db,
            f"register: {field.transmitter.source}",
        ),
        (
            f"free space over {field.distance_km:.1f} km",
            field.free_space_dbuv_m - power_db,
            "Rec. ITU-R P.525, from 1 kW ERP to dB(µV/m)",
        ),
        (
            f"ground and atmosphere: {field.path.kind}",
            field.used_dbuv_m + field.leaves_db - field.doubt_db - field.free_space_dbuv_m,
            _method_source(field),
        ),
    ]
    if field.leaves_db:
        lines.append(("leaves before the aerial", -field.leaves_db, "Rec. ITU-R P.833-10, section 2.1, in leaf"))
    if field.doubt_db:
        lines.append(("power or pattern not stated by the register", field.doubt_db, "assumption erp_unknown_mean_db"))
    if state == "a":
        lines.append(
            (
                f"fade that {availability_percent} % of the time stays above",
                -faded_db,
                f"{METHOD_SOURCES[str(field.method)]} and 1 %; "
                "assumptions least_fade_99_db, sea_fade_99_db, fade_share_90; "
                f"where this emission disturbs, it rises by {field.enhancement_db:.2f} dB instead",
            )
        )
    return _summed(lines, 0.0)


def _method_source(field: EmissionField) -> str:
    """Name the method of a field, what the other one says, and why this one."""
    source = METHOD_SOURCES[str(field.method)]
    if field.difference_db is None:
        return f"{source}: {field.method_reason}"
    return (
        f"{source}; P.1812 {field.p1812_dbuv_m:.2f}, P.1546 {field.p1546_dbuv_m:.2f} dB(µV/m), "
        f"difference {field.difference_db:+.2f} dB"
    )


def _summed(lines: Sequence[tuple[str, float, str]], total: float) -> list[Step]:
    steps = []
    for name, value_db, source in lines:
        total += value_db
        steps.append(Step(name, value_db, total, source))
    return steps


def _company_lines(
    effect: Effect, company: Company, e: int, state: State, change_db: float
) -> Sequence[tuple[str, float, str]]:
    """What other emissions add to and take from C/N; the values add up to `change_db`, less the echo's rise."""
    lines: list[tuple[str, float, str]] = []
    network = company.network_of.get(e)
    if network is not None:
        lines.append(
            (
                "other masts of the single-frequency network",
                float(effect.gain_db[e]),
                f"useful power within {network.symbol.guard_us:.0f} µs and weighted beyond"
                + ("; guard interval not stated, the usual one" if network.symbol.assumed else "")
                + ("; static delays not stated, taken as 0" if network.delay_assumed else ""),
            )
        )
    lost_db = change_db - float(effect.gain_db[e])
    who, over_c = effect.contributions(e)
    if who.size:
        shares = over_c / over_c.sum()
        lines += [
            (_named(company, i), lost_db * share, _rule(company, i, e, state))
            for i, share in zip(who[:NAMED].tolist(), shares.tolist(), strict=False)
        ]
        if who.size > NAMED:
            rest_db = lost_db * float(shares[NAMED:].sum())
            lines.append((f"{who.size - NAMED} weaker interferers", rest_db, "the same rules"))
    if effect.rise_db[e]:
        lines.append(
            (
                "echo of the network as strong as the signal, or nearly",
                -float(effect.rise_db[e]),
                "table of echoes of 0 dB; assumption sfn_echo_range_db",
            )
        )
    return lines


def _named(company: Company, i: int) -> str:
    one = company.interferers[i]
    where = f"channel {one.emission.channel}" if one.emission.channel else f"{one.emission.frequency_mhz:g} MHz"
    return f"interference: {one.transmitter.name}, {where}, from {one.bearing_deg:.0f}°"


def _rule(company: Company, i: int, e: int, state: State) -> str:
    rule = company.pairs.rule_of(i, e) or "arrives outside the guard interval of its own network"
    time = "risen" if state == "b" else "at its median"
    ground = (
        "" if company.interferers[i].over_ground else "; no ground on its path: Rec. ITU-R P.1546-6 without terrain"
    )
    return f"its share of the loss; {time}; {rule}{ground}"
