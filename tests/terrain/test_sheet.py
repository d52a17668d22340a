"""A sheet gives the ground's own heights, or says that it has none."""

import numpy as np
import pytest

from terrain.mosaic import Ground
from terrain.patches import in_rows


def samples(sheet):
    return in_rows(sheet.patches, sheet.grid.rows, sheet.grid.columns)


def bilinear(sheet, row, column):
    top, left = row.astype(int), column.astype(int)
    rows = samples(sheet).astype(float)
    rows[rows == sheet.water] = -sheet.offset_m / sheet.scale
    corners = [rows[top + down, left + right] for down in (0, 1) for right in (0, 1)]
    v, u = row - top, column - left
    height = (corners[0] * (1 - u) + corners[1] * u) * (1 - v) + (corners[2] * (1 - u) + corners[3] * u) * v
    return np.where(np.min(corners, axis=0) > sheet.gap, height * sheet.scale + sheet.offset_m, np.nan)


def compare(ground, sheet, seed=1):
    """Share of positions where the sheet answers; where it does, it must say what the ground says."""
    random = np.random.default_rng(seed)
    row, column = random.uniform(0, sheet.grid.rows - 1.01, 3000), random.uniform(0, sheet.grid.columns - 1.01, 3000)
    height = bilinear(sheet, row, column)
    known = np.isfinite(height)
    lat, lon = sheet.grid.position(row[known], column[known])
    np.testing.assert_allclose(height[known], ground.elevation_m(lat, lon), atol=0.01)
    return known.mean()


@pytest.fixture
def random_heights():
    return np.random.default_rng(2).integers(1, 900, (60, 80)).astype("int16")


def test_one_raster_is_one_sheet(write_raster, tmp_path, random_heights):
    ground = Ground.open([write_raster(random_heights)], tmp_path / "cache")
    (sheet,) = ground.sheets()
    assert compare(ground, sheet) > 0.9  # all but the rim


def test_tiles_that_share_their_edge_samples_join(write_raster, tmp_path, random_heights):
    west = write_raster(random_heights[:, :41], "west.tif")
    east = write_raster(random_heights[:, 40:], "east.tif", west=8.04)
    ground = Ground.open([west, east], tmp_path / "cache")
    (sheet,) = ground.sheets()
    assert samples(sheet).shape == (62, 82)
    assert compare(ground, sheet) > 0.9


def test_where_two_tiles_disagree_the_sheet_has_a_gap(write_raster, tmp_path, random_heights):
    other = random_heights.copy()
    other[:, 40] += 1
    west = write_raster(random_heights[:, :41], "west.tif")
    east = write_raster(other[:, 40:], "east.tif", west=8.04)
    ground = Ground.open([west, east], tmp_path / "cache")
    (sheet,) = ground.sheets()
    assert (samples(sheet)[1:-1, 41] == sheet.gap).all()
    assert compare(ground, sheet) > 0.8


def test_a_finer_raster_takes_its_place_out_of_the_coarser_sheet(write_raster, tmp_path, random_heights):
    coarse = write_raster(random_heights, "coarse.tif")
    fine = write_raster(random_heights[:40, :40], "fine.tif", west=8.02, north=46.98, pixel=0.0005)
    ground = Ground.open([coarse, fine], tmp_path / "cache")
    sheets = ground.sheets()
    assert [sheet.tiles[0].raster.name for sheet in sheets] == ["fine.tif", "coarse.tif"]
    assert compare(ground, sheets[0]) > 0.9
    assert 0.7 < compare(ground, sheets[1]) < 0.9


def test_small_voids_are_bridged_and_large_ones_stay_gaps(write_raster, tmp_path, random_heights):
    random_heights[10:14, 10:14] = -32768
    random_heights[20:50, 20:50] = -32768
    ground = Ground.open([write_raster(random_heights, nodata=-32768)], tmp_path / "cache")
    (sheet,) = ground.sheets()
    assert (samples(sheet)[11:15, 11:15] > sheet.gap).all()
    assert (samples(sheet)[21:51, 21:51] == sheet.gap).all()
    compare(ground, sheet)


def test_a_sheet_is_kept_and_mapped_the_next_time(write_raster, tmp_path, random_heights):
    path = write_raster(random_heights)
    first = Ground.open([path], tmp_path / "cache").sheets()[0]
    again = Ground.open([path], tmp_path / "cache").sheets()[0]
    assert not again.patches.flags.writeable
    assert np.array_equal(first.patches, again.patches)


def test_far_tiles_do_not_make_one_huge_sheet(write_raster, tmp_path, random_heights):
    near, far = write_raster(random_heights, "near.tif"), write_raster(random_heights, "far.tif", west=18.0)
    assert len(Ground.open([near, far], tmp_path / "cache").sheets()) == 2
