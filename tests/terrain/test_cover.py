"""Land cover and coastline over elevation."""

from pathlib import Path

import numpy as np
import pytest
from affine import Affine

from terrain.cover import Cover, categories, class_tables, open_cover_raster
from terrain.errors import RasterError
from terrain.mosaic import Ground
from terrain.overlay import Overlay
from terrain.profile import sample_profile


def named(cover, lat, lon):
    return [categories()[number] for number in np.atleast_1d(cover.category(lat, lon)).tolist()]


@pytest.mark.parametrize(
    ("table", "codes", "expected"),
    [
        # Legends: WorldCover 2021 v200, NLCD, CORINE level 3 (by code, and by place in the list of 44).
        ("worldcover", [0, 10, 40, 50, 80, 95], ["unknown", "trees", "open", "suburban", "water", "trees"]),
        ("nlcd", [11, 24, 42, 52, 82, 127], ["water", "urban", "trees", "shrubs", "open", "unknown"]),
        ("corine", [1, 2, 23, 41, 44, 48], ["urban", "suburban", "trees", "inland-water", "sea", "unknown"]),
        ("corine", [111, 112, 311, 512, 523, 999], ["urban", "suburban", "trees", "inland-water", "sea", "unknown"]),
    ],
)
def test_classes_have_their_category(write_raster, tmp_path, table, codes, expected):
    path = write_raster(np.array([codes, codes], dtype="uint16"), name=f"{table}.tif", pixel=0.01)
    cover = Cover.open([path], tmp_path / "cache")
    assert cover.refused == ()
    assert named(cover, np.full(6, 46.995), 8.005 + 0.01 * np.arange(6)) == expected


def test_the_nearest_pixel_answers_and_the_finest_map_first(write_raster, tmp_path):
    coarse = write_raster(np.full((10, 10), 10, dtype="uint8"), name="WorldCover_a.tif", pixel=0.01)
    fine = write_raster(np.full((20, 20), 50, dtype="uint8"), name="WorldCover_b.tif", pixel=0.001)
    cover = Cover.open([coarse, fine], tmp_path / "cache")
    assert named(cover, [46.99, 46.95, 40.0], [8.01, 8.05, 8.05]) == ["suburban", "trees", "unknown"]
    assert cover.height_m(46.99, 8.01) == 10
    assert np.isnan(cover.height_m(40.0, 8.05))


def test_every_raster_is_read_across_its_blocks(write_raster, tmp_path):
    codes = np.resize(np.array([10, 30, 50, 80, 60], dtype="uint8"), (2100, 2200))
    cover = Cover.open([write_raster(codes, name="WorldCover.tif", pixel=0.0001)], tmp_path / "cache")
    rng = np.random.default_rng(1)
    row, column = rng.integers(0, 2100, 3000), rng.integers(0, 2200, 3000)
    got = named(cover, 47 - (row + 0.5) * 1e-4, 8 + (column + 0.5) * 1e-4)
    words = {10: "trees", 30: "open", 50: "suburban", 80: "water", 60: "open"}
    assert got == [words[code] for code in codes[row, column].tolist()]


def test_a_map_that_does_not_say_its_classes_is_asked_for_them(write_raster, tmp_path):
    path = write_raster(np.ones((4, 4), dtype="uint8"), name="landuse.tif")
    with pytest.raises(RasterError, match=r"cover add FILE --classes NAME.*corine, nlcd, worldcover"):
        open_cover_raster(path)
    assert open_cover_raster(path, "corine").classes == "corine"
    assert class_tables() == ("corine", "nlcd", "worldcover")
    refused = Cover.open([write_raster(np.ones((4, 4), dtype="float32"), name="nlcd.tif")], tmp_path / "c").refused
    assert "whole numbers" in refused[0].message


SEA_PIXEL = Affine(0.01, 0, -30.0, 0, -0.01, 40.0)  # in the open Atlantic, 1 by 1 degree


def test_missing_ground_is_sea_only_where_the_coastline_says_so(write_raster, tmp_path):
    path = write_raster(np.full((50, 50), 120, dtype="int16"), pixel=0.01)
    plain = Ground.open([path], tmp_path / "cache")
    over = Ground.open([path], tmp_path / "cache", Overlay())
    inland, at_sea = (47.5, 8.2), (45.0, -37.0)
    assert np.isnan(over.elevation_m(*inland))
    assert not over.is_water(*inland)
    assert np.isnan(plain.elevation_m(*at_sea))
    assert over.elevation_m(*at_sea) == 0
    assert over.is_water(*at_sea)
    assert plain.version != over.version


def test_flat_water_far_from_the_sea_is_no_sea(write_raster, tmp_path):
    """A polder or lake at 0 m: 8 E 47 N is 300 km from any coast."""
    path = write_raster(np.zeros((60, 60), dtype="int16"), pixel=0.001)
    assert Ground.open([path], tmp_path / "cache").is_water(46.97, 8.03)
    assert not Ground.open([path], tmp_path / "cache", Overlay()).is_water(46.97, 8.03)


def test_cover_shows_land_in_flat_water_and_sea_in_noise(write_raster, tmp_path):
    heights = np.zeros((100, 100), dtype="float32")
    heights[:, 50:] = 1.5  # sea with the noise of a surface model
    ground = write_raster(heights, transform=SEA_PIXEL)
    codes = np.full((100, 100), 523, dtype="uint16")
    codes[:50, :50] = 211  # fields behind a dike
    cover = Cover.open([write_raster(codes, name="corine.tif", transform=SEA_PIXEL)], tmp_path / "cache")
    plain = Ground.open([ground], tmp_path / "cache", Overlay())
    over = Ground.open([ground], tmp_path / "cache", Overlay(cover))
    field, sea, noise = (39.8, -29.8), (39.2, -29.8), (39.5, -29.2)
    assert [bool(plain.is_water(*at)) for at in (field, sea, noise)] == [True, True, False]
    assert [bool(over.is_water(*at)) for at in (field, sea, noise)] == [False, True, True]


@pytest.mark.parametrize(("kind", "standing_m"), [("bare", 15.0), ("radar-surface", 7.5), ("surface", 0.0)])
def test_cover_stands_on_bare_ground_along_a_path(write_raster, tmp_path, kind, standing_m):
    ground_path = write_raster(np.full((300, 300), 400, dtype="int16"), name="ground.tif", pixel=0.001)
    Path(f"{ground_path}.gainworth.toml").write_text(f'kind = "{kind}"\n')
    wood = write_raster(np.full((300, 300), 10, dtype="uint8"), name="WorldCover.tif", pixel=0.001)
    cover = Cover.open([wood], tmp_path / "cache")
    over = sample_profile(Ground.open([ground_path], tmp_path / "c", Overlay(cover)), 46.75, 8.05, 46.95, 8.25)
    without = sample_profile(Ground.open([ground_path], tmp_path / "c"), 46.75, 8.05, 46.95, 8.25)
    assert over.bare_amsl_m == pytest.approx(without.bare_amsl_m)
    assert over.ground_amsl_m - over.bare_amsl_m == pytest.approx(standing_m)
