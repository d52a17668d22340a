"""What land cover and coastline know beyond the elevation: where the sea is, and what stands on the ground."""

from __future__ import annotations

import hashlib
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from terrain import land_mask
from terrain.cover import Cover, numbers_of

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

# How much of a cover's height is set up on bare ground: a surface model shows it already, a radar's echo comes
# from about half-way up a wood. Our choice.
STANDING_SHARE = {"bare": 1.0, "radar-surface": 0.5, "surface": 0.0}
# The sea of a cover map holds only where the ground is this near to 0 m: noise of surface models, tide. Our choice.
SEA_LEVEL_M = 3.0


@dataclass(frozen=True, slots=True)
class Overlay:
    """Land cover, if there is any, and Natural Earth's coastline."""

    cover: Cover | None = None

    @property
    def version(self) -> str:
        """Short hash that changes with the cover."""
        return hashlib.sha256(f"coast-1 {self.cover.version if self.cover else ''}".encode()).hexdigest()[:8]

    def filled(self, lat: FloatArray, lon: FloatArray, height_m: FloatArray) -> FloatArray:
        """Heights at positions (any shape): 0 m at sea by the coastline where no raster has one, else as they came."""
        missing = np.isnan(height_m)
        if not missing.any():
            return height_m
        filled = height_m.copy()
        filled[missing] = np.where(land_mask.is_sea(lat[missing], lon[missing]), 0.0, np.nan)
        return filled

    def sea(self, lat: FloatArray, lon: FloatArray, height_m: FloatArray, water: BoolArray) -> BoolArray:
        """Where the sea is (n,), given what the rasters know: heights, NaN where missing, and flat water at 0 m.

        Without elevation it is sea where the coastline says so. Flat water at 0 m is sea unless the cover shows
        land or a lake. Where a cover map shows sea, or water that the coastline takes for sea, it is sea if the
        ground is within 3 m of 0.
        """
        missing = np.isnan(height_m)
        sea = water.copy()
        if missing.any():
            sea[missing] = land_mask.is_sea(lat[missing], lon[missing])
        if self.cover is not None:
            low = np.flatnonzero(~missing & (np.abs(height_m) <= SEA_LEVEL_M))
            seen = self.cover.category(lat[low], lon[low])
            open_water, sea_water, inland = (seen == number for number in numbers_of("water", "sea", "inland-water"))
            land = (seen != 0) & ~open_water & ~sea_water & ~inland
            by_cover = sea_water | (open_water & land_mask.is_sea(lat[low], lon[low]))
            sea[low] = (sea[low] & ~land & ~inland) | by_cover
        return sea


def with_cover(
    cover: Cover,
    lat: FloatArray,
    lon: FloatArray,
    surface_amsl_m: FloatArray,
    bare_amsl_m: FloatArray,
    kinds: Sequence[str],
) -> FloatArray:
    """Surface (n,) [m] once the cover stands on the bare ground, as far as the raster does not show it.

    `kinds` (n,) is the kind of the raster that answers at each point, "" for none.
    """
    share = np.array([STANDING_SHARE.get(kind, 0.0) for kind in kinds])
    if not share.any():
        return surface_amsl_m
    standing = np.nan_to_num(cover.height_m(lat, lon)) * share
    return np.asarray(np.maximum(surface_amsl_m, bare_amsl_m + standing))
