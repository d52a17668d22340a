import numpy as np
import pytest
from affine import Affine

from terrain.errors import PathError
from terrain.mosaic import Ground
from terrain.profile import sample_profile
from terrain.raster import declare
from terrain.water import zones


@pytest.fixture
def hills(write_raster, tmp_path):
    heights = np.random.default_rng(1).integers(0, 500, (200, 300)).astype("int16")
    return Ground.open([write_raster(heights)], tmp_path / "cache")


def test_profile_begins_and_ends_on_the_antennas(hills):
    profile = sample_profile(hills, 46.95, 8.02, 46.85, 8.25)
    assert (profile.latitude_deg[0], profile.longitude_deg[0]) == (46.95, 8.02)
    assert (profile.latitude_deg[-1], profile.longitude_deg[-1]) == (46.85, 8.25)
    assert profile.distance_km[0] == 0


def test_points_stand_at_equal_steps_of_at_most_the_raster_s_spacing(hills):
    profile = sample_profile(hills, 46.95, 8.02, 46.85, 8.25)
    assert np.ptp(np.diff(profile.distance_km)) < 1e-9
    assert 0.98 * hills.rasters[0].spacing_m < profile.spacing_m <= hills.rasters[0].spacing_m
    assert profile.spacing_m == pytest.approx(1e3 * profile.distance_km[1])


def test_a_spacing_can_be_asked_for(hills):
    profile = sample_profile(hills, 46.95, 8.02, 46.85, 8.25, spacing_m=500)
    assert 450 < profile.spacing_m <= 500


def test_a_short_path_has_five_points_all_the_same(hills):
    assert sample_profile(hills, 46.95, 8.02, 46.9501, 8.02).distance_km.size == 5


def test_a_very_fine_spacing_stops_at_20_001_points(hills):
    assert sample_profile(hills, 46.95, 8.02, 46.85, 8.25, spacing_m=0.001).distance_km.size == 20_001


def test_reversed_path_has_the_same_ground(hills):
    there = sample_profile(hills, 46.95, 8.02, 46.85, 8.25)
    back = sample_profile(hills, 46.85, 8.25, 46.95, 8.02)
    assert back.ground_amsl_m[::-1] == pytest.approx(there.ground_amsl_m, abs=1e-4)
    assert there.distance_km[-1] - back.distance_km[::-1] == pytest.approx(there.distance_km, abs=1e-9)


def test_ground_that_is_missing_is_said_and_not_guessed(hills):
    profile = sample_profile(hills, 46.9, 8.2, 46.9, 8.4, spacing_m=100)
    missing = np.isnan(profile.ground_amsl_m)
    np.testing.assert_array_equal(missing, profile.longitude_deg > 8.3)
    assert profile.missing_share == pytest.approx(0.5, abs=0.01) == missing.mean()


def test_a_path_without_any_raster_is_all_missing(hills):
    profile = sample_profile(hills, 10.0, 8.0, 10.1, 8.0)
    assert profile.missing_share == 1
    assert profile.spacing_m <= 90


@pytest.mark.parametrize("ends", [(91, 8, 47, 8), (47, 8, 47, np.nan), (47, 181, 47, 8)])
def test_a_position_off_the_earth_is_refused(hills, ends):
    with pytest.raises(PathError, match="is no place on Earth: use a latitude from -90 to 90"):
        sample_profile(hills, *ends)


def test_both_ends_at_one_place_make_no_path(hills):
    with pytest.raises(PathError, match="are one place"):
        sample_profile(hills, 47, 8, 47, 8)


def test_a_spacing_of_nothing_is_refused(hills):
    with pytest.raises(PathError, match="spacing of 0 m is not possible"):
        sample_profile(hills, 46.95, 8.02, 46.85, 8.25, spacing_m=0)


