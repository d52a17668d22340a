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
from terrain.cover import Cover
from terrain.mosaic import Ground
from terrain.overlay import Overlay


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


def cover_dir() -> Path:
    """Folder of the user's land-cover maps."""
    return data_dir() / "cover"


def own_sources_file() -> Path:
    """File of the user's own sources of open tiles."""
    return data_dir() / "sources.toml"


def is_demo(store: Store) -> bool:
    """Whether only the invented scenario is stored."""
    return all(source.id == DEMO_SOURCE for source in store.sources())


def open_ground(invented: bool) -> Ground:
    """Open the rasters of the data folder, with coastline and land cover unless all is invented."""
    folders = [terrain_dir()] if terrain_dir().is_dir() else []
    if invented:
        return Ground.open([*folders, ensure_demo_relief(cache_dir() / "demo")], cache_dir())
    cover = Cover.open([cover_dir()], cache_dir()) if cover_dir().is_dir() else None
    overlay = Overlay(cover if cover is not None and cover.rasters else None)
    return Ground.open(folders, cache_dir(), overlay, 1e9 * load_settings(data_dir()).cache_limit_gb)


def open_world() -> World:
    """Open the data folder; an empty one starts with the invented scenario and its relief.

    Raises
    ------
    StoreError, MapError
        The folder, a setting or a map cannot be used.
    """
    store = Store.open(data_dir())
    ensure_demo(store)
    invented = is_demo(store)
    maps = load_settings(data_dir()).refractivity_maps
    refractivity(0.0, 0.0, maps)  # maps that cannot be read are refused before a question is asked
    return World(store, open_ground(invented), invented, maps)
