import numpy as np
import pytest
from affine import Affine
from pyproj import Transformer

from terrain.mosaic import Ground
from terrain.raster import declare
from tests.terrain.plane import NORTH, PIXEL, WEST, plane, samples


@pytest.fixture
def ground_of(tmp_path):
    return lambda *paths: Ground.open(list(paths), tmp_path / "cache")


def test_height_between_samples_follows_the_plane(write_raster, slope, ground_of):
    ground = ground_of(write_raster(slope()))
    random = np.random.default_rng(1)
    lat = NORTH - random.uniform(0.5, 19.5, 200) * PIXEL
    lon = WEST + random.uniform(0.5, 29.5, 200) * PIXEL
    assert ground.elevation_m(lat, lon) == pytest.approx(plane(lat, lon), abs=1e-6)


def test_many_positions_give_what_each_gives_alone_in_the_common_shape(write_raster, slope, ground_of):
    ground = ground_of(write_raster(slope()))
    lat, lon = np.array([[46.99], [46.985]]), np.array([8.01, 8.02, 9.5])
    heights = ground.elevation_m(lat, lon)
    assert heights.shape == (2, 3)
    alone = [[float(ground.elevation_m(a[0], b)) for b in lon] for a in lat]
    np.testing.assert_array_equal(heights, alone)


@pytest.mark.parametrize(
    ("lat", "lon"), [(46.99, 9.5), (48.0, 8.01), (95.0, 8.01), (46.99, np.nan), (np.inf, 8.01), (-46.99, 8.01)]
)
def test_no_height_outside_the_rasters_or_off_the_earth(write_raster, slope, ground_of, lat, lon):
    ground = ground_of(write_raster(slope()))
    assert np.isnan(ground.elevation_m(lat, lon))
    assert not ground.covers(lat, lon)
    assert np.isnan(ground.spacing_m(lat, lon))
    assert not ground.is_water(lat, lon)


def test_the_last_sample_holds_for_half_a_cell_at_an_outer_edge(write_raster, slope, ground_of):
    ground = ground_of(write_raster(slope()))
    corner = ground.elevation_m([NORTH - 1e-6, NORTH + 1e-6], [WEST + 1e-6, WEST - 1e-6])
    assert corner[0] == pytest.approx(100)
    assert np.isnan(corner[1])


def test_the_finest_raster_answers_and_a_void_falls_through_to_the_next(write_raster, ground_of):
    fine = np.full((40, 40), 100, dtype="int16")
    fine[10:35, 10:35] = -32768
    ground = ground_of(
        write_raster(np.full((10, 10), 50, dtype="int16"), name="coarse.tif", pixel=0.01),
        write_raster(fine, name="fine.tif", pixel=0.001, nodata=-32768),
    )
    assert [info.name for info in ground.rasters] == ["fine.tif", "coarse.tif"]
    lat, lon = [46.9955, 46.98, 46.95], [8.0055, 8.02, 8.05]
    assert ground.elevation_m(lat, lon).tolist() == [100, 50, 50]
    assert ground.spacing_m(46.98, 8.02) == pytest.approx(10 * ground.spacing_m(46.9955, 8.0055), rel=1e-3)


def test_a_void_never_enters_an_interpolation(write_raster, slope, ground_of):
    heights = slope()
    heights[8, :] = -32768
    ground = ground_of(write_raster(heights, nodata=-32768))
    lat = NORTH - np.linspace(6, 11, 501) * PIXEL
    got = ground.elevation_m(lat, 8.0105)
    row = (NORTH - lat) / PIXEL - 0.5
    beside = (row > 7.001) & (row < 8.999)
    assert np.isnan(got[beside]).all()
    assert got[~beside] == pytest.approx(plane(lat, 8.0105)[~beside], abs=0.01)


def test_a_missing_corner_of_no_weight_does_not_count(write_raster, slope, ground_of):
    """A position on a sample needs only that sample, one between two needs only those."""
    heights = slope()
    heights[:, 8:] = -32768
    ground = ground_of(write_raster(heights, nodata=-32768))
    lat, lon = samples(20, 30)
    assert ground.elevation_m(lat[5, 0], lon[7]) == pytest.approx(100 + 15 + 14)
    assert ground.elevation_m(lat[5, 0] - PIXEL / 2, lon[7]) == pytest.approx(100 + 16.5 + 14)


@pytest.mark.parametrize("dtype", ["int16", "float32"])
def test_a_small_void_is_bridged_and_a_plane_comes_back_whole(write_raster, slope, ground_of, dtype):
    heights = slope(dtype=dtype)
    heights[5:15, 8:18] = -9999
    ground = ground_of(write_raster(heights, nodata=-9999))
    lat, lon = samples(20, 30)
    assert ground.elevation_m(lat, lon) == pytest.approx(plane(lat, lon), abs=1e-6)


