"""The answer in plain text, for a terminal."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from app.site import place

LEAST_CHANGE = 0.05  # of a chance: less is no change to a person
RODS = {"horizontal": "rods flat", "vertical": "rods upright"}


def chance_words(chance: float) -> str:
    """Write a chance as people weigh it; never certain, never impossible."""
    if chance >= 0.99:
        return "99 in 100"
    if chance >= 0.95:
        return "19 in 20"
    if chance <= 0.01:
        return "1 in 100"
    if chance < 0.075:
        return "1 in 20"
    return f"{min(9, max(1, round(chance * 10)))} in 10"


def count_words(count: float) -> str:
    """Write a number of multiplexes that is itself a chance."""
    if count < 0.05:
        return "none"
    if count < 0.75:
        return "less than 1"
    whole = round(count)
    return f"about {whole}" if abs(count - whole) <= 0.25 else f"{int(count)} to {int(count) + 1}"


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
    extra, price, limit = verdict["expected_extra"], verdict["price_difference"], verdict["break_even_price"]
    today = (
        "Nothing is up today."
        if baseline not in answer["chains"]
        else f"{baseline}: {count_words(answer['chains'][baseline]['expected_count'])} of {total}."
    )
    adds = f"loses {count_words(-extra)}" if extra <= -0.05 else f"adds {count_words(extra)}"
    if extra >= -0.05 and extra < 0.05:
        adds = "adds nothing"
    cost = "its price is not known" if price is None else f"for {price:.0f} {currency}"
    word = verdict["answer"] or "no answer without a price"
    even = f", break-even {limit:.0f} {currency}" if limit >= 0.5 else " at any price"
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
    return f"Measure first: {where}, in dB(µV): {levels}; worth {first['value']:.0f} {currency}."


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
        chances = [cell["chance"] for cell in cells]
        moved = len(cells) > 1 and (
            max(chances) - min(chances) >= LEAST_CHANGE or len({cell["grade"] for cell in cells}) > 1
        )
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


def _roof_lines(answer: Mapping[str, Any], verdicts: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    names = [verdicts[0]["candidate"]] if verdicts else list(answer["chains"])
    for name in names:
        for pointing in answer["chains"][name]["pointings"]:
            yield ""
            yield (
                f"On the roof, {name}: turn to {pointing['pointing_deg']:.0f}° true, {RODS[pointing['polarisation']]}, "
                f"{answer['roof']['aerial_agl_m']:g} m up."
            )
