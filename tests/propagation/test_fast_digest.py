"""The compiled form says what the plain form says, field by field, over rasters of every kind; else it says nothing."""

import shutil
from dataclasses import fields
from pathlib import Path

import numpy as np
import pytest

from propagation.fast_digest import Ends, digests
from terrain.mosaic import Ground
from terrain.raster import declare
from tests.propagation.both_forms import PATHS, compare, ends_within, hills

CUTS = Path(__file__).parent.parent / "data" / "nasa" / "srtm"


@pytest.fixture
def raster(write_raster):
    def written(heights, **options):
        path = write_raster(heights, **options)
        declare(path, kind="bare")
        return path

    return written


def test_compiled_and_plain_form_agree_within_a_hundredth_of_a_decibel(raster, tmp_path):
    """0.01 dB: float32 heights and sums; over 13,000 paths of real tiles the largest is in DEVELOPERS.md."""
    ground = Ground.open([raster(hills().astype("int16"))], tmp_path / "cache")
    (sheet,) = ground.sheets()
    count, largest = compare(ground, sheet, ends_within(sheet))
    assert count == PATHS
    assert largest < 0.01


def test_paths_cross_tiles_of_one_lattice(raster, tmp_path):
    """Four tiles, cut from one field of heights and put side by side, pixel-centred."""
    heights = hills().astype("int16")
    files = [
        raster(heights[r : r + 150, c : c + 200], name=f"{r}-{c}.tif", west=8 + c / 1000, north=47 - r / 1000)
        for r in (0, 150)
        for c in (0, 200)
    ]
    ground = Ground.open(files, tmp_path / "cache")
    (sheet,) = ground.sheets()
    assert len(sheet.tiles) == 4
    count, largest = compare(ground, sheet, ends_within(sheet))
    assert count == PATHS
    assert largest < 0.01


@pytest.mark.parametrize(
    ("cuts", "sheets", "fewest"),
    [
        (("hills_north", "hills_south"), 1, 38),  # two tiles that share a row, nearly all paths across the seam
        (("island_west", "island_east"), 1, 38),  # a ridge and the sea
        (("small_voids",), 1, 20),  # bridged
        (("large_void",), 1, 2),  # paths beside it; the many over it are left to the plain form
    ],
)
def test_both_forms_agree_over_cuts_of_real_tiles(tmp_path, cuts, sheets, fewest):
    """SRTM of 3 arc-seconds, NASA, public domain: tests/data/nasa/srtm, each cut with its source beside it."""
    for cut in cuts:
        shutil.copy(CUTS / f"{cut}.tif", tmp_path)
    ground = Ground.open([tmp_path], tmp_path / "cache")
    found = ground.sheets()
    assert len(found) == sheets
    count, largest = compare(ground, found[0], ends_within(found[0]))
    assert fewest <= count <= PATHS
    assert largest < 0.01


def test_a_projected_raster_is_as_good(raster, tmp_path):
    """UTM zone 32 north, 60 m."""
    ground = Ground.open(
        [raster(hills().astype("float32"), crs="EPSG:32632", west=500_000, north=5_200_000, pixel=60)],
        tmp_path / "cache",
    )
    (sheet,) = ground.sheets()
    count, largest = compare(ground, sheet, ends_within(sheet))
    assert count == PATHS
    assert largest < 0.01


def test_feet_become_metres(raster, tmp_path):
    ground = Ground.open([raster(hills().astype("int16"), unit="ft")], tmp_path / "cache")
    (sheet,) = ground.sheets()
    assert compare(ground, sheet, ends_within(sheet))[1] < 0.01


def test_a_path_over_a_void_or_beyond_the_edge_is_left_to_the_plain_form(raster, tmp_path):
    heights = hills().astype("int16")
    heights[100:160, 150:230] = -32768
    ground = Ground.open([raster(heights, nodata=-32768)], tmp_path / "cache")
    (sheet,) = ground.sheets()
    lat, lon = sheet.grid.position(np.array([20.0, 130.0, 130.0, 20.0]), np.array([20.0, 20.0, 20.0, 20.0]))
    to_lat, to_lon = sheet.grid.position(np.array([20.0, 130.0, 130.0, -9.0]), np.array([380.0, 120.0, 380.0, 380.0]))
    four = np.full(4, 50.0)
    ends = Ends(lat, lon, four, to_lat, to_lon, four, np.zeros(5, np.int64), np.zeros(0))
    assert digests(sheet, ends).known.tolist() == [True, True, False, False]


def test_many_threads_say_the_same_as_one(raster, tmp_path):
    from concurrent.futures import ThreadPoolExecutor

    ground = Ground.open([raster(hills().astype("int16"))], tmp_path / "cache")
    (sheet,) = ground.sheets()
    ends = ends_within(sheet, paths=300)
    alone = digests(sheet, ends)
    with ThreadPoolExecutor(4) as pool, ThreadPoolExecutor(4) as requests:
        batches = list(requests.map(lambda _: digests(sheet, ends, each=pool.map, parts=4), range(4)))
    for batch in batches:
        for field in fields(alone.terms):
            assert np.array_equal(getattr(batch.terms, field.name), getattr(alone.terms, field.name))
