"""Invented relief of 3° × 4° at 1 arc-second, with sea, hills and a plateau: twelve tiles, mirrored at their edges."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import rasterio
from affine import Affine

from terrain.raster import declare

SIDE = 3601
SOUTH, WEST, ROWS, COLUMNS = 46, 8, 3, 4


def write_tiles(folder: Path) -> tuple[Path, Path]:
    """Write the tiles as deflated GeoTIFFs of bare ground, and as .hgt; returns both folders."""
    tif, hgt = folder / "tif", folder / "hgt"
    tif.mkdir(parents=True), hgt.mkdir()
    one = _tile()
    for row in range(ROWS):
        for column in range(COLUMNS):
            heights = np.ascontiguousarray(one[:: (-1) ** row, :: (-1) ** column])
            south, west = SOUTH + ROWS - 1 - row, WEST + column
            name = f"N{south:02d}E{west:03d}"
            heights.astype(">i2").tofile(hgt / f"{name}.hgt")
            pixel = 1 / (SIDE - 1)
            profile = {
                "driver": "GTiff", "height": SIDE, "width": SIDE, "count": 1, "dtype": "int16", "crs": "EPSG:4326",
                "transform": Affine(pixel, 0, west - pixel / 2, 0, -pixel, south + 1 + pixel / 2), "nodata": -32768,
                "compress": "deflate", "predictor": 2, "tiled": True, "blockxsize": 512, "blockysize": 512,
            }  # fmt: skip
            with rasterio.open(tif / f"{name}.tif", "w", **profile) as file:
                file.write(heights, 1)
            declare(tif / f"{name}.tif", kind="bare")
    return tif, hgt


def write_cover(folder: Path) -> Path:
    """Write a map of the same 3° × 4°: sea where the relief ends, else patches of woods, fields, lakes and towns."""
    side, patch = SIDE - 1, 8
    random = np.random.default_rng(5)
    codes = np.array([12, 18, 23, 24, 2, 1, 41], np.uint8)  # CORINE's places in its list
    small = random.choice(codes, (side // patch, side // patch), p=[0.3, 0.15, 0.2, 0.2, 0.1, 0.03, 0.02])
    one = np.where(_tile()[:side, :side] == 0, np.uint8(44), small.repeat(patch, axis=0).repeat(patch, axis=1))
    rows = [np.hstack([one[:: (-1) ** row, :: (-1) ** column] for column in range(COLUMNS)]) for row in range(ROWS)]
    path = folder / "corine.tif"
    profile = {
        "driver": "GTiff", "height": ROWS * side, "width": COLUMNS * side, "count": 1, "dtype": "uint8",
        "crs": "EPSG:4326", "transform": Affine(1 / side, 0, WEST, 0, -1 / side, SOUTH + ROWS),
        "compress": "deflate", "tiled": True, "blockxsize": 512, "blockysize": 512,
    }  # fmt: skip
    with rasterio.open(path, "w", **profile) as file:
        file.write(np.vstack(rows), 1)
    return path


def _tile() -> np.ndarray:
    """Fractal heights: spectrum falling with the wavenumber to the power -2.1, about 9 % root mean square slope."""
    side = 4096
    wave = np.hypot(np.fft.fftfreq(side)[:, None], np.fft.rfftfreq(side)[None, :]) * side
    wave[0, 0] = 1
    random = np.random.default_rng(4)
    spectrum = (random.normal(size=wave.shape) + 1j * random.normal(size=wave.shape)) / wave**2.1
    heights = np.fft.irfft2(spectrum)[:SIDE, :SIDE]
    heights = 350 + 300 * heights / heights.std()
    return np.rint(np.clip(heights, 0, 8000)).astype(np.int16)  # what lies below 0 is sea
