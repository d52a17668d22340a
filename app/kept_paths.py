"""Paths that were asked for before: turning an aerial or changing a chain leaves the ground as it is."""

from __future__ import annotations

import pathlib
import threading
from collections import OrderedDict
from collections.abc import Hashable, Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.assumptions import Assumptions
from app.near_roof import surroundings_height_m
from app.roof import Roof
from terrain.mosaic import Ground

if TYPE_CHECKING:
    from app.paths_to_roof import Path, PathKey

MOST_PATHS = 20_000  # about 5 kB each

_paths: OrderedDict[Hashable, Path | str] = OrderedDict()
_lock = threading.Lock()


@dataclass(frozen=True, slots=True)
class KeptPaths:
    """What is kept of one roof over one ground; the Earth's radius follows from the place and the maps."""

    about: tuple[Hashable, ...]  # everything a path depends on but its mast

    @classmethod
    def of(
        cls, ground: Ground, roof: Roof, assumptions: Assumptions, refractivity_maps: pathlib.Path | None
    ) -> KeptPaths:
        """Look up a roof: its place, heights, obstacles, surroundings, and the version of the ground."""
        return cls(
            (
                ground.version,
                roof.latitude_deg,
                roof.longitude_deg,
                roof.aerial_agl_m,
                roof.obstacles,
                surroundings_height_m(roof, assumptions),
                refractivity_maps,
            )
        )

    def get(self, key: PathKey) -> Path | str | None:
        """Return a path, or None if it is not kept."""
        name = (self.about, *_mast(key))
        with _lock:
            if name in _paths:
                _paths.move_to_end(name)
            return _paths.get(name)

    def keep(self, paths: Mapping[PathKey, Path | str]) -> None:
        """Keep paths; those not asked for longest make room."""
        with _lock:
            _paths.update({(self.about, *_mast(key)): path for key, path in paths.items()})
            while len(_paths) > MOST_PATHS:
                _paths.popitem(last=False)


def forget() -> None:
    """Keep nothing of what was asked for."""
    with _lock:
        _paths.clear()


def _mast(key: PathKey) -> tuple[float, float, float]:
    return key.transmitter.latitude_deg, key.transmitter.longitude_deg, key.antenna_agl_m
