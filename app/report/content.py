"""What stands in the report on a roof, from the document of the answer: words and rows, no layout."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import date
from pathlib import Path
from typing import Any

from app.bill import bill, bill_document
from app.planner import assess
from app.readings import INSTRUMENTS
from app.report.commissioning import sheet_rows
from app.report.masts import bearing_words, channel_words, masts_that_matter
from app.request import NOTHING, AssessRequest
from app.site import place
from app.stored_chains import stored_chain
from app.telling import RODS, chance_words, change_words, count_words, has_moved, none_is_worth_it, reading_place
from app.transmitters.store import Store
from terrain.mosaic import Ground

Document = dict[str, Any]
KIND_WORDS = {"level": "dB(µV)", "cn": "dB C/N", "mer": "dB MER"}


def report_content(
    saved: Mapping[str, Any],
    request: AssessRequest,
    store: Store,
    ground: Ground,
    refractivity_maps: Path | None = None,
) -> Document:
    """Answer the question of a kept roof and return what its report says."""
    answer = assess(request, store, ground, refractivity_maps=refractivity_maps)
    verdict = _verdict(answer, saved.get("idea"))
    names = _names(answer, verdict, saved)
    chosen = names[-1] if len(names) == 1 else names[1]
    changed, same = _changes(answer, names)
    paths, left_out = masts_that_matter(answer, chosen, request.roof, ground, refractivity_maps)
    roof = answer["roof"]
    return {
        "name": saved["name"],
        "where": place(roof["latitude_deg"], roof["longitude_deg"]),
        "aerial_agl_m": roof["aerial_agl_m"],
        "ground_amsl_m": roof["ground_amsl_m"],
        "day": date.today().isoformat(),
        "note": saved.get("note") or "",
        "decision": _decision(answer, verdict),
        "reason": verdict["reason"] if verdict else "",
        "measure": _measure(answer, verdict),
        "chain": _title(answer, chosen),
        "roof_line": _roof_line(answer, chosen, str(saved.get("landmark") or "")),
        "columns": [_title(answer, name) for name in names],
        "roles": ["up now", "idea 1", "idea 2"][: len(names)],
        "changed": changed,
        "same": same,
        "parts": _parts(request, store, chosen, verdict),
        "price": _price(answer, chosen, verdict),
        "paths": paths,
        "paths_left_out": left_out,
        "readings": [_reading(answer, one) for one in answer.get("readings", {}).get("items", [])],
        "commissioning": sheet_rows(answer, chosen, INSTRUMENTS["meter"].mer_limit_db),
        "assumptions": [
            f"{one['id']}: {one['value']:g} {one['unit']} ({one['reason']})" for one in answer["assumptions"]
        ],
        "settings": _settings(request),
        "cautions": [*_gone(answer, saved), *answer["cautions"]],
        "sources": [
            ", ".join(str(one[key]) for key in ("title", "document", "licence") if one.get(key))
            for one in answer["sources"]
        ]
        + list(answer["credits"]),
    }


def _verdict(answer: Document, idea: object) -> Document | None:
    verdicts: list[Document] = answer["verdicts"]
    return next((one for one in verdicts if one["candidate"] == idea), verdicts[0] if verdicts else None)


def _names(answer: Document, verdict: Document | None, saved: Mapping[str, Any]) -> list[str]:
    """Chains in columns: up now, idea 1, idea 2."""
    if verdict is None:
        return list(answer["chains"])[:1]
    second = str(saved.get("second") or "")
    shown = [verdict["baseline"], verdict["candidate"]]
    return [*shown, second] if second in answer["chains"] and second not in shown else shown


def _gone(answer: Document, saved: Mapping[str, Any]) -> list[str]:
    """Say which of the kept ideas is not among the chains any more."""
    return [
        f'{words} was "{saved[key]}", which is not among the chains any more: {instead}.'
        for key, words, instead in (
            ("idea", "Idea 1", "the best of the others stands in its place"),
            ("second", "Idea 2", "it is left out"),
        )
        if saved.get(key) and saved[key] not in answer["chains"]
    ]


def _title(answer: Document, name: str) -> str:
    return str(answer["chains"][name]["title"]) if name in answer["chains"] else name


def _money(value: float, currency: str) -> str:
    return f"{value:.0f} {currency}"


def _decision(answer: Document, verdict: Document | None) -> str:
    """Say the verdict in the words of the page."""
    total = len(answer["multiplexes"])
    if total == 0:
        return "Nothing is on the air within reach of this roof."
    if verdict is None:
        return "There is one chain only: nothing to compare it with."
    candidate = answer["chains"][verdict["candidate"]]
    price = verdict["price_difference"]
    bare = verdict["baseline"] == NOTHING
    today = (
        "Nothing is up today."
        if bare
        else f"Today {count_words(answer['chains'][verdict['baseline']]['expected_count'])} of {total}."
    )
    if none_is_worth_it(answer["verdicts"]):
        today += f" None of the {len(answer['verdicts'])} ideas is worth it."
    change = f"{candidate['title']} {change_words(answer['multiplexes'], verdict)}"
    cost = "; its price is not known" if price is None else f" for {_money(price, candidate['currency'])}"
    limit = max(0.0, verdict["break_even_price"])
    word = verdict["answer"] or "no answer without a price"
    up_to = f", up to {_money(limit, candidate['currency'])}" if limit >= 1 else ""
    return f"{today} {change}{cost}: {word}{up_to}."


def _measure(answer: Document, verdict: Document | None) -> Document | None:
    """Say which reading would settle it, and what each level would mean."""
    one = verdict and verdict["measure_next"]
    if not one:
        return None
    emission = _emission(answer, one["emission"])
    tips = []
    for tip in one["tipping"]:
        low, high = tip["from_dbuv"], tip["to_dbuv"]
        span = (
            f"below {high:.0f}" if low is None else f"above {low:.0f}" if high is None else f"{low:.0f} to {high:.0f}"
        )
        tips.append(f"{span} dB(µV): {tip['answer'] or 'no answer'}")
    return {
        "what": f"{channel_words(emission)} from {emission['transmitter_name']} at {bearing_words(one['bearing_deg'])}",
        "where": reading_place(one, _title(answer, one["through"])),
        "first": bool(verdict and verdict["answer"] == "measure first"),
        "tips": tips,
    }


def _roof_line(answer: Document, name: str, landmark: str) -> list[list[str]]:
    """Figures for the rigger, each with what it is."""
    chain = answer["chains"].get(name)
    if chain is None or not chain["pointings"]:
        return []
    declination = answer["roof"]["declination"]
    rows = []
    for aerial in chain.get("aerials") or chain["pointings"]:
        rows.append([bearing_words(aerial["pointing_deg"]), "from true north"])
        if declination:
            compass = aerial["pointing_deg"] - declination["declination_deg"]
            error = f"by compass on {declination['day']}, ±{2 * declination['error_deg']:.1f}° (19 in 20)"
            rows.append([bearing_words(compass), error])
        rows.append([RODS[aerial["polarisation"]], "seen from the ground"])
    rows.append([f"{answer['roof']['aerial_agl_m']:g} m", "above the ground"])
    if landmark:
        rows.append([landmark, "along the line"])
    return rows


def _changes(answer: Document, names: Sequence[str]) -> tuple[list[Document], list[str]]:
    """Rows of the multiplexes that change, largest first, and the others in words."""
    changed, same = [], []
    for multiplex in answer["multiplexes"]:
        cells = [multiplex["chains"].get(name) for name in names]
        chances = [cell["chance"] if cell else 0.0 for cell in cells]
        words = [f"{chance_words(cell['chance'])} {cell['grade']}" if cell else "no aerial" for cell in cells]
        if any(has_moved(cells[0], cell) for cell in cells[1:]):
            emission = _emission(answer, next(cell["emission"] for cell in reversed(cells) if cell))
            origin = f"{channel_words(emission)} from {emission['transmitter_name']}"
            changed.append((chances, {"name": multiplex["name"], "from": origin, "cells": words}))
        else:
            same.append(f"{multiplex['name']} ({words[-1]})")
    changed.sort(key=lambda row: -max(abs(one - row[0][0]) for one in row[0]))
    return [row for _, row in changed], same


def _parts(request: AssessRequest, store: Store, name: str, verdict: Document | None) -> list[list[str]]:
    """Name and price of what has to be paid for: the verdict's bill, or the whole chain without one."""
    if name == NOTHING:
        return []
    given = {chain.name: chain for chain in request.chains or () if not isinstance(chain, str)}
    chain = given.get(name) or stored_chain(store, name)
    lines = _bill(verdict, name) or bill_document(bill(chain, None, baseline_is_up=True))
    return [
        [_line_words(line), "not known" if line["pays"] is None else _to_pay(line["pays"], chain.currency)]
        for line in lines
        if line["state"] in ("bought", "set off") and line["pays"] != 0
    ]


