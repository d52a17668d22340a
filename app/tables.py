"""Rows of the published tables in app/data; each table has its source beside it."""

from __future__ import annotations

import csv
from pathlib import Path

DATA = Path(__file__).parent / "data"

HOW_KNOWN = {
    "S": "read in its text",
    "S2": "as quoted by others",
    "D": "by definition",
    "MH": "high confidence",
    "MM": "medium confidence",
    "ML": "low confidence",
    "T": "practice of the trade",
}  # what a figure's flag means to a reader


def told_source(source: str, flag: str) -> str:
    """Say where a figure is from and how surely it is known."""
    return f"{source} ({HOW_KNOWN[flag]})"


def rows(name: str) -> list[dict[str, str]]:
    """Rows of one table, by the names in its first line."""
    with (DATA / f"{name}.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))
