"""Shaded relief as map tiles: neutral greys, water flat, nothing where there is no ground.

Tiles are those of the common web map: spherical Mercator, zoom z, column x from the west, row y from
the north (OGC 17-083r4, annex D, WebMercatorQuad).
"""

from __future__ import annotations

import io

import numpy as np
from numpy.typing import NDArray
from PIL import Image
from scipy import ndimage

from terrain.blocks import COARSE
from terrain.mosaic import Ground

FloatArray = NDArray[np.float64]

LAST_ZOOM = 22
_EQUATOR_M = 2 * np.pi * 6_378_137.0

# Greys of 255: flat land, how far shading moves it, water. Our choice: quiet enough to write on.
_LIGHT = (230, 128, 199)
_DARK = (56, 92, 31)

# Light comes mainly from the north-west, as maps have it, and a little from beside and behind, so
# that ridges along the light are seen, too: bearing [deg] and share.
_LIGHTS = ((315.0, 0.55), (270.0, 0.20), (0.0, 0.20), (225.0, 0.05))
_LIGHT_ABOVE_HORIZON = np.deg2rad(45.0)
# Slopes are drawn steeper the wider the view, else hills vanish: by (pixel / 8 m)^0.5, at least 1.
_STEEPEN_FROM_M, _STEEPEN_POWER = 8.0, 0.5

_MARGIN = 2  # pixels round the tile, so that its edge is shaded like its middle


def tile_webp(ground: Ground, z: int, x: int, y: int, size: int = 256, dark: bool = False) -> bytes | None:
    """One tile as WebP of `size` × `size` pixels, transparent where no raster has a height.

    None where there is nothing at all: no ground in the tile, or no such tile.
    Raises RasterError and CacheError as `Ground.elevation_m`.
    """
    if not (0 <= z <= LAST_ZOOM and 0 <= x < 2**z and 0 <= y < 2**z):
        return None
    lat, lon = _pixel_centres(z, x, y, size)
    pixel_m = _EQUATOR_M / (2**z * size) * np.cos(np.deg2rad(lat))
    middle_m = float(pixel_m[pixel_m.shape[0] // 2, 0])
    height, water = _heights(ground, lat, lon, middle_m)
    inner = np.s_[_MARGIN:-_MARGIN, _MARGIN:-_MARGIN]
    known = np.isfinite(height)
    if not known[inner].any():
        return None
    flat, depth, wet = _DARK if dark else _LIGHT
    grey = flat + depth * _shade(height, pixel_m, middle_m)
    grey = np.where(water, wet, grey)[inner]
    return _webp(np.clip(np.rint(grey), 0, 255).astype(np.uint8), known[inner])


def _pixel_centres(z: int, x: int, y: int, size: int) -> tuple[FloatArray, FloatArray]:
    """Latitudes (n, 1) and longitudes (1, n) of a tile's pixels and of those in its margin [deg]."""
    step = np.arange(-_MARGIN, size + _MARGIN) + 0.5
    right = (x + step / size) / 2**z
    down = (y + step / size) / 2**z
    lat = np.rad2deg(np.arctan(np.sinh(np.pi * (1 - 2 * down))))
    lon = 360.0 * (right % 1.0) - 180.0
    return lat[:, None], lon[None, :]


def _heights(ground: Ground, lat: FloatArray, lon: FloatArray, pixel_m: float) -> tuple[FloatArray, NDArray[np.bool_]]:
    """Heights and water at pixels; from means where a pixel is as wide as several samples."""
    finest = ground.finest_spacing_m(float(lat.min()), float(lon.min()), float(lat.max()), float(lon.max()))
    if pixel_m < COARSE[1] * finest:
        return ground.elevation_and_water(lat, lon)
    height = ground.mean_elevation_m(lat, lon, pixel_m)
    water = height == 0
    # Cells and pixels do not coincide: a little blur takes the beat between them out of the slopes.
    known = np.isfinite(height)
    weight = ndimage.gaussian_filter(known.astype(float), 0.7)
    blurred = ndimage.gaussian_filter(np.where(known, height, 0.0), 0.7)
    return np.where(known, blurred / np.maximum(weight, 1e-9), np.nan), water


def _shade(height: FloatArray, pixel_m: FloatArray, middle_m: float) -> FloatArray:
    """How much lighter than flat ground each pixel is: 0 on the flat, up to about ±0.5."""
    steepen = max(1.0, (middle_m / _STEEPEN_FROM_M) ** _STEEPEN_POWER)
    # Beside a missing pixel no slope is known: drawn flat, not as a cliff.
    south, east = (np.nan_to_num(slope) for slope in np.gradient(height))
    to_north, to_east = -steepen * south / pixel_m, steepen * east / pixel_m
    length = np.sqrt(1 + to_north**2 + to_east**2)
    light: FloatArray = np.zeros(height.shape)
    for bearing, share in _LIGHTS:
        towards_north, towards_east = np.cos(np.deg2rad(bearing)), np.sin(np.deg2rad(bearing))
        facing = -(to_north * towards_north + to_east * towards_east) * np.cos(_LIGHT_ABOVE_HORIZON)
        light = light + share * np.maximum(0.0, (facing + np.sin(_LIGHT_ABOVE_HORIZON)) / length)
    shade: FloatArray = light - np.sin(_LIGHT_ABOVE_HORIZON)
    return shade


def _webp(grey: NDArray[np.uint8], known: NDArray[np.bool_]) -> bytes:
    picture = Image.fromarray(grey)
    if not known.all():
        picture = Image.merge("LA", (picture, Image.fromarray(np.where(known, 255, 0).astype(np.uint8))))
    out = io.BytesIO()
    picture.convert("RGB" if known.all() else "RGBA").save(out, "WEBP", quality=82, method=2)
    return out.getvalue()
