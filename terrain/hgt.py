"""Reads .hgt tiles: plain, zipped or gzipped squares of big-endian 16-bit heights, placed by their name.

The name gives the south-west corner in whole degrees (N49E011); samples are points, the outermost on
the tile's edges, and neighbours share them. -32768 is a void. (SRTM documentation, NASA/USGS, "Data
Formatting".) GDAL reads these, too, but hangs on a damaged zip (seen with GDAL 3.10), while Python's
own zip and gzip check the sum of what they unpack.
"""

from __future__ import annotations

import gzip
import math
import re
import struct
import zipfile
import zlib
from pathlib import Path
from typing import Any

import numpy as np
from affine import Affine
from numpy.typing import NDArray

from terrain.errors import RasterError

SUFFIXES = (".hgt", ".hgt.zip", ".hgt.gz", ".zip")
VOID = -32768

_PLACE = re.compile(r"([NS])(\d{1,2})([EW])(\d{1,3})", re.IGNORECASE)
_LARGEST_SIDE = 10_801  # a third of an arc-second; larger "tiles" are something else


def hgt_header(path: Path) -> tuple[int, Affine]:
    """Samples along each side, and the transform of their pixels, from name and size alone.

    Raises RasterError if it is no such tile or cut short.
    """
    name, size = _name_and_size(path)
    side = math.isqrt(size // 2)
    if 2 * side * side != size or not 2 <= side <= _LARGEST_SIDE:
        raise RasterError(
            f"{path.name} holds {size} bytes, which is no square of 16-bit heights: it is cut short or no .hgt tile, "
            "fetch it again"
        )
    place = _PLACE.match(name) or _PLACE.match(path.name)
    if place is None:
        raise RasterError(
            f"{path.name} does not say where it lies: .hgt tiles are named by their south-west corner, "
            "such as N49E011.hgt"
        )
    south = float(place[2]) * (1 if place[1].upper() == "N" else -1)
    west = float(place[4]) * (1 if place[3].upper() == "E" else -1)
    pixel = 1 / (side - 1)
    return side, Affine(pixel, 0.0, west - pixel / 2, 0.0, -pixel, south + 1 + pixel / 2)


def read_hgt(path: Path) -> NDArray[np.int16]:
    """All samples of a tile. Raises RasterError where it is damaged."""
    side, _ = hgt_header(path)
    expected = 2 * side * side
    try:
        # Never more than expected is unpacked: the size that an archive states may be a lie.
        if path.suffix.lower() == ".zip":
            with zipfile.ZipFile(path) as archive, archive.open(_member(path, archive)) as file:
                content = file.read(expected + 1)
        elif path.suffix.lower() == ".gz":
            with gzip.open(path) as file:
                content = file.read(expected + 1)
                content += file.read(1)  # meets the end, where the sum is checked
        else:
            content = path.read_bytes()
    except (OSError, EOFError, zipfile.BadZipFile, zlib.error, NotImplementedError, RuntimeError) as error:
        raise RasterError(f"{path.name} is damaged or cannot be read: fetch it again or take it out") from error
    if len(content) != expected:
        raise RasterError(f"{path.name} is damaged: fetch it again or take it out")
    return np.frombuffer(content, dtype=">i2").reshape(side, side).astype(np.int16)


def _name_and_size(path: Path) -> tuple[str, int]:
    """The tile's own name and its size unpacked, without unpacking it."""
    if path.suffix.lower() == ".zip":
        try:
            with zipfile.ZipFile(path) as archive:
                member = _member(path, archive)
                return Path(member.filename).name, member.file_size
        except RasterError:
            raise
        except (zipfile.BadZipFile, NotImplementedError, ValueError, struct.error) as error:
            raise RasterError(f"{path.name} is no zip file, or is cut short: fetch it again") from error
    if path.suffix.lower() == ".gz":
        with path.open("rb") as file:
            file.seek(-4, 2)
            return path.name, int(struct.unpack("<I", file.read(4))[0])  # RFC 1952, section 2.3.1: ISIZE
    return path.name, path.stat().st_size


def _member(path: Path, archive: zipfile.ZipFile) -> Any:
    """The one tile in a zip file."""
    tiles = [member for member in archive.infolist() if member.filename.lower().endswith(".hgt")]
    if len(tiles) != 1:
        raise RasterError(
            f"{path.name} holds {len(tiles)} .hgt tiles: give zip files with one each, and unpack other rasters"
        )
    return tiles[0]