def test_a_void_more_than_ten_samples_across_stays_missing(write_raster, slope, ground_of):
    heights = slope()
    heights[5:16, 8:18] = -9999
    ground = ground_of(write_raster(heights, nodata=-9999))
    lat, lon = samples(20, 30)
    assert np.isnan(ground.elevation_m(lat, lon)).sum() == 110


def test_the_next_raster_goes_before_bridging(write_raster, ground_of):
    fine = np.full((40, 40), 100, dtype="int16")
    fine[20, 20] = -9999
    fine_path = write_raster(fine, name="fine.tif", nodata=-9999)
    coarse = write_raster(np.full((10, 10), 50, dtype="int16"), name="coarse.tif", pixel=0.01)
    lat, lon = samples(40, 40)
    assert ground_of(fine_path).elevation_m(lat[20, 0], lon[20]) == 100
    assert ground_of(fine_path, coarse).elevation_m(lat[20, 0], lon[20]) == 50


def test_blocks_join_without_a_trace(write_raster, tmp_path, monkeypatch):
    """The same raster as one block and as many, with voids across their borders."""
    random = np.random.default_rng(3)
    heights = random.integers(0, 2000, (90, 110)).astype("int16")
    heights[random.random(heights.shape) < 0.05] = -9999
    heights[60:75, 20:40] = -9999
    options = {"tiled": True, "blockxsize": 16, "blockysize": 16, "nodata": -9999}
    path = write_raster(heights, **options)
    lat, lon = NORTH - random.uniform(0, 90, 3000) * PIXEL, WEST + random.uniform(0, 110, 3000) * PIXEL
    at_once = Ground.open([path], tmp_path / "one").elevation_m(lat, lon)
    monkeypatch.setattr("terrain.raster.BLOCK_SIDE", 32)
    in_blocks = Ground.open([path], tmp_path / "many")
    np.testing.assert_array_equal(in_blocks.elevation_m(lat, lon), at_once)
    assert in_blocks.survey().rasters[0].void_share == np.mean(heights == -9999)
    assert len(list((tmp_path / "many").rglob("samples-*.npy"))) == 12


def test_only_the_blocks_that_are_needed_are_decoded(write_raster, tmp_path, monkeypatch):
    monkeypatch.setattr("terrain.raster.BLOCK_SIDE", 32)
    path = write_raster(np.zeros((90, 110), dtype="int16"), tiled=True, blockxsize=16, blockysize=16)
    ground = Ground.open([path], tmp_path / "cache")
    assert ground.elevation_m(NORTH - 40 * PIXEL, WEST + 40 * PIXEL) == 0
    assert [p.name for p in (tmp_path / "cache").rglob("*.npy")] == ["samples-1-1.npy"]


def halves(write_raster, heights, shared, **options):
    """The same heights as a western and an eastern tile, which share a column or do not."""
    middle = heights.shape[1] // 2
    west = write_raster(heights[:, : middle + shared], name="west.tif", **options)
    east = write_raster(heights[:, middle:], name="east.tif", west=WEST + middle * PIXEL, **options)
    return west, east


@pytest.mark.parametrize("shared", [0, 1])
@pytest.mark.parametrize("turned", [False, True])
def test_two_tiles_are_one_ground_without_step_or_gap(write_raster, ground_of, shared, turned):
    """Tiles with a shared column (point samples) and without (pixels side by side), both ways round."""
    heights = np.random.default_rng(4).integers(0, 500, (30, 40)).astype("int16")
    whole = ground_of(write_raster(heights, name="whole.tif"))
    tiles = halves(write_raster, heights, shared)
    parts = ground_of(*tiles[:: -1 if turned else 1])
    lat = NORTH - np.linspace(0.01, 29.99, 61)[:, None] * PIXEL
    lon = WEST + np.linspace(18, 22, 401) * PIXEL
    assert parts.elevation_m(lat, lon) == pytest.approx(whole.elevation_m(lat, lon), abs=0.2)
    assert np.abs(np.diff(parts.elevation_m(lat, lon), axis=1)).max() < 5.1  # steps of 1/100 cell


def test_four_tiles_meet_in_a_point_without_step_or_gap(write_raster, ground_of):
    heights = np.random.default_rng(5).integers(0, 500, (40, 40)).astype("int16")
    whole = ground_of(write_raster(heights, name="whole.tif"))
    parts = ground_of(
        *(
            write_raster(
                heights[r : r + 20, c : c + 20], name=f"{r}-{c}.tif", north=NORTH - r * PIXEL, west=WEST + c * PIXEL
            )
            for r in (0, 20)
            for c in (0, 20)
        )
    )
    lat = NORTH - np.linspace(19, 21, 101)[:, None] * PIXEL
    lon = WEST + np.linspace(19, 21, 101) * PIXEL
    assert parts.elevation_m(lat, lon) == pytest.approx(whole.elevation_m(lat, lon), abs=0.2)


