"""Measured files that belong to a part: their size, bytes and text; whatever is wrong names the file and the mend."""

from __future__ import annotations

import codecs
from pathlib import Path
from typing import NoReturn

from app.errors import ChainError

LARGEST_BYTES = 10_000_000  # a sweep of 200 000 points or a pattern at every frequency; instruments write far less


def content_of(path: Path, field: str) -> bytes:
    """Bytes of a file; its size is looked at before it is read.

    Raises
    ------
    ChainError
        No such file, too large, or not readable.
    """
    try:
        check_size(path.name, path.stat().st_size, field)
        return path.read_bytes()
    except FileNotFoundError as error:
        raise ChainError(f"{path.name}: there is no such file: check its name and folder", field=field) from error
    except OSError as error:
        raise ChainError(
            f"{path.name}: cannot be read ({error.strerror}): check that it is a file and its rights", field=field
        ) from error


def text_of(name: str, content: bytes, field: str) -> str:
    """Text of a file's content in UTF-8, UTF-16 with a mark, or an old code page.

    Raises
    ------
    ChainError
        Too large, empty, or binary.
    """
    check_size(name, len(content), field)
    if content.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        text = content.decode("utf-16", errors="replace")
    else:
        try:
            text = content.decode("utf-8-sig")
        except UnicodeDecodeError:
            text = content.decode("latin-1")  # comments in an older code page; the numbers are plain ASCII
    if not text.strip():
        refuse(name, "is empty", "save it again", field)
    if "\x00" in text:
        refuse(name, "is binary, not text", "export it as text, not in the program's own format", field)
    return text


def check_size(name: str, size: int, field: str) -> None:
    """Refuse a file of more bytes than any measurement has."""
    if size > LARGEST_BYTES:
        refuse(
            name,
            f"has {size / 1e6:,.0f} MB, the limit is {LARGEST_BYTES / 1e6:.0f} MB",
            "export the measurement alone",
            field,
        )


def refuse(name: str, came: str, mend: str, field: str) -> NoReturn:
    """Raise the ChainError that names the file, what is wrong with it and the mend."""
    raise ChainError(f"{name}: {came}: {mend}", field=field)
