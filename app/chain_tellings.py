"""Answers about chains in plain text, for a terminal."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from app.lists import table


def told_sweep(document: Mapping[str, Any]) -> str:
    """Return the three sweeps as text: heights as a table, then pointings, then a second aerial."""
    lines = []
    rows = [
        {"height m": row["aerial_agl_m"], **{name: one["expected_count"] for name, one in row["chains"].items()}}
        for row in document["height"]
    ]
    if rows:
        lines += ["expected multiplexes by height", table(rows, ""), ""]
    for name, one in document["pointing"].items():
        lines.append(f"{name}: best turned to {one['best_deg']:.0f}° true, rods {one['polarisation']}")
    lines.append("")
    lines += [f"{name}: {one['sentence']}" for name, one in document["two_aerials"].items()]
    return "\n".join(lines)


def told_cheapest(document: Mapping[str, Any]) -> str:
    """Return the Pareto front as text, cheapest first."""
    own = [(row["chain"]["labour_price"], row["chain"]["visit_price"]) for row in document["front"]]
    parts_alone = any(not any(prices) for prices in own)
    work = "without labour and visit: --labour and --visit add them" if parts_alone else "with labour and visit"
    lines = [f"{document['tried']} chains tried; prices are of a chain bought whole, {work}"]
    for row in document["front"]:
        price = f"{row['price']:g} {document['currency']}"
        lines.append(f"{price}: about {row['expected_count']:.1f}, {row['chain']['title']}")
        pays = "It pays" if row["pays"] else "It does not pay"
        worth = f"{document['worth_per_multiplex']:g} {document['currency']}"
        lines.append(f"  {row['reason']} {pays}, one more counting as worth {worth}.")
    if document["left_out"]:
        lines.append(f"left out for want of a price: {', '.join(document['left_out'])}")
    return "\n".join(lines)


def told_block(document: Mapping[str, Any]) -> str:
    """Return the proposal for a block as text: parts, levels, what is still to do."""
    parts = [
        {
            "part": part["name"],
            "kind": part["kind"],
            "after": part.get("after", ""),
            "gain or loss dB": part.get("gain_db", part.get("tap_loss_db", part.get("loss_db", ""))),
            "length m": part.get("length_m", ""),
        }
        for part in document["chain"]["parts"]
    ]
    findings = document["findings"] or [f"every channel inside the window of {document['standard']} at every outlet"]
    return "\n".join([table(parts, ""), "", table(document["outlets"], ""), "", *(f"- {one}" for one in findings)])
