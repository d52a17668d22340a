"""What one process works with: the store and the ground, opened once."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from app.demo.relief import ensure_demo_relief
from app.demo.scenario import ensure_demo
from app.paths import cache_dir, data_dir
from app.settings import load_settings
from app.transmitters.store import DEMO_SOURCE, Store
from propagation.refractivity import refractivity
from terrain.mosaic import Ground


@dataclass(frozen=True, slots=True)
class World:
    """Store and ground of one data folder."""

    store: Store
    ground: Ground
    is_demo: bool  # only the invented scenario is stored
    refractivity_maps: Path | None  # folder of the full maps, if the user has them


def terrain_dir() -> Path:
    """Folder of the user's rasters."""
    return data_dir() / "terrain"


def open_world() -> World:
    """Open the data folder; an empty one starts with the invented scenario and its relief.

    Raises
    ------
    StoreError, MapError
        The folder, a setting or a map cannot be used.
    """
    store = Store.open(data_dir())
    ensure_demo(store)
    is_demo = all(source.id == DEMO_SOURCE for source in store.sources())
    folders = [terrain_dir()] if terrain_dir().is_dir() else []
    if is_demo:
        folders.append(ensure_demo_relief(cache_dir() / "demo"))
    maps = load_settings(data_dir()).refractivity_maps
    refractivity(0.0, 0.0, maps)  # maps that cannot be read are refused before a question is asked
    return World(store, Ground.open(folders, cache_dir()), is_demo, maps)
