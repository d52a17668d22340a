"""Where files live: data, cache, and the page."""

from __future__ import annotations

import os
from pathlib import Path

import platformdirs

from app.errors import StoreError


def data_dir() -> Path:
    """Folder of the store and of added rasters, from GAINWORTH_DATA_DIR or the platform's place."""
    return _folder("GAINWORTH_DATA_DIR", platformdirs.user_data_path("gainworth"), "data")


def cache_dir() -> Path:
    """Folder of everything that can be made again, from GAINWORTH_CACHE_DIR or the platform's place."""
    return _folder("GAINWORTH_CACHE_DIR", platformdirs.user_cache_path("gainworth"), "cache")


def static_dir() -> Path:
    """The page's files: inside the installed package, else beside it in the checkout."""
    packed = Path(__file__).parent / "_static"
    return packed if packed.is_dir() else Path(__file__).parent.parent / "static"


def _folder(variable: str, default: Path, name: str) -> Path:
    folder = Path(os.environ.get(variable) or default)
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise StoreError(
            f"the {name} folder {folder} cannot be made ({error.strerror}): set {variable} to a folder you may write"
        ) from error
    return folder
