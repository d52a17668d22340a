"""What land cover and coastline know beyond the elevation: where the sea is, and what stands on the ground."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from terrain import land_mask
from terrain.cover import Cover, numbers_of

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

# Water of an elevation raster counts as sea only this near to the sea of the coastline: polders and lakes at
# 0 m lie farther off. Five times what the coastline is wrong by. Our choice.
SHORE_KM = 5.0
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

    def refine(
        self, lat: FloatArray, lon: FloatArray, height_m: FloatArray, water: BoolArray
    ) -> tuple[FloatArray, BoolArray]:
        """Heights and sea (n,) at positions, given what the rasters know: NaN where missing, and flat water at 0 m.

        Without elevation it is sea, at 0 m, where the coastline says so; else it stays missing. Flat water at 0 m
        is sea unless the cover shows land, or the coastline knows no sea within 5 km. Where a cover map shows sea,
        or water that the coastline takes for sea, it is sea if the ground is within 3 m of 0.
        """
        missing = np.isnan(height_m)
        sea = np.zeros(height_m.size, dtype=bool)
        if missing.any():
            sea[missing] = land_mask.is_sea(lat[missing], lon[missing])
            height_m = np.where(sea, 0.0, height_m)
        flat = np.flatnonzero(water)
        if flat.size:
            sea[flat] = land_mask.near_sea(lat[flat], lon[flat], SHORE_KM)
        if self.cover is not None:
            low = np.flatnonzero(~missing & (np.abs(height_m) <= SEA_LEVEL_M))
            seen = self.cover.category(lat[low], lon[low])
            open_water, sea_water, inland = (seen == number for number in numbers_of("water", "sea", "inland-water"))
            land = (seen != 0) & ~open_water & ~sea_water & ~inland
            by_cover = sea_water | (open_water & land_mask.is_sea(lat[low], lon[low]))
            sea[low] = (sea[low] & ~land & ~inland) | by_cover
        return height_m, sea


def with_cover(
    cover: Cover,
    lat: FloatArray,
    lon: FloatArray,
    surface_amsl_m: FloatArray,
    bare_amsl_m: FloatArray,
    kind_share: FloatArray,
) -> FloatArray:
    """Surface (n,) [m] once the cover stands on the bare ground, as far as the raster does not show it yet.

    `kind_share` (n,) is the share of the cover's height that is set up: 1 over bare ground, 0 over a surface model.
    """
    standing = np.nan_to_num(cover.height_m(lat, lon)) * kind_share
    return np.asarray(np.fmax(surface_amsl_m, bare_amsl_m + standing))
