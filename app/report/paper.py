"""The report as a tagged PDF, set by typst; words from outside reach it as data, never as markup."""

from __future__ import annotations

import json
import re
from collections.abc import Mapping
from pathlib import Path
from typing import Any, Literal

import typst

from app.report.drawing import LEGEND

Standard = Literal["ua-1"]
LONG_WORD = re.compile(r"(\S{12})(?=\S)")
TEMPLATE = Path(__file__).parent / "report.typ"


def report_pdf(content: Mapping[str, Any]) -> bytes:
    """Return a tagged A4 document, to PDF/UA-1 where this machine's fonts have every letter of it.

    That standard refuses a letter that no font can draw; such a name must not cost the report, so it is set
    without the standard's promise then, tagged all the same.
    """
    try:
        return _set(content, ["ua-1"])
    except typst.TypstError as error:
        if "could not be displayed" not in str(error):
            raise
        return _set(content, [])


def _set(content: Mapping[str, Any], standards: list[Standard]) -> bytes:
    return typst.compile(TEMPLATE, format="pdf", sys_inputs=inputs(content), pdf_standards=[*standards])


def inputs(content: Mapping[str, Any]) -> dict[str, str]:
    """Return what the template is given."""
    return {"content": json.dumps({**_breakable(content), "legend": LEGEND})}


def _breakable(value: Any) -> Any:
    """Let long words break, so that none runs over the margin: a space of no width every 12 letters."""
    if isinstance(value, str):
        return value if value.startswith("<svg") else LONG_WORD.sub("\\1\u200b", value)
    if isinstance(value, Mapping):
        return {key: _breakable(one) for key, one in value.items()}
    return [_breakable(one) for one in value] if isinstance(value, list) else value
