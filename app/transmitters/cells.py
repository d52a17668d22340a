"""Cells of one row read as numbers, words and dates; what does not fit is noted, never guessed."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import date

from app.transmitters.csv_text import Refusal, Row

_SHOWN_CHARACTERS = 60


@dataclass(slots=True)
class Cells:
    """Reader of one row; each method gives None and notes a refusal where the cell does not fit."""

    row: Row
    decimal_comma: bool
    refused: list[Refusal] = field(default_factory=list)

    def refuse(self, column: str, rule: str) -> None:
        """Note that a cell does not fit: `column is "value": rule`."""
        came = self.text(column)
        shown = came if len(came) <= _SHOWN_CHARACTERS else came[:_SHOWN_CHARACTERS] + "…"
        self.note(column, f'{column} is "{shown}": {rule}' if came else f"{column} is empty: {rule}")

    def note(self, column: str, message: str) -> None:
        """Note a refusal whose message says all."""
        self.refused.append(Refusal(self.row.line, column, self.text(column)[:_SHOWN_CHARACTERS], message))

    def text(self, column: str) -> str:
        """Text of a cell; empty also where the file has no such column."""
        return self.row.cells.get(column, "")

    def name(self, column: str) -> str | None:
        """Return a name of 1 to 120 printable characters with a letter or digit in it."""
        value = self.text(column)
        if len(value) <= 120 and value.isprintable() and re.search(r"[^\W_]", value):
            return value
        self.refuse(column, "write a name of 1 to 120 characters with a letter or digit")
        return None

    def number(
        self, column: str, lowest: float, highest: float, unit: str, *, example: str, hint: str = ""
    ) -> float | None:
        """Return the number of a filled cell, from lowest to highest."""
        value = self.parsed(self.text(column))
        if value is None:
            mark = "" if not self.decimal_comma else " (this file writes decimals with a comma)"
            self.refuse(column, f"write a number such as {self._marked(example)}{mark}")
        elif not lowest <= value <= highest:
            self.refuse(column, f"use {lowest:g} to {highest:g} {unit}{hint}")
            value = None
        return value

    def parsed(self, text: str) -> float | None:
        """Return plain decimal text as a number in the file's decimal mark; None if it is none."""
        text = text.replace("−", "-")
        mark = "," if self.decimal_comma else r"\."
        if not re.fullmatch(rf"[+-]?[0-9]{{1,15}}({mark}[0-9]{{0,15}})?([eE][+-]?[0-9]{{1,2}})?", text):
            return None
        return float(text.replace(",", "."))

    def word(self, column: str, words: Mapping[str, str]) -> str | None:
        """Return what a word stands for, whatever its case."""
        found = words.get(self.text(column).casefold())
        if found is None:
            self.refuse(column, f"write one of {', '.join(dict.fromkeys(words.values()))}")
        return found

    def day(self, column: str) -> date | None:
        """Return the date of a filled cell."""
        try:
            return date.fromisoformat(self.text(column))
        except ValueError:
            self.refuse(column, "write a date as year-month-day, such as 2027-03-31")
            return None

    def _marked(self, example: str) -> str:
        return example.replace(".", ",") if self.decimal_comma else example