def test_a_coast_makes_three_zones(write_raster, tmp_path):
    """Sea for 30 columns, then land rising 4 m a column: above 100 m after 25 columns."""
    heights = np.tile(4 * np.maximum(0, np.arange(90) - 29), (60, 1)).astype("int16")
    ground = Ground.open([write_raster(heights)], tmp_path / "cache")
    profile = sample_profile(ground, 46.97, 8.001, 46.97, 8.089)
    changes = np.nonzero(np.diff(profile.zone))[0]
    assert profile.zone[[0, *(changes + 1)]].tolist() == [1, 3, 4]
    assert profile.longitude_deg[changes] == pytest.approx([8.030, 8.0545], abs=0.0015)


def test_coastal_land_is_low_and_within_50_km_of_the_sea():
    """Rec. ITU-R P.1812-7, section 3.2: below 100 m and within 50 km."""
    distance_km = np.array([0.0, 20, 50, 50.1, 120, 150.0, 170])
    height_m = np.array([0.0, 99, 99.9, 10, 10, 100, np.nan])
    water = np.array([True, False, False, False, False, False, False])
    assert zones(distance_km, height_m, water).tolist() == [1, 3, 3, 4, 4, 4, 4]
    assert zones(distance_km, height_m, water[::-1]).tolist() == [4, 4, 4, 4, 3, 4, 1]
    assert zones(distance_km, height_m, ~water | water)[1:].tolist() == [1] * 6
    assert zones(distance_km, height_m, water & ~water).tolist() == [4] * 7


def test_a_lake_crossed_for_100_km_counts_as_sea_and_a_smaller_one_as_land():
    """Rec. ITU-R P.1812-7, section 3.2, from memory: water that covers a circle of 100 km counts as sea."""
    distance_km = np.linspace(0, 200, 201)
    dry = np.zeros(201, dtype=bool)
    for shore_km, sea_share in ((155, 101 / 201), (145, 0.0)):
        height_m = np.where((distance_km >= 55) & (distance_km <= shore_km), 183.0, 183.5 + distance_km)
        assert (zones(distance_km, height_m, dry) == 1).mean() == pytest.approx(sea_share)


def test_a_level_plain_is_no_lake():
    assert (zones(np.linspace(0, 200, 201), np.full(201, 120.0), np.zeros(201, dtype=bool)) == 4).all()


def test_a_profile_says_which_kinds_of_raster_answered(write_raster, tmp_path, slope):
    west, east = write_raster(slope(60, 60), "west.tif"), write_raster(slope(60, 60), "east.tif", west=8.06)
    declare(west, kind="bare")
    declare(east, kind="radar-surface")
    ground = Ground.open([west, east], tmp_path / "cache")
    assert sample_profile(ground, 46.97, 8.01, 46.97, 8.11).kinds == ("bare", "radar-surface")
    assert sample_profile(ground, 46.97, 8.01, 46.95, 8.03).kinds == ("bare",)


def test_a_path_over_houses_keeps_its_surface_and_gets_the_ground(write_raster, tmp_path):
    """Houses of 8 m, 12 by 12 m in every 40 m, both ends between them: the ground is level at 200 m."""
    heights = np.full((600, 600), 200.0)
    for top in range(10, 590, 40):
        for left in range(10, 590, 40):
            heights[top : top + 12, left : left + 12] += 8
    metre = 1 / 111_195  # of latitude, in degrees; at the equator of longitude, too
    path = write_raster(heights.astype("float32"), transform=Affine(metre, 0, 8, 0, -metre, 0))
    ground = Ground.open([path], tmp_path / "cache")
    profile = sample_profile(ground, -100 * metre, 8 + 100 * metre, -500 * metre, 8 + 480 * metre)
    assert profile.ground_amsl_m.max() == pytest.approx(208, abs=0.1)
    near = np.minimum(profile.distance_km, profile.distance_km[-1] - profile.distance_km) <= 0.25
    assert profile.bare_amsl_m[near] == pytest.approx(200, abs=0.3)
    assert (profile.bare_amsl_m <= profile.ground_amsl_m).all()
    assert profile.kinds == ("surface",)