def _to_pay(value: float, currency: str) -> str:
    return f"{value:.0f} {currency}" if float(value).is_integer() else f"{value:.2f} {currency}"


def _bill(verdict: Document | None, name: str) -> list[Document]:
    return list(verdict["bill"]) if verdict and verdict["candidate"] == name else []


def _line_words(line: Mapping[str, Any]) -> str:
    words = ", ".join(filter(None, (line["name"], line["detail"])))
    return f"less {words}, bought instead" if line["what"] == "baseline" else words


def _price(answer: Document, name: str, verdict: Document | None) -> str:
    """What it comes to, what stays and what comes down."""
    chain = answer["chains"].get(name)
    if chain is None:
        return ""
    lines = _bill(verdict, name)
    pays = verdict["price_difference"] if verdict and lines else chain["price"]
    told = ["The price of a part is not known." if pays is None else f"Together {_to_pay(pays, chain['currency'])}."]
    for state, words in (("kept", "Stays up, not paid again"), ("taken down", "Comes down")):
        named = [_line_words(line) for line in lines if line["state"] == state and line["what"] == "part"]
        told += [f"{words}: {'; '.join(named)}."] if named else []
    return " ".join(told)


def _reading(answer: Document, one: Mapping[str, Any]) -> str:
    unit = KIND_WORDS.get(one["kind"], "")
    value = one.get("state") or (f"{one['value_db']:.1f} {unit}" if "value_db" in one else one["kind"])
    day = f"{one['day']}: " if one.get("day") else ""
    used = "" if one["used"] else f" (not used: {one['reason']})"
    foreseen = ""
    if one["kind"] in KIND_WORDS and one.get("predicted_db") is not None:  # a picture has no figure to set beside it
        foreseen = f", foreseen {one['predicted_db']:.1f}"
    of = one.get("multiplex") or one.get("emission") or ""
    if any(each["id"] == one.get("read_of") for each in answer["emissions"]):
        emission = _emission(answer, one["read_of"])
        of = f"{channel_words(emission)} from {emission['transmitter_name']}"
    return f"{day}{of} {value}{foreseen}{used}"


def _settings(request: AssessRequest) -> list[str]:
    lost = {50: "half of the year", 90: "877 hours", 99: "88 hours"}[request.availability_percent]
    return [
        f"good enough is {request.availability_percent} % of the time: {lost} lost in an average year",
        f"transmitters within {request.reach_km:g} km",
        *(f"changed for this roof: {name} = {value:g}" for name, value in request.assumptions.items()),
    ]


def _emission(answer: Document, ident: str) -> Document:
    return next(one for one in answer["emissions"] if one["id"] == ident)
