"""The answer in plain text, for a terminal."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from app.request import NOTHING
from app.site import place
from app.vantage import MEASURING_AERIAL

LEAST_CHANGE = 0.05  # of a chance, and of a number of multiplexes: less is no change to a person
RODS = {"horizontal": "rods flat", "vertical": "rods upright"}


def chance_words(chance: float) -> str:
    """Write a chance as people weigh it; never certain, never impossible, never on the wrong side of a grade."""
    if chance >= 0.99:
        return "99 in 100"
    if chance >= 0.95:
        return "19 in 20"
    if chance <= 0.01:
        return "1 in 100"
    if chance < 0.075:
        return "1 in 20"
    # Just below where the words open and likely begin, the nearest tenth would say more than the word.
    if 0.25 <= chance < 0.30:
        return "1 in 4"
    if 0.65 <= chance < 0.70:
        return "2 in 3"
    return f"{min(9, max(1, math.floor(chance * 10 + 0.5)))} in 10"


def count_words(count: float) -> str:
    """Write a number of multiplexes that is itself a chance."""
    if count < 0.05:
        return "none"
    if count < 0.75:
        return "less than 1"
    whole = round(count)
    return f"about {whole}" if abs(count - whole) <= 0.25 else f"{int(count)} to {int(count) + 1}"


def has_moved(before: Mapping[str, Any] | None, after: Mapping[str, Any] | None) -> bool:
    """Whether a person would call two cells of a multiplex different; None: no aerial."""
    step = abs((after["chance"] if after else 0.0) - (before["chance"] if before else 0.0))
    return step >= LEAST_CHANGE or (before is not None and before["grade"] != (after or {}).get("grade"))


def change_words(multiplexes: Sequence[Mapping[str, Any]], verdict: Mapping[str, Any]) -> str:
    """Say what the candidate changes in all, so that it fits the table of what changes."""
    extra, bare = verdict["expected_extra"], verdict["baseline"] == NOTHING
    pairs = [(one["chains"].get(verdict["baseline"]), one["chains"].get(verdict["candidate"])) for one in multiplexes]
    steps = [
        (after["chance"] if after else 0.0) - (before["chance"] if before else 0.0)
        for before, after in pairs
        if has_moved(before, after)
    ]
    up, down = any(step > 0 for step in steps), any(step < 0 for step in steps)
    if abs(extra) < LEAST_CHANGE:
        return "gains and loses alike" if up and down else "adds next to nothing" if steps else "adds nothing"
    if extra < 0:
        return f"loses {count_words(-extra)}{' on balance' if up else ''}"
    return f"{'brings' if bare else 'adds'} {count_words(extra)}{' on balance' if down else ''}"


def none_is_worth_it(verdicts: Sequence[Mapping[str, Any]]) -> bool:
    """Whether there were several candidates and none pays."""
    return len(verdicts) > 1 and all(one["answer"] == "not worth it" for one in verdicts)


def told(answer: Mapping[str, Any]) -> str:
    """Return the whole answer: the decision first, then what changes, the roof line, cautions."""
    return "\n".join(_lines(answer)) + "\n"


def _lines(answer: Mapping[str, Any]) -> Iterator[str]:
    roof = answer["roof"]
    yield (
        f"Roof {place(roof['latitude_deg'], roof['longitude_deg'])}, ground {roof['ground_amsl_m']:.0f} m, "
        f"aerial {roof['aerial_agl_m']:g} m above it"
    )
    yield ""
    chains = answer["chains"]
    if not answer["multiplexes"]:
        yield "No multiplex can be predicted here."
    verdicts = answer["verdicts"]
    if none_is_worth_it(verdicts):
        yield f"None of the {len(verdicts)} is worth it here; the one that comes nearest stands first."
    for verdict in verdicts:
        yield sentence(answer, verdict)
    if verdicts:
        yield f"Why: {verdicts[0]['reason']}"
        if verdicts[0]["answer"] == "measure first":
            yield measure_line(answer, verdicts[0])
    yield from reading_lines(answer)
    yield ""
    names = list(chains) if not verdicts else [verdicts[0]["baseline"], *(v["candidate"] for v in verdicts)]
    yield from _table(answer, [name for name in names if name in chains])
    yield from _roof_lines(answer, verdicts)
    unanswered = [one for one in answer["emissions"] if one["reason"]]
    if unanswered:
        yield ""
        for one in unanswered:
            yield f"No prediction for {one['transmitter_name']}, channel {one['channel']}: {one['reason']}"
    yield ""
    yield from (f"- {caution}" for caution in answer["cautions"])


def sentence(answer: Mapping[str, Any], verdict: Mapping[str, Any]) -> str:
    """Say one verdict in a sentence, break-even price included."""
    total = len(answer["multiplexes"])
    baseline, candidate = verdict["baseline"], verdict["candidate"]
    currency = answer["chains"][candidate]["currency"]
    price, limit = verdict["price_difference"], verdict["break_even_price"]
    today = (
        "Nothing is up today."
        if baseline not in answer["chains"]
        else f"{baseline}: {count_words(answer['chains'][baseline]['expected_count'])} of {total}."
    )
    adds = change_words(answer["multiplexes"], verdict)
    word = verdict["answer"] or "no answer without a price"
    even = f", break-even {limit:.0f} {currency}" if limit >= 0.5 else " at any price"
    if price is None:
        cost = "its price is not known"
    elif round(price) == 0:
        cost = "at no cost"
    elif price < 0:
        cost, even = f"and saves {-price:.0f} {currency}", even if limit >= 0.5 else ""
    else:
        cost = f"for {price:.0f} {currency}"
    return f"{today} {candidate} {adds} {cost}: {word}{even}."


def measure_line(answer: Mapping[str, Any], verdict: Mapping[str, Any]) -> str:
    """Say which reading to take and what each outcome means."""
    first = verdict["measure_next"]
    emission = next(one for one in answer["emissions"] if one["id"] == first["emission"])
    parts = []
    for part in first["tipping"]:
        low, high = part["from_dbuv"], part["to_dbuv"]
        span = f"above {low}" if high is None else f"below {high}" if low is None else f"{low} to {high}"
        parts.append(f"{span} {part['answer']} ({part['why']})")
    currency = answer["chains"][verdict["candidate"]]["currency"]
    where = f"channel {emission['channel']} from {first['bearing_deg']:.0f}°"
    levels = ", ".join(parts) or "any level"
    place_words = reading_place(first, first["through"])
    return f"Measure first: {where} {place_words}, in dB(µV): {levels}; worth {first['value']:.0f} {currency}."


def reading_place(first: Mapping[str, Any], through: str) -> str:
    """Say where a level is to be read and through what, `through` being the chain as its reader knows it."""
    if first["through"] == MEASURING_AERIAL:
        return "with a measuring aerial of 6 dBd straight into the meter"
    return f"at the outlet {first['point']} through {through}"


def reading_lines(answer: Mapping[str, Any]) -> Iterator[str]:
    """Say what the readings of this roof did, and which wait."""
    readings = answer["readings"]
    if not readings["items"]:
        return
    yield f"{readings['used']} of {len(readings['items'])} readings of this roof are counted."
    yield from readings["findings"]
    for item in readings["items"]:
        if not item["used"]:
            causes = f" It may be: {item['candidates'][0]}." if item["candidates"] else ""
            what = item.get("emission") or item.get("multiplex") or item["kind"]
            yield f"Reading of {what}: {item['reason']}.{causes}"


def _table(answer: Mapping[str, Any], names: Sequence[str]) -> Iterator[str]:
    rows = []
    unchanged = []
    for multiplex in answer["multiplexes"]:
        cells = [multiplex["chains"][name] for name in names if name in multiplex["chains"]]
        words = [f"{chance_words(cell['chance'])} {cell['grade']}" for cell in cells]
        words = [_told_apart(words[0], each, cells[0], cell) for each, cell in zip(words, cells, strict=True)]
        moved = any(has_moved(cells[0], cell) for cell in cells[1:])
        if moved or len(cells) == 1:
            rows.append([multiplex["name"], *words])
        elif words:
            unchanged.append(f"{multiplex['name']} ({words[0]})")
    if rows:
        table = [["what changes" if len(names) > 1 else "multiplex", *names], *rows]
        widths = [max(len(row[column]) for row in table) for column in range(len(table[0]))]
        yield from (
            "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in table
        )
    if unchanged:
        yield f"{len(unchanged)} unchanged: {', '.join(unchanged)}"


def _told_apart(now: str, words: str, before: Mapping[str, Any], after: Mapping[str, Any]) -> str:
    """Words of a cell; where they are those of today but the chance has moved, which way."""
    if words != now or not has_moved(before, after):
        return words
    return f"{words}, {'better' if after['chance'] > before['chance'] else 'worse'}"


def _roof_lines(answer: Mapping[str, Any], verdicts: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    names = [verdicts[0]["candidate"]] if verdicts else list(answer["chains"])
    for name in names:
        for pointing in answer["chains"][name]["pointings"]:
            yield ""
            yield (
                f"On the roof, {name}: turn to {pointing['pointing_deg']:.0f}° true, {RODS[pointing['polarisation']]}, "
                f"{answer['roof']['aerial_agl_m']:g} m up."
            )
