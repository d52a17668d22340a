"""Small real rasters, written where a test needs them."""

from pathlib import Path

import numpy as np
import pytest
import rasterio
from affine import Affine


@pytest.fixture
def write_raster(tmp_path):
    """Writes heights (rows, columns) as a GeoTIFF whose upper left pixel corner is at west, north."""

    def write(heights, name="ground.tif", west=8.0, north=47.0, pixel=0.001, crs="EPSG:4326", **options) -> Path:
        heights = np.asarray(heights)
        path = tmp_path / "rasters" / name
        path.parent.mkdir(exist_ok=True)
        transform = options.pop("transform", Affine(pixel, 0, west, 0, -pixel, north))
        unit = options.pop("unit", None)
        profile = {
            "driver": "GTiff",
            "height": heights.shape[0],
            "width": heights.shape[1],
            "count": 1,
            "dtype": heights.dtype.name,
            "crs": crs,
            "transform": transform,
        }
        with rasterio.open(path, "w", **(profile | options)) as file:
            file.write(heights, 1)
            if unit:
                file.units = (unit,)
        return path

    return write


@pytest.fixture
def slope():
    """Heights of a plane, 3 m down per row and 2 m per column to the right, in the middle of pixels."""

    def heights(rows=20, columns=30, dtype="int16"):
        return (100 + 3 * np.arange(rows)[:, None] + 2 * np.arange(columns)).astype(dtype)

    return heights
