"""A typed or exported CSV file as rows of text: encoding, separator, quotes and line ends.

A quoted cell may run over some lines if they make one row together; else one line is one row, so a quote left open
spoils its own line and no other.
"""

from __future__ import annotations

import codecs
import csv
import re
from collections.abc import Collection, Sequence
from dataclasses import dataclass
from pathlib import Path

from app.errors import TransmitterFileError

LARGEST_FILE_MB = 64
MOST_LINES = 20  # that one row may run over
_SHOWN_CHARACTERS = 60


@dataclass(frozen=True, slots=True)
class Refusal:
    """One thing in one row that keeps it out."""

    line: int  # as an editor counts, from 1
    column: str  # empty where it concerns the whole row
    value: str
    message: str  # what came, what is allowed, what to do

    def __str__(self) -> str:
        return f"line {self.line}: {self.message}"


@dataclass(frozen=True, slots=True)
class Row:
    """One line of the file: trimmed text by column."""

    line: int
    cells: dict[str, str]


@dataclass(frozen=True, slots=True)
class Table:
    """The readable rows of a file, and the lines that are no rows."""

    columns: tuple[str, ...]  # as in the header, in lower case
    rows: tuple[Row, ...]
    refused: tuple[Refusal, ...]
    encoding: str
    separator: str


def read_table(path: Path, known_columns: Collection[str]) -> Table:
    """Rows of a CSV file whose header holds some of known_columns.

    Raises
    ------
    TransmitterFileError
        No file, too large, no text, empty, or a header without any known column.
    """
    text, encoding = _text(path)
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    numbered = [(number, line) for number, line in enumerate(lines, start=1) if line.strip(" \t,;")]
    if numbered and re.fullmatch(r"sep=.", numbered[0][1].strip(), re.IGNORECASE):  # a spreadsheet's own first line
        numbered = numbered[1:]
    if not numbered:
        raise TransmitterFileError(
            f"{path.name} is empty: write a header with the columns {', '.join(known_columns)}, then one row "
            "per channel"
        )
    separator, columns = _header(path, numbered[0][1], known_columns)
    rows, refused = _rows(numbered[1:], separator, columns)
    return Table(columns, tuple(rows), tuple(refused), encoding, separator)


def _rows(
    numbered: Sequence[tuple[int, str]], separator: str, columns: tuple[str, ...]
) -> tuple[list[Row], list[Refusal]]:
    """Rows of the lines under the header, and the lines that are none."""
    rows, refused = [], []
    place, open_until = 0, 0
    while place < len(numbered):
        number, line = numbered[place]
        cells, lines = _cells(line, separator), 1
        if cells is None:
            cells, lines = _cells_over_lines([one for _, one in numbered[place : place + MOST_LINES]], separator)
            if cells is not None and len(cells) != len(columns):
                cells, lines = None, 1
        # After a quote left open, a line with a lone quote is what closed it: no row of its own.
        stray = place < open_until and line.count('"') % 2 == 1
        if cells is None or stray:
            message = "a quote is opened and not closed: close it, or write two quotes for one inside a text"
            if stray:
                message = "a quote is closed that was opened in a line above, and both do not make a row: mend both"
                open_until = 0
            else:
                open_until = place + MOST_LINES
            refused.append(Refusal(number, "", line[:_SHOWN_CHARACTERS], message))
        elif len(cells) != len(columns):
            message = (
                f"the row has {len(cells)} cells and the header {len(columns)}: "
                f'put a text that holds "{separator}" in quotes and leave unknown cells empty'
            )
            refused.append(Refusal(number, "", line[:_SHOWN_CHARACTERS], message))
        else:
            rows.append(Row(number, dict(zip(columns, cells, strict=True))))
        place += lines
    return rows, refused


def _cells_over_lines(lines: Sequence[str], separator: str) -> tuple[list[str] | None, int]:
    """Cells of the first lines whose quotes pair together, line breaks as spaces, and how many lines those are."""
    for count in range(2, len(lines) + 1):
        cells = _cells("\n".join(lines[:count]), separator)
        if cells is not None:
            return [re.sub(r"\s*\n\s*", " ", cell) for cell in cells], count
    return None, 1


def _text(path: Path) -> tuple[str, str]:
    """Whole file as text, with the name of its encoding."""
    limit = LARGEST_FILE_MB * 1_000_000
    try:
        if path.is_dir():
            raise TransmitterFileError(f"{path} is a folder: name the CSV file inside it")
        size = path.stat().st_size
        if size > limit:
            raise TransmitterFileError(
                f"{path.name} has {size / 1e6:.0f} MB, the limit is {LARGEST_FILE_MB} MB: split it into several files"
            )
        with path.open("rb") as file:
            data = file.read(limit + 1)
    except OSError as error:
        raise TransmitterFileError(
            f"{path} cannot be read ({error.strerror}): check its name and permissions"
        ) from error
    if data.startswith(codecs.BOM_UTF8):
        candidates = ["utf-8-sig"]
    elif data.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        candidates = ["utf-16"]
    elif data[1:2] == b"\0":
        candidates = ["utf-16-le"]  # a header starts with plain letters, half of each is zero
    elif data[:1] == b"\0":
        candidates = ["utf-16-be"]
    else:
        candidates = ["utf-8", "cp1252"]
    for encoding in candidates:
        try:
            text = data.decode(encoding)
        except UnicodeDecodeError:
            continue
        if not re.search(r"[\x00-\x08\x0e-\x1f]", text):
            return text, encoding
    hint = "export the sheet as CSV" if data.startswith((b"PK", b"\xd0\xcf")) else "save it as CSV in UTF-8"
    raise TransmitterFileError(f"{path.name} is not a text file: {hint}")


def _header(path: Path, line: str, known_columns: Collection[str]) -> tuple[str, tuple[str, ...]]:
    """Separator and column names: the separator under which most names are known."""
    best: tuple[int, str, tuple[str, ...]] = (0, "", ())
    for separator in (",", ";", "\t"):
        names = tuple(cell.lower() for cell in _cells(line, separator) or [])
        known = sum(name in known_columns for name in names)
        if known > best[0]:
            best = (known, separator, names)
    if not best[0]:
        raise TransmitterFileError(
            f'{path.name} has no header: its first line is "{line[:_SHOWN_CHARACTERS]}"; '
            f"start with {', '.join(known_columns)}"
        )
    twice = sorted({name for name in best[2] if name and best[2].count(name) > 1})
    if twice:
        raise TransmitterFileError(f"{path.name} has the column {', '.join(twice)} twice: keep one of them")
    return best[1], best[2]


def _cells(line: str, separator: str) -> list[str] | None:
    """Trimmed cells of one line; None if its quotes do not pair."""
    try:
        cells = next(csv.reader([line], delimiter=separator, strict=True, skipinitialspace=True), [])
    except csv.Error:
        return None
    return [cell.strip() for cell in cells]
