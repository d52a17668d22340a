"""Patterns from files: our own CSV, and the NSMA format for digitised antenna patterns.

Our CSV has a header and one line per bearing, in any order:

    angle_deg,loss_db                      # from the axis, clockwise seen from above; against the strongest direction
    angle_deg,gain_dbd,frequency_mhz       # or gains, in dBd or dBi: only their differences count here
    angle_deg,loss_db,polarisation         # how the aerial was mounted: horizontal or vertical
    …,emission                             # what it was lit with, if it was the other one

`frequency_mhz`, `polarisation` and `emission` may be left out. Cells may be separated by semicolons or tabs, then
decimals may have a comma.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from pathlib import Path
from typing import NoReturn

from app.chain.files import content_of, refuse, text_of
from app.chain.nsma import pattern_from_nsma
from app.chain.pattern import FIELD, Cut, MeasuredPattern, Polarisation, checked_cut, checked_pattern

_VALUES = ("loss_db", "gain_dbd", "gain_dbi")
_COLUMNS = ("angle_deg", *_VALUES, "frequency_mhz", "polarisation", "emission")
_POLARISATIONS: Mapping[str, Polarisation] = {
    "horizontal": "horizontal", "h": "horizontal",
    "vertical": "vertical", "v": "vertical",
}  # fmt: skip
_STRONGEST_DB = 1.0  # a loss counts from the strongest direction, give or take

Key = tuple[float | None, Polarisation | None, Polarisation | None]


def read_pattern(path: Path) -> MeasuredPattern:
    """Pattern of a file, in our CSV or in the NSMA format.

    Raises
    ------
    ChainError
        The file, its line where there is one, what came and what to do.
    """
    return pattern_from_bytes(path.name, content_of(path, FIELD))


def pattern_from_bytes(name: str, content: bytes) -> MeasuredPattern:
    """Pattern of a file's content, as it was uploaded; the format is told by its first line."""
    text = text_of(name, content, FIELD)
    first = next(line for line in text.splitlines() if line.strip())
    if first.strip().upper().startswith("REVNUM"):
        return pattern_from_nsma(name, text)
    return _from_csv(name, text)


def _from_csv(name: str, text: str) -> MeasuredPattern:
    lines = [(number, line) for number, line in enumerate(text.splitlines(), 1) if line.strip(" ,;\t")]
    if not lines:
        refuse(name, "holds no more than separators", "begin with a line such as angle_deg,loss_db", FIELD)
    separator, columns, value = _header(name, lines[0][1])
    points: dict[Key, tuple[list[float], list[float]]] = {}
    for number, line in lines[1:]:
        cells = _cells(line, separator)
        if len(cells) != len(columns):
            refuse(name, f"line {number} has {len(cells)} cells, the header {len(columns)}", "give one for each", FIELD)
        row = _Row(name, number, dict(zip(columns, cells, strict=True)), separator != ",")
        angles, values = points.setdefault(row.key, ([], []))
        angles.append(row.number("angle_deg"))
        values.append(row.number(value))
    cuts = tuple(_cut(name, key, points, value) for key in points)
    return checked_pattern(name, cuts)


def _header(name: str, line: str) -> tuple[str, list[str], str]:
    """Separator, columns and which of them holds the value."""
    separator = max(",;\t", key=line.count)
    columns = [cell.casefold() for cell in _cells(line, separator)]
    mend = "begin with a line such as angle_deg,loss_db"
    unknown = [column for column in columns if column not in _COLUMNS]
    if unknown:
        refuse(name, f'the first line has a column "{unknown[0][:40]}"', f"use {', '.join(_COLUMNS)}; {mend}", FIELD)
    values = [column for column in columns if column in _VALUES]
    if len(values) != 1 or columns.count("angle_deg") != 1 or len(set(columns)) < len(columns):
        refuse(
            name, f'the first line is "{line[:60]}"', f"one angle_deg and one of {', '.join(_VALUES)}; {mend}", FIELD
        )
    return separator, columns, values[0]


def _cells(line: str, separator: str) -> list[str]:
    return [cell.strip(" \t\"'") for cell in line.split(separator)]


def _cut(name: str, key: Key, points: Mapping[Key, tuple[list[float], list[float]]], value: str) -> Cut:
    frequency_mhz, polarisation, emission = key
    angles, values = points[key]
    own = points.get((frequency_mhz, polarisation, None), points.get((frequency_mhz, polarisation, polarisation)))
    if own is None:
        refuse(name, f"has the {emission} emission only", f"measure the {polarisation} one as well", FIELD)
    if value == "loss_db":
        strongest = min(own[1])
        if abs(strongest) > _STRONGEST_DB:
            refuse(name, f"its least loss is {strongest:g} dB", "count it from the strongest direction, 0 there", FIELD)
        losses = [loss - strongest for loss in values]
    else:
        losses = [max(own[1]) - gain for gain in values]
    return checked_cut(name, angles, losses, frequency_mhz=frequency_mhz, polarisation=polarisation, emission=emission)


class _Row:
    """Cells of one line as numbers and words."""

    def __init__(self, name: str, line: int, cells: Mapping[str, str], may_have_comma: bool) -> None:
        self.name, self.line, self.cells, self.may_have_comma = name, line, cells, may_have_comma

    @property
    def key(self) -> Key:
        frequency = self.number("frequency_mhz") if self.cells.get("frequency_mhz") else None
        if frequency is not None and not 30 <= frequency <= 6000:
            self._refuse("frequency_mhz", "use 30 to 6000 MHz")
        polarisation, emission = self._polarisation("polarisation"), self._polarisation("emission")
        if emission is not None and polarisation is None:
            self._refuse("emission", "say the polarisation of the aerial as well")
        return frequency, polarisation, None if emission == polarisation else emission

    def number(self, column: str) -> float:
        text = self.cells[column]
        try:
            value = float(text.replace(",", ".") if self.may_have_comma else text)
        except ValueError:
            value = math.nan
        if not math.isfinite(value):
            self._refuse(column, "write a number")
        return value

    def _polarisation(self, column: str) -> Polarisation | None:
        text = self.cells.get(column, "").casefold()
        if text and text not in _POLARISATIONS:
            self._refuse(column, "use horizontal or vertical, or leave it empty")
        return _POLARISATIONS[text] if text else None

    def _refuse(self, column: str, mend: str) -> NoReturn:
        refuse(self.name, f'line {self.line}: {column} is "{self.cells[column][:40]}"', mend, FIELD)
