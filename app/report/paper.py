"""The report as a tagged PDF, set by typst; words from outside reach it as data, never as markup."""

from __future__ import annotations

import json
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import typst

TEMPLATE = Path(__file__).parent / "report.typ"


def report_pdf(content: Mapping[str, Any]) -> bytes:
    """Return an A4 document, tagged for readers (PDF/UA-1)."""
    made = typst.compile(
        str(TEMPLATE), format="pdf", sys_inputs={"content": json.dumps(content)}, pdf_standards=["ua-1"]
    )
    assert isinstance(made, bytes)  # one document, not a list of pages
    return made
