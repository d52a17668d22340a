"""Which files of a folder are rasters, and what is said of those that cannot be used."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from terrain.raster import SUFFIXES


@dataclass(frozen=True, slots=True)
class Refused:
    """A file that is no part of the ground, and what to do about it."""

    path: Path
    message: str


def raster_files(paths: Sequence[Path], suffixes: tuple[str, ...] = SUFFIXES) -> list[Path]:
    """Files as named, and in folders those that are named like rasters, at any depth.

    Folders whose name begins with a dot are passed over: what is still coming in lies there.
    """
    files: list[Path] = []
    for path in paths:
        if path.is_dir():
            found = (p for p in path.rglob("*") if p.name.lower().endswith(suffixes) and p.is_file())
            files += sorted(p for p in found if not any(part[0] == "." for part in p.relative_to(path).parts[:-1]))
        else:
            files.append(path)
    return list(dict.fromkeys(files))