def test_tiles_of_different_pixel_width_meet_without_gap(write_raster, ground_of):
    """Open 1 arc-second tiles widen their pixels towards the poles; a plane stays a plane across."""
    row, column = np.arange(20)[:, None] + 0.5, np.arange(30) + 0.5
    upper = write_raster((5 * row + 2 * column).astype("float32"), name="upper.tif")
    wide = Affine(1.5 * PIXEL, 0, WEST, 0, -PIXEL, NORTH - 20 * PIXEL)
    lower_heights = 5 * (20 + row) + 2 * 1.5 * (np.arange(20) + 0.5)
    lower = write_raster(lower_heights.astype("float32"), name="lower.tif", transform=wide)
    down, right = np.linspace(19, 21, 101)[:, None], np.linspace(2, 28, 53)
    got = ground_of(upper, lower).elevation_m(NORTH - down * PIXEL, WEST + right * PIXEL)
    assert got == pytest.approx(5 * down + 2 * right, abs=1e-3)


@pytest.mark.parametrize(
    "transform",
    [
        Affine(30, 0, 598250, 0, -30, 5193000),  # north up
        Affine(30, 0, 598250, 0, 30, 5190000),  # south up
        Affine(30, 10, 598250, 10, -30, 5193000),  # rotated
    ],
)
def test_a_projected_raster_lies_where_its_system_says(write_raster, slope, ground_of, transform):
    ground = ground_of(write_raster(slope(rows=40, columns=40), crs="EPSG:32632", transform=transform))
    row, column = np.array([3.0, 10.25, 30.5]), np.array([5.0, 20.5, 33.75])
    x = transform.a * (column + 0.5) + transform.b * (row + 0.5) + transform.c
    y = transform.d * (column + 0.5) + transform.e * (row + 0.5) + transform.f
    lon, lat = Transformer.from_crs("EPSG:32632", "EPSG:4326", always_xy=True).transform(x, y)
    assert ground.elevation_m(lat, lon) == pytest.approx(100 + 3 * row + 2 * column, abs=1e-3)
    assert ground.rasters[0].spacing_m == pytest.approx(np.sqrt(abs(transform.determinant)), rel=1e-3)


@pytest.mark.parametrize("west", [179.985, -180.015, 539.985])
def test_a_raster_over_the_180th_meridian_answers_on_both_sides(write_raster, slope, ground_of, west):
    ground = ground_of(write_raster(slope(), west=west))
    lon = np.array([179.99, 179.9999, 180.0, -180.0, -179.9999, -179.99])
    expected = 100 + 3 * 9.5 + 2 * ((lon - 179.985) % 360 / PIXEL - 0.5)
    assert ground.elevation_m(NORTH - 10 * PIXEL, lon) == pytest.approx(expected, abs=1e-3)
    assert ground.rasters[0].bounds[0] % 360 == pytest.approx(179.985)


def test_longitudes_counted_from_0_to_360_are_the_same_places(write_raster, slope, ground_of):
    ground = ground_of(write_raster(slope(), west=352.0))
    assert ground.elevation_m(46.99, -7.99) == pytest.approx(100 + 3 * 9.5 + 2 * 9.5)
    assert ground.rasters[0].bounds[0] == pytest.approx(-8)


def test_a_raster_round_the_whole_earth_closes_at_its_own_seam(write_raster, ground_of):
    heights = np.add.outer(np.zeros(18), np.minimum(np.arange(36), 35 - np.arange(36))).astype("int16")
    ground = ground_of(write_raster(heights, west=-180.0, north=90.0, pixel=10.0))
    assert ground.elevation_m(5.0, [-179.9, 180.0, 179.9, 0.0]).tolist() == [0, 0, 0, 17]


def test_feet_are_read_as_metres(write_raster, slope, ground_of):
    ground = ground_of(write_raster(slope(), unit="ft"))
    assert ground.elevation_m(NORTH - 0.5 * PIXEL, WEST + 0.5 * PIXEL) == pytest.approx(30.48)


def test_zeros_declared_as_voids_are_ground_at_a_shore_and_voids_in_the_hills(write_raster, ground_of):
    heights = np.full((40, 40), 500, dtype="int16")
    heights[5:20, 5:20] = 0
    coast = np.tile(np.maximum(0, np.arange(40) - 20), (40, 1)).astype("int16")
    lat, lon = samples(40, 40)
    hills = ground_of(write_raster(heights, name="hills.tif", nodata=0)).elevation_m(lat, lon)
    assert np.isnan(hills).sum() == 225
    shore = ground_of(write_raster(coast, name="shore.tif", nodata=0)).elevation_m(lat, lon)
    np.testing.assert_allclose(shore, coast, atol=1e-6)


