"""Cuts of SRTM tiles (NASA, public domain) against heights sampled from the whole tiles by scipy.

`tests/data/nasa/srtm/build_srtm_cuts.py` made both; it knows nothing of our code.
"""

import csv
from pathlib import Path

import numpy as np
import pytest
import rasterio
from scipy import ndimage

from terrain.mosaic import Ground

FOLDER = Path(__file__).parent.parent / "data" / "nasa" / "srtm"
with (FOLDER / "points.csv").open() as _file:
    POINTS = list(csv.DictReader(_file))
# Points carry four decimals of a metre and nine of a degree (0.1 mm): on the steepest slopes here,
# 2 m per metre, that is below 0.5 mm. Snapping to samples within 1e-4 of a cell adds up to 9 mm × slope.
TOLERANCE_M = 0.02


def chosen(kind):
    return [point for point in POINTS if point["kind"] == kind]


@pytest.fixture(scope="module")
def ground(tmp_path_factory):
    return Ground.open([FOLDER], tmp_path_factory.mktemp("cache"))


def compare(ground, points):
    lat, lon = (np.array([float(p[key]) for p in points]) for key in ("latitude_deg", "longitude_deg"))
    expected = np.array([float(p["elevation_m"] or "nan") for p in points])
    np.testing.assert_allclose(ground.elevation_m(lat, lon), expected, atol=TOLERANCE_M, rtol=0)


def test_all_seven_cuts_are_placed(ground):
    assert len(ground.rasters) == 7
    assert ground.refused == ()


def test_heights_inside_the_cuts(ground):
    points = chosen("inside")
    assert len(points) == 42
    compare(ground, points)


def test_heights_at_the_seams_of_two_pairs_of_tiles(ground):
    points = chosen("at a seam")
    assert len(points) == 24
    compare(ground, points)


def test_the_highest_sample_beside_a_void_is_found(ground):
    points = chosen("beside a void")
    assert [point["elevation_m"] for point in points] == ["4173.0000"]
    compare(ground, points)


def test_inside_a_large_void_there_is_no_height(ground):
    points = chosen("in a void")
    assert [point["elevation_m"] for point in points] == [""]
    compare(ground, points)


def test_small_voids_are_bridged_between_the_heights_round_them(ground, tmp_path):
    """No outside figure for what a radar did not see: only that the bridge stays between its banks."""
    cut = Ground.open([FOLDER / "small_voids.tif"], tmp_path).survey()
    assert cut.rasters[0].void_share > 0
    west, south, east, north = cut.rasters[0].bounds
    lat = north - (np.arange(40)[:, None] + 0.5) * (north - south) / 40
    lon = west + (np.arange(40) + 0.5) * (east - west) / 40
    with rasterio.open(FOLDER / "small_voids.tif") as file:
        seen = file.read(1, masked=True)
    heights = cut.elevation_m(lat, lon)
    np.testing.assert_allclose(heights[~seen.mask], seen.compressed(), atol=1e-6)
    banks = seen[ndimage.binary_dilation(seen.mask, np.ones((3, 3))) & ~seen.mask].compressed()
    assert ((heights[seen.mask] > banks.min() - 1e-6) & (heights[seen.mask] < banks.max() + 1e-6)).all()


def test_no_step_at_a_seam(ground):
    """1e-7 deg (1 cm) to both sides of 50 N: at most the slope itself, 2 m per metre."""
    lon = np.linspace(11.501, 11.532, 500)
    south, at, north = (ground.elevation_m(50 + offset, lon) for offset in (-1e-7, 0, 1e-7))
    assert np.abs(north - at).max() < 0.03
    assert np.abs(south - at).max() < 0.03


def test_open_sea_round_an_island_is_water_and_its_slopes_are_not(ground):
    lat = np.linspace(38.643, 38.674, 60)[:, None]
    lon = np.linspace(-28.03, -27.97, 120)
    heights, water = ground.elevation_and_water(lat, lon)
    assert water.any()
    assert np.median(heights[water]) == 0
    assert not water[heights > 10].any()
