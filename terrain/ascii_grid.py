"""Looks an ESRI ASCII grid over before it is read.

GDAL reads past the end of a grid that is cut short (seen with GDAL 3.10: it fills the memory with
error records) and takes a word for 0 m. So the words are counted and their letters looked at first.
"""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np

from terrain.errors import RasterError

_HEADER = re.compile(rb"\s*([A-Za-z_]+)[ \t]+(\S+)[ \t]*\r?\n")
_OF_NUMBERS = np.zeros(256, dtype=bool)
_OF_NUMBERS[list(b"0123456789+-.eE \t\r\nnaNAif")] = True  # nan and inf are numbers, too
_CHUNK_BYTES = 8 << 20


def check_ascii_grid(path: Path) -> None:
    """Raise a RasterError unless the grid has a header and as many numbers as that says."""
    with path.open("rb") as file:
        start = file.read(4096)
        said: dict[bytes, bytes] = {}
        end = 0
        while match := _HEADER.match(start, end):
            said[match[1].lower()] = match[2]
            end = match.end()
        try:
            expected = int(said[b"ncols"]) * int(said[b"nrows"])
        except (KeyError, ValueError) as error:
            raise RasterError(
                f"{path.name} is no ESRI ASCII grid: it must begin with ncols, nrows, xllcorner, yllcorner and cellsize"
            ) from error
        file.seek(end)
        found, in_word = 0, False
        while data := file.read(_CHUNK_BYTES):
            chunk = np.frombuffer(data, dtype=np.uint8)
            if not _OF_NUMBERS[chunk].all():
                strange = chr(chunk[~_OF_NUMBERS[chunk]][0])
                raise RasterError(f"{path.name} has {strange!r} among its heights: write plain numbers only")
            word = chunk > 32
            begins = word & ~np.concatenate([[in_word], word[:-1]])
            found += int(begins.sum())
            in_word = bool(word[-1])
    if found != expected:
        raise RasterError(
            f"{path.name} has {found} heights where its header says {expected}: it is cut short or damaged, "
            "fetch it again"
        )
