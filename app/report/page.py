"""The report as a page of HTML; every word from outside is escaped."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from html import escape
from typing import Any

from app.report.drawing import LEGEND


def report_html(content: Mapping[str, Any], pdf_address: str) -> str:
    """Return the whole page."""
    title = f"Report on {content['name']}"
    return "\n".join(
        [
            '<!doctype html><html lang="en"><head><meta charset="utf-8">',
            '<meta name="viewport" content="width=device-width, initial-scale=1">',
            f"<title>{escape(title)}</title>",
            '<link rel="icon" href="/static/icon.svg" type="image/svg+xml">',
            '<link rel="stylesheet" href="/static/styles/base.css">',
            '<link rel="stylesheet" href="/static/styles/report.css"></head><body>',
            '<main class="report">',
            *_body(content, pdf_address),
            "</main></body></html>",
        ]
    )


def _body(content: Mapping[str, Any], pdf_address: str) -> Iterable[str]:
    yield f"<header><h1>{escape(content['name'])}</h1>"
    height = f"aerial {content['aerial_agl_m']:g} m above ground"
    yield f"<p>{escape(content['where'])}, {height}; {content['day']}</p>"
    yield (
        '<p class="no-paper"><a href="/">Back to the page</a> '
        f'<a href="{escape(pdf_address, quote=True)}">The same as PDF</a></p></header>'
    )
    yield f'<p class="decision">{escape(content["decision"])}</p>'
    yield f"<p>{escape(content['reason'])}</p>"
    if content["note"]:
        yield f"<p>{escape(content['note'])}</p>"
    if content["measure"]:
        lead = "Read first" if content["measure"]["first"] else "A reading would tell most"
        what, where = (escape(content["measure"][key]) for key in ("what", "where"))
        yield f"<p>{lead}: <strong>{what}</strong>, {where}</p>"
        yield _list(content["measure"]["tips"])
    if content["roof_line"]:
        yield f"<h2>On the roof: {escape(content['chain'])}</h2><dl class='roof-line'>"
        yield from (f"<div><dd>{escape(a)}</dd><dt>{escape(b)}</dt></div>" for a, b in content["roof_line"])
        yield "</dl>"
    yield "<h2>Before anyone climbs</h2>" + _list(content["cautions"], "cautions")
    yield "<h2>What changes</h2>"
    heads = ["Multiplex", *(f"{role}: {name}" for role, name in zip(content["roles"], content["columns"], strict=True))]
    yield _table(heads, [[f"{row['name']}, {row['from']}", *row["cells"]] for row in content["changed"]])
    if content["same"]:
        yield f"<p>{len(content['same'])} unchanged: {escape(', '.join(content['same']))}.</p>"
    if content["parts"]:
        yield "<h2>Parts and prices</h2>" + _table(["To be paid", "Price"], content["parts"], "prices")
        yield f"<p>{escape(content['price'])}</p>"
    yield "<h2>The paths that matter</h2>" + (f"<p class='small'>{LEGEND}</p>" if content["paths"] else "")
    for row in content["paths"]:
        yield f"<div class='path'><h3>{escape(row['title'])}</h3><p>{escape(row['sentence'])}</p>"
        if row["picture"]:
            yield f'<div class="scroll" tabindex="0" role="group" aria-label="drawing">{row["picture"]["svg"]}</div>'
        yield f"<p class='small'>{escape('; '.join(row['channels']))}</p></div>"
    if content["paths_left_out"]:
        yield f"<p>Masts with smaller chances, left out here: {content['paths_left_out']}.</p>"
    yield "<h2>Readings</h2>" + (_list(content["readings"]) if content["readings"] else "<p>None was taken yet.</p>")
    yield '<section class="commissioning"><h2>Commissioning sheet</h2>'
    yield f"<p>{escape(content['name'])}, {escape(content['chain'])}</p>"
    heads = ["Outlet", "Multiplex", "Channel", "Level expected, dB(µV)", "MER expected, dB", "Level read", "MER read"]
    rows = [
        [*(row[key] for key in ("outlet", "multiplex", "channel", "level", "mer")), "", ""]
        for row in content["commissioning"]
    ]
    yield _table(heads, rows, "blank")
    yield "<p class='signed'><span>Date</span><span>Name</span></p></section>"
    yield "<h2>What it rests on</h2>" + _list(content["settings"])
    yield (
        "<details open><summary>Every value that was chosen</summary>"
        + _list(content["assumptions"], "small")
        + "</details>"
    )
    yield "<h2>Sources</h2>" + _list(content["sources"], "small")


def _list(items: Sequence[str], kind: str = "") -> str:
    return f'<ul class="{kind}">' + "".join(f"<li>{escape(one)}</li>" for one in items) + "</ul>"


def _table(heads: Sequence[str], rows: Sequence[Sequence[str]], kind: str = "") -> str:
    head = "".join(f'<th scope="col">{escape(one)}</th>' for one in heads)
    body = "".join(
        "<tr>"
        + f'<th scope="row">{escape(row[0])}</th>'
        + "".join(f"<td>{escape(one)}</td>" for one in row[1:])
        + "</tr>"
        for row in rows
    )
    return (
        f'<div class="scroll" tabindex="0" role="group" aria-label="{escape(heads[0])}">'
        f'<table class="{kind}"><thead><tr>{head}</tr></thead><tbody>{body}</tbody></table></div>'
    )
