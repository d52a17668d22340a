"""With land cover, too, the compiled form says what the plain form says: surface, sea and what stands near a roof."""

import shutil
from pathlib import Path

import numpy as np
import pytest
from pyproj import Transformer

from propagation.fast_digest import digests
from terrain.cover import Cover
from terrain.mosaic import Ground
from terrain.overlay import Overlay
from terrain.raster import declare
from tests.propagation.both_forms import PATHS, compare, ends_within, hills

CUTS = Path(__file__).parent.parent / "data" / "nasa" / "srtm"
LAND = [10, 20, 30, 50, 0]  # WorldCover: trees, shrubs, grass, built-up, unknown


def patchwork(codes, rows, columns, side=7, seed=11):
    """Random patches of class codes."""
    random = np.random.default_rng(seed)
    small = random.choice(np.array(codes, dtype="uint8"), (rows // side + 1, columns // side + 1))
    return small.repeat(side, axis=0).repeat(side, axis=1)[:rows, :columns]


def ground_of(rasters, maps, folder):
    cover = Cover.open(maps, folder / "cache")
    assert cover.refused == ()
    return Ground.open(rasters, folder / "cache", overlay=Overlay(cover))


@pytest.fixture
def bare(write_raster):
    def written(heights, **options):
        path = write_raster(heights, **options)
        declare(path, kind="bare")
        return path

    return written


def test_cover_stands_on_bare_ground_alike_in_both_forms(bare, write_raster, tmp_path):
    """A map three times as fine as the ground, whose unknown patches a coarser one in metres fills in part."""
    east, north = Transformer.from_crs(4326, 3035, always_xy=True).transform(8.1, 46.95)
    maps = [
        write_raster(patchwork(LAND, 900, 1200), name="WorldCover.tif", pixel=0.001 / 3),
        write_raster(
            patchwork([1, 2, 23, 12], 150, 150), name="corine.tif", crs="EPSG:3035", west=east, north=north, pixel=100
        ),
    ]
    ground = ground_of([bare(hills().astype("int16"))], maps, tmp_path)
    (sheet,) = ground.sheets()
    assert len(sheet.cover.grids) == 3
    ends = ends_within(sheet)
    count, largest = compare(ground, sheet, ends)
    assert count == PATHS
    assert largest < 0.01
    (open_ground,) = Ground.open([tmp_path / "rasters" / "ground.tif"], tmp_path / "cache", overlay=Overlay()).sheets()
    covered, open_field = digests(sheet, ends).digest, digests(open_ground, ends).digest
    assert (covered.clearance < open_field.clearance - 0.1).mean() > 0.8  # and it does decide
    assert np.array_equal(covered.h1_source_height_m, open_field.h1_source_height_m)


def test_a_roof_in_a_wood_is_flattened_alike(bare, write_raster, tmp_path):
    """Trees all over, ground every 12 m: four points before the roof are bare, the fifth is not."""
    heights = (60 + hills() / 5).astype("float32")
    wood = write_raster(np.full((400, 500), 10, "uint8"), name="WorldCover.tif", pixel=0.0001)
    ground = ground_of([bare(heights, pixel=0.00012)], [wood], tmp_path)
    (sheet,) = ground.sheets()
    count, largest = compare(ground, sheet, ends_within(sheet))
    assert count >= 38
    assert largest < 0.01


@pytest.mark.parametrize("codes", [[80], [80, 80, 30, 10], [80, 0]])
def test_the_sea_of_a_map_is_the_same_in_both_forms(bare, write_raster, tmp_path, codes):
    """A low coast near 43.7° N, 7.2° E, where Natural Earth's coastline runs: some of the map's water is sea."""
    heights = np.clip(hills() - 110, 0, None).astype("int16")
    options = {"west": 7.0, "north": 43.8}
    water = write_raster(patchwork(codes, 900, 1200, side=90), name="WorldCover.tif", pixel=0.001 / 3, **options)
    ground = ground_of([bare(heights, **options)], [water], tmp_path)
    (sheet,) = ground.sheets()
    ends = ends_within(sheet)
    count, largest = compare(ground, sheet, ends)
    assert count == PATHS
    assert largest < 0.01
    (open_sheet,) = Ground.open([tmp_path / "rasters" / "ground.tif"], tmp_path / "cache", overlay=Overlay()).sheets()
    changed = digests(sheet, ends).digest.sea_km != digests(open_sheet, ends).digest.sea_km
    assert changed.sum() >= 5  # the map has its say


def test_sea_and_lakes_by_name(bare, write_raster, tmp_path):
    """CORINE's sea holds wherever the ground is low, its lakes and its land nowhere."""
    heights = np.clip(hills() - 110, 0, None).astype("int16")
    water = write_raster(patchwork([44, 41, 23, 2], 300, 400, side=60), name="corine.tif")
    ground = ground_of([bare(heights)], [water], tmp_path)
    (sheet,) = ground.sheets()
    count, largest = compare(ground, sheet, ends_within(sheet))
    assert count == PATHS
    assert largest < 0.01


@pytest.mark.parametrize("cuts", [("hills_north", "hills_south"), ("island_west", "island_east")])
def test_both_forms_agree_over_cuts_of_real_tiles(write_raster, tmp_path, cuts):
    """SRTM of 3 arc-seconds, NASA, public domain: a radar's surface, on which half of an invented cover stands."""
    for cut in cuts:
        shutil.copy(CUTS / f"{cut}.tif", tmp_path)
        declare(tmp_path / f"{cut}.tif", kind="radar-surface")
    box = Ground.open([tmp_path], tmp_path / "cache").sheets()[0].grid
    cover = patchwork([*LAND, 80], 1500, 1500)
    pixel = max(box.north_deg - box.south_deg, box.east_deg - box.west_deg) / 1500
    wide = write_raster(cover, name="WorldCover.tif", west=box.west_deg, north=box.north_deg, pixel=pixel)
    ground = ground_of([tmp_path / f"{cut}.tif" for cut in cuts], [wide], tmp_path)
    (sheet,) = ground.sheets()
    assert sheet.cover.standing_m.max() == 7.5
    count, largest = compare(ground, sheet, ends_within(sheet))
    assert count >= 38
    assert largest < 0.01


def test_another_map_is_not_taken_for_the_one_that_was_kept(bare, write_raster, tmp_path):
    files = [bare(hills().astype("int16"))]
    first = write_raster(patchwork(LAND, 300, 400), name="WorldCover.tif")
    before = ground_of(files, [first], tmp_path).sheets()[0].cover.samples.copy()
    second = write_raster(patchwork(LAND, 300, 400, seed=12), name="WorldCover.tif")
    after = ground_of(files, [second], tmp_path).sheets()[0].cover.samples
    assert before.shape == after.shape
    assert not np.array_equal(before, after)


def test_ground_under_the_edge_of_a_map_of_the_world_is_left_to_the_plain_form(bare, write_raster, tmp_path):
    """Across the 180th meridian the columns of such a map begin anew."""
    ground_file = bare(hills().astype("int16"), west=179.8, north=47.0)
    world = write_raster(np.full((180, 360), 10, "uint8"), name="WorldCover.tif", west=-180.0, north=90.0, pixel=1.0)
    assert len(Ground.open([ground_file], tmp_path / "cache").sheets()) == 1
    assert ground_of([ground_file], [world], tmp_path).sheets() == []


def test_paths_that_a_map_cuts_in_two_are_told(bare, write_raster, tmp_path):
    """Two paths of four knots, the second over the far side of the map, where its columns begin anew."""
    wood = write_raster(np.full((30, 40), 10, "uint8"), name="WorldCover.tif", pixel=0.01)
    (sheet,) = ground_of([bare(hills().astype("int16"))], [wood], tmp_path).sheets()
    lon = np.array([8.1, 8.15, 8.2, 8.3, -172.0, -171.9, -171.7, -171.5])
    _, whole = sheet.cover.knots(np.full(8, 46.9), lon, np.array([0, 4, 8]))
    assert whole.tolist() == [True, False]
