"""The report as a tagged PDF, set by typst; words from outside reach it as data, never as markup."""

from __future__ import annotations

import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any, Literal

import typst

Standard = Literal["ua-1"]
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
    inputs = {"content": json.dumps(content)}
    return typst.compile(TEMPLATE, format="pdf", sys_inputs=inputs, pdf_standards=[*standards])
