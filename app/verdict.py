"""Is the better chain worth its price: the decision rule and what is reported beside it.

With N the number of wanted multiplexes received (random under the joint model), v the worth of one more
and the price difference of the candidate over the baseline,

    U = v * (N candidate - N baseline) - price difference

and W the value of the best reading that could be taken first (app/reading_value.py), c what taking it costs:
*measure first* if W > c, else *worth it* if E(U) > 0, else *not worth it*. Without a price there is no answer,
only the break-even price v * E(N candidate - N baseline).
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from app.bill import Line, bill, total
from app.chain.parts import Chain
from app.chance import DRAWS
from app.reading_value import MeasureNext, Readable, most_valuable

Answer = Literal["worth it", "not worth it", "measure first"]
BoolArray = NDArray[np.bool_]

GAIN_STEP = 0.2  # a chance must move by more than this to count as gained or lost
HAVE = 0.70  # and reach, or have had, this
SECURE = 0.95
COUNTS_FROM, COUNTS_TO = 0.05, 0.95  # wanted unless chosen: possible somewhere, not secure everywhere
LEAST_EXTRA = 0.0005  # of a multiplex: less is written as none, and no price can be set against none
SAME_CHANCE = 0.02  # chances this close are the same to a person

LIMIT_WORDS = {"time": "bad nights"}  # the others are called what they are

# What helps against a limit and what does not.
HELP = {
    "noise": "gain helps",
    "time": "gain helps",
    "interference": "directivity cures it, gain or an amplifier alone does little",
    "overload": "less gain helps, an amplifier harms",
}


@dataclass(frozen=True, slots=True)
class Outcome:
    """What one chain (or nothing at all) brings: draws and chances per multiplex."""

    name: str
    chain: Chain | None  # None: nothing is up
    received: BoolArray  # (draws, m)
    chance: NDArray[np.float64]  # (m,)
    held_back_by: tuple[str | None, ...]  # (m,) the limit that holds each back

    @property
    def title(self) -> str:
        """What people call it."""
        return (self.chain.title if self.chain else "") or self.name


@dataclass(frozen=True, slots=True)
class Verdict:
    """One candidate against the baseline."""

    baseline: str
    candidate: str
    answer: Answer | None
    expected_worth: float | None
    chance_of_gain: float
    expected_extra: float
    expected_extra_error: float  # standard error of the samples
    price_difference: float | None  # sum of the bill
    bill: tuple[Line, ...]
    price_per_extra: float | None
    break_even_price: float
    gained: tuple[str, ...]
    lost: tuple[str, ...]
    now_secure: tuple[str, ...]
    cheapest_equal: str | None
    measure_next: MeasureNext | None  # the reading that is worth most
    wanted: tuple[str, ...]
    reason: str


def nothing(multiplexes: int) -> Outcome:
    """What a bare roof receives."""
    none = np.zeros((DRAWS, multiplexes), dtype=bool)
    return Outcome("nothing", None, none, np.zeros(multiplexes), (None,) * multiplexes)


def wanted_multiplexes(multiplexes: Sequence[str], outcomes: Sequence[Outcome]) -> list[str]:
    """Return what counts unless chosen: possible under one of the outcomes, not secure under all."""
    chances = np.stack([outcome.chance for outcome in outcomes])
    counts = (chances.max(axis=0) >= COUNTS_FROM) & (chances.min(axis=0) <= COUNTS_TO)
    return list(_named(multiplexes, counts))


def compare(
    candidate: Outcome,
    baseline: Outcome,
    others: Sequence[Outcome],
    multiplexes: Sequence[str],
    wanted: Sequence[str],
    worth_per_multiplex: float,
    baseline_is_up: bool,
    readables: Sequence[Readable] = (),
    reading_cost: float = 0.0,
) -> Verdict:
    """Return the verdict on one candidate.

    `others` are all chains in question, for the cheapest equal one; `readables` what could be read first.
    """
    counted = [multiplexes.index(name) for name in wanted]
    has_before = baseline.received[:, counted].sum(axis=1)
    has_after = candidate.received[:, counted].sum(axis=1)
    extra = has_after - has_before
    # The expectation is that of the chances; the joint samples are moved by what they miss of it.
    expected_extra = float((candidate.chance[counted] - baseline.chance[counted]).sum())
    missed = expected_extra - float(extra.mean())
    lines = bill(candidate.chain, baseline.chain, baseline_is_up)
    price = total(lines)
    worth = None if price is None else worth_per_multiplex * expected_extra - price
    measure = (
        None
        if price is None
        else most_valuable(readables, worth_per_multiplex * (extra + missed) - price, has_before * 1.0, has_after * 1.0)
    )
    answer: Answer | None = None
    if worth is not None:
        answer = "worth it" if worth > 0 else "not worth it"
        if measure is not None and measure.value > reading_cost:
            answer = "measure first"
    before, after = baseline.chance, candidate.chance
    return Verdict(
        baseline=baseline.name,
        candidate=candidate.name,
        answer=answer,
        expected_worth=worth,
        chance_of_gain=float((extra > 0).mean()),
        expected_extra=expected_extra,
        expected_extra_error=float(extra.std() / np.sqrt(DRAWS)),
        price_difference=price,
        bill=lines,
        price_per_extra=None if price is None or expected_extra < LEAST_EXTRA else price / expected_extra,
        break_even_price=worth_per_multiplex * expected_extra,
        gained=_named(multiplexes, (after - before > GAIN_STEP) & (after >= HAVE)),
        lost=_named(multiplexes, (before - after > GAIN_STEP) & (before >= HAVE)),
        now_secure=_named(multiplexes, (after >= SECURE) & (before < SECURE)),
        cheapest_equal=_cheapest_equal(candidate, others, counted, baseline, baseline_is_up),
        measure_next=measure,
        wanted=tuple(wanted),
        reason=reason(candidate, baseline, multiplexes, wanted),
    )


def ranked(verdicts: Sequence[Verdict]) -> list[Verdict]:
    """Best first: by expected worth; those without a price after them, by what they bring."""
    return sorted(
        verdicts,
        key=lambda one: (
            one.expected_worth is None,
            -(one.expected_worth if one.expected_worth is not None else one.expected_extra),
            one.candidate,
        ),
    )


def reason(candidate: Outcome, baseline: Outcome, multiplexes: Sequence[str], wanted: Sequence[str]) -> str:
    """One sentence from what holds back the wanted multiplexes today and what the candidate does about it."""
    if not wanted:
        return "No multiplex is open to change: every chain in question receives the same ones."
    place = {name: m for m, name in enumerate(multiplexes)}
    missing = [name for name in wanted if baseline.chance[place[name]] < HAVE]
    if not missing:
        return f"{_in_question(len(wanted))}, likely already with {baseline.title}; little is left to gain."
    limits = Counter(baseline.held_back_by[place[name]] or "noise" for name in missing)
    cured = [name for name in missing if candidate.chance[place[name]] >= HAVE]
    held = ", ".join(
        f"{count} held back by {LIMIT_WORDS.get(limit, limit)} ({HELP.get(limit, 'see step by step')})"
        for limit, count in limits.most_common()
    )
    few = "not likely" if len(missing) == len(wanted) else f"{len(missing)} of them not likely"
    held = _in_question(len(wanted)) + ("" if baseline.chain is None else f", {few} today: {held}")
    if len(missing) == 1:
        return f"{held}; {candidate.title} {'makes' if cured else 'does not make'} it likely."
    return f"{held}; {candidate.title} makes {len(cured) or 'none'} of them likely."


def _in_question(count: int) -> str:
    """Say how many multiplexes the decision hangs on: those asked for, else all that are open to change."""
    return "1 multiplex is in question" if count == 1 else f"{count} multiplexes are in question"


def _cheapest_equal(
    candidate: Outcome,
    others: Sequence[Outcome],
    counted: Sequence[int],
    baseline: Outcome,
    baseline_is_up: bool,
) -> str | None:
    def price(outcome: Outcome) -> float | None:
        return total(bill(outcome.chain, baseline.chain, baseline_is_up))

    own = price(candidate)
    as_good: Mapping[str, float] = {
        other.name: cost
        for other in others
        if (cost := price(other)) is not None
        and (other.chance[counted] >= candidate.chance[counted] - SAME_CHANCE).all()
        and (own is None or cost < own)
    }
    return min(as_good, key=lambda name: (as_good[name], name)) if as_good else None


def _named(multiplexes: Sequence[str], which: BoolArray) -> tuple[str, ...]:
    return tuple(name for name, yes in zip(multiplexes, which, strict=True) if yes)
