import io

import numpy as np
import pytest
from PIL import Image

from terrain.mosaic import Ground
from terrain.relief import tile_webp

ZOOM, COLUMN, ROW = 13, 4281, 2887  # a tile in the middle of the rasters below: 46.80 to 46.83 N, 8.13 to 8.17 E


@pytest.fixture
def ground_of(tmp_path):
    return lambda *paths: Ground.open(list(paths), tmp_path / "cache")


@pytest.fixture
def hills():
    """Rolling hills of 400 m, 300 × 300 samples at 0.001 deg, with a lake at 0 m in the south-west."""
    row, column = np.mgrid[0:300, 0:300] / 12.0
    heights = (200 * (2 + np.sin(row) + np.cos(column))).astype("int16")
    heights[150:, :100] = 0
    return heights


def pixels(tile):
    return np.asarray(Image.open(io.BytesIO(tile)).convert("RGBA")).astype(int)


def test_a_tile_is_a_neutral_grey_webp_of_the_size_asked_for(write_raster, ground_of, hills):
    ground = ground_of(write_raster(hills))
    tile = tile_webp(ground, ZOOM, COLUMN, ROW)
    assert tile[8:12] == b"WEBP"
    picture = pixels(tile)
    assert picture.shape == (256, 256, 4)
    assert (picture[..., 3] == 255).all()
    assert np.abs(picture[..., :3] - picture[..., :1]).max() <= 2
    assert pixels(tile_webp(ground, ZOOM, COLUMN, ROW, size=512)).shape == (512, 512, 4)


def test_slopes_towards_the_light_are_lighter_than_slopes_away(write_raster, ground_of):
    """Light from the north-west: a ridge that runs north-east has a light and a dark side."""
    row, column = np.mgrid[0:300, 0:300]
    ridge = (2000 - 12 * np.abs(row + column - 337)).clip(1).astype("int16")  # crest through the tile
    grey = pixels(tile_webp(ground_of(write_raster(ridge)), ZOOM, COLUMN, ROW))[..., 0]
    assert grey[:60, :60].mean() > grey[-60:, -60:].mean() + 20


def test_flat_ground_is_one_tone_and_water_another(write_raster, ground_of):
    flat = np.full((300, 300), 100, dtype="int16")
    land = pixels(tile_webp(ground_of(write_raster(flat)), ZOOM, COLUMN, ROW))
    sea = pixels(tile_webp(ground_of(write_raster(flat * 0, name="sea.tif")), ZOOM, COLUMN, ROW))
    assert np.ptp(land[..., 0]) <= 1
    assert np.ptp(sea[..., 0]) <= 1
    assert land[0, 0, 0] > sea[0, 0, 0] + 10


def test_the_dark_variant_is_dark(write_raster, ground_of, hills):
    ground = ground_of(write_raster(hills))
    light, dark = (pixels(tile_webp(ground, ZOOM, COLUMN, ROW, dark=dark))[..., 0] for dark in (False, True))
    assert light.min() > 100 > dark.max()


@pytest.mark.parametrize("zoom", [12, 13, 14])
def test_neighbouring_tiles_join_without_a_seam(write_raster, ground_of, hills, zoom):
    """The change of grey across the border is as large as inside. (WebP rounds: median, 2 greys.)"""
    ground = ground_of(write_raster(hills))
    column, row = COLUMN * 2**zoom // 2**ZOOM, ROW * 2**zoom // 2**ZOOM
    west, east = (pixels(tile_webp(ground, zoom, column + right, row))[..., 0] for right in (0, 1))
    across = np.median(np.abs(east[:, 0] - west[:, -1]))
    inside = np.median(np.abs(np.diff(np.hstack([west[:, -20:], east[:, :20]]), axis=1)))
    assert across <= inside + 2


@pytest.mark.parametrize("zoom", [4, 6, 8])
def test_wide_views_are_drawn_from_means(write_raster, ground_of, hills, tmp_path, zoom):
    ground = ground_of(write_raster(hills))
    scale = 2 ** (ZOOM - zoom)
    alpha = pixels(tile_webp(ground, zoom, COLUMN // scale, ROW // scale))[..., 3]
    assert (alpha == 0).any()
    assert (alpha == 255).any()
    assert list((tmp_path / "cache").rglob("means*.npy"))


def test_means_are_those_of_the_samples_without_the_missing(write_raster, ground_of, hills):
    hills[7, 9] = -9999
    ground = ground_of(write_raster(hills, nodata=-9999))
    lat, lon = 47 - np.array([1.5, 6.5]) * 0.001, 8 + np.array([1.5, 9.5]) * 0.001
    spacing_m = ground.rasters[0].spacing_m
    cells = [hills[0:4, 0:4].astype(float), np.delete(hills[4:8, 8:12].astype(float), 13)]
    got = ground.mean_elevation_m(lat, lon, 4 * spacing_m)
    assert got == pytest.approx([cell.mean() for cell in cells], abs=1e-3)


def test_missing_ground_is_transparent_and_no_cliff(write_raster, ground_of):
    heights = np.full((300, 300), 1500, dtype="int16")
    heights[175:190, 140:160] = -9999
    picture = pixels(tile_webp(ground_of(write_raster(heights, nodata=-9999)), ZOOM, COLUMN, ROW))
    assert (picture[..., 3] == 0).any()
    assert np.ptp(picture[..., 0][picture[..., 3] == 255]) <= 4


@pytest.mark.parametrize(("z", "x", "y"), [(13, 0, 0), (-1, 0, 0), (3, 8, 0), (3, 0, -1), (40, 1, 1), (0, 0, 1)])
def test_no_ground_or_no_such_tile_is_none(write_raster, ground_of, hills, z, x, y):
    assert tile_webp(ground_of(write_raster(hills)), z, x, y) is None


def test_no_rasters_make_no_tiles(ground_of):
    assert tile_webp(ground_of(), 0, 0, 0) is None