def test_connected_flat_areas_at_zero_are_water(write_raster, ground_of):
    heights = np.tile(np.maximum(0, np.arange(60) - 30), (60, 1)).astype("int16")
    heights[20:22, 50:52] = 0  # a hollow of four samples
    ground = ground_of(write_raster(heights))
    lat, lon = samples(60, 60)
    wet = ground.is_water(lat, lon)
    expected = heights == 0
    expected[20:22, 50:52] = False
    np.testing.assert_array_equal(wet, expected)


def test_a_small_pond_at_zero_and_low_noise_are_no_water(write_raster, ground_of):
    random = np.random.default_rng(6)
    noise = random.integers(-1, 2, (100, 100)).astype("int16")
    pond = np.full((100, 100), 5, dtype="int16")
    pond[10:18, 10:18] = 0  # 0.5 km²
    lat, lon = samples(100, 100)
    assert not ground_of(write_raster(noise, name="noise.tif")).is_water(lat, lon).any()
    assert not ground_of(write_raster(pond, name="pond.tif")).is_water(lat, lon).any()


def test_voids_are_no_water(write_raster, ground_of):
    heights = np.zeros((60, 60), dtype="int16")
    heights[20:40, 20:40] = -9999
    ground = ground_of(write_raster(heights, nodata=-9999))
    lat, lon = samples(60, 60)
    np.testing.assert_array_equal(ground.is_water(lat, lon), heights == 0)


def test_bad_files_are_refused_with_their_reason_and_the_rest_is_used(write_raster, slope, tmp_path):
    write_raster(slope(), name="good.tif")
    write_raster(slope(), name="unplaced.tif", crs=None)
    folder = tmp_path / "rasters"
    (folder / "empty.tif").touch()
    (folder / "text.tif").write_text("no raster")
    (folder / "README.md").write_text("not even named like one")
    (folder / "good.tif.aux.xml").write_text("<PAMDataset/>")
    ground = Ground.open([folder], tmp_path / "cache")
    assert [info.name for info in ground.rasters] == ["good.tif"]
    assert {refused.path.name: refused.message.split(": ")[0] for refused in ground.refused} == {
        "empty.tif": "empty.tif is empty or not a file",
        "text.tif": "text.tif is no raster we can read, or is cut short",
        "unplaced.tif": "unplaced.tif does not say in which coordinate system it lies. Declare it",
    }


def test_a_folder_that_is_not_there_is_refused(ground_of, tmp_path):
    assert [refused.path.name for refused in ground_of(tmp_path / "none").refused] == ["none"]


def test_no_rasters_at_all_is_a_ground_without_answers(ground_of):
    ground = ground_of()
    assert np.isnan(ground.elevation_m(47, 8))
    assert ground.rasters == ground.refused == ()


def test_the_same_raster_twice_counts_once(write_raster, slope, ground_of):
    path, copy = write_raster(slope(), name="a.tif"), write_raster(slope(), name="b.tif")
    assert len(ground_of(path, path.parent, copy).rasters) == 1


def test_version_changes_with_the_rasters_their_kind_and_place(write_raster, slope, ground_of):
    path, other = write_raster(slope(), name="a.tif"), write_raster(slope() * 2, name="b.tif")
    versions = [ground_of(path).version, ground_of(path, other).version]
    declare(path, kind="bare")
    versions.append(ground_of(path).version)
    declare(path, crs="EPSG:4258")
    versions.append(ground_of(path).version)
    assert len(set(versions)) == 4
    assert ground_of(path).version == versions[-1]


def test_survey_tells_void_shares_and_finds_damage(write_raster, slope, ground_of):
    heights = slope()
    heights[0, :3] = -9999
    good = write_raster(heights, name="good.tif", nodata=-9999)
    bad = write_raster(
        np.random.default_rng(1).integers(0, 1000, (300, 300)).astype("int16"), name="bad.tif", compress="deflate"
    )
    content = bytearray(bad.read_bytes())
    content[50_000:70_000] = np.random.default_rng(2).bytes(20_000)
    bad.write_bytes(content)
    ground = ground_of(good, bad)
    assert [np.isnan(info.void_share) for info in ground.rasters] == [True, True]
    surveyed = ground.survey()
    assert [(info.name, info.void_share) for info in surveyed.rasters] == [("good.tif", 3 / 600)]
    assert "bad.tif is damaged" in surveyed.refused[0].message
    assert ground_of(good).rasters[0].void_share == 3 / 600  # remembered
