import numpy as np
import pytest

from terrain.errors import PathError
from terrain.geodesy import destination
from terrain.mosaic import Ground
from terrain.skyline import horizon, skyline

RADIUS_KM = 8500.0


@pytest.fixture
def ground_of(tmp_path):
    return lambda *paths: Ground.open(list(paths), tmp_path / "cache")


def plain_with(write_raster, ground_of, *hills, side=1000, pixel=0.001, level=0):
    """Flat ground about 46.5 N 8.5 E (the raster's middle) with hills of 3 × 3 samples (row, column, height)."""
    heights = np.full((side, side), level, dtype="int16")
    for row, column, height in hills:
        heights[row - 1 : row + 2, column - 1 : column + 2] = height
    return ground_of(write_raster(heights, pixel=pixel, north=46.5 + side / 2 * pixel, west=8.5 - side / 2 * pixel))


@pytest.mark.parametrize("height_m", [10.0, 40.0, 70.0])
def test_over_the_sea_the_horizon_dips_with_the_root_of_the_height(write_raster, ground_of, height_m):
    """Geometry: tangent to a sphere, angle -sqrt(2 h / a) at distance sqrt(2 h a)."""
    seen = skyline(plain_with(write_raster, ground_of), 46.5, 8.5, height_m, RADIUS_KM, reach_km=36)
    assert seen.bearing_deg.tolist() == (np.arange(720) / 2).tolist()
    assert seen.angle_mrad == pytest.approx(-1e3 * np.sqrt(2e-3 * height_m / RADIUS_KM), abs=1e-3)
    there_km = np.sqrt(2e-3 * height_m * RADIUS_KM)
    assert seen.distance_km == pytest.approx(there_km, abs=0.5)
    assert (seen.missing_share == 0).all()


def test_a_hill_stands_where_it_is_and_hides_what_is_behind(write_raster, ground_of):
    """A hill of 500 m due east and one behind it that stands higher but not above it; angle by hand."""
    ground = plain_with(write_raster, ground_of, (500, 700, 500), (500, 750, 510))
    seen = skyline(ground, 46.4995, 8.5005, 10, RADIUS_KM, reach_km=30)
    distance_km = seen.distance_km[180]
    assert distance_km == pytest.approx(0.199 * 111.32 * np.cos(np.deg2rad(46.5)), abs=0.1)  # its near edge
    expected = (500 - 10) / (1e3 * distance_km) - distance_km / (2 * RADIUS_KM)
    assert seen.angle_mrad[180] == pytest.approx(1e3 * np.arctan(expected), abs=1e-6)
    assert seen.angle_mrad[90] < 0


def test_a_small_far_hill_is_not_lost_between_bearings(write_raster, ground_of):
    """At 30 km half a degree is 260 m wide and the hill 100 m: cells keep the highest."""
    ground = plain_with(write_raster, ground_of, (607, 2293, 2000), side=2600, pixel=0.0003)
    seen = skyline(ground, 46.5, 8.5, 10, RADIUS_KM, reach_km=40)
    assert np.count_nonzero(seen.angle_deg > 1) >= 1
    assert seen.distance_km[seen.angle_deg.argmax()] == pytest.approx(32.3, abs=0.3)


def test_skyline_is_never_below_the_horizon_of_its_own_samples(write_raster, ground_of):
    heights = np.random.default_rng(3).integers(0, 900, (800, 800)).astype("int16")
    ground = ground_of(write_raster(heights, north=46.9, west=8.1))
    seen = skyline(ground, 46.5, 8.5, 1000, RADIUS_KM, reach_km=25, step_deg=5)
    spacing_km = ground.rasters[0].spacing_m / 1e3
    near_km = np.linspace(spacing_km, 4 * spacing_km / np.deg2rad(5), 4)  # the ring of single samples: its ends
    lat, lon = destination(46.5, 8.5, seen.bearing_deg[:, None], near_km[[0, -1]])
    tangent, _ = horizon(near_km[[0, -1]], ground.elevation_m(lat, lon), 1000, RADIUS_KM)
    assert (seen.angle_deg >= np.rad2deg(np.arctan(tangent)) - 1e-6).all()


def test_cells_are_never_below_the_ground_in_them(write_raster, ground_of):
    random = np.random.default_rng(4)
    heights = random.integers(0, 900, (300, 300)).astype("int16")
    heights[random.random(heights.shape) < 0.02] = -9999
    ground = ground_of(write_raster(heights, nodata=-9999))
    lat, lon = 47 - random.uniform(0.001, 0.299, 4000), 8 + random.uniform(0.001, 0.299, 4000)
    exact, spacing_m = ground.elevation_m(lat, lon), ground.rasters[0].spacing_m
    for cell in (4, 16, 64):
        highest = ground.highest_elevation_m(lat, lon, 1.01 * cell * spacing_m)
        known = np.isfinite(exact) & np.isfinite(highest)
        assert known.sum() > 3900
        assert (highest[known] >= exact[known] - 1e-3).all()


def test_missing_ground_is_told_by_bearing(write_raster, ground_of):
    seen = skyline(plain_with(write_raster, ground_of, side=200), 46.5, 8.5, 10, RADIUS_KM, reach_km=30)
    assert seen.missing_share[180] == pytest.approx(1 - 7.66 / 30, abs=0.1)
    assert np.isfinite(seen.angle_deg).all()
    nothing = skyline(ground_of(), 46.5, 8.5, 10, RADIUS_KM)
    assert np.isnan(nothing.angle_deg).all()
    assert np.isnan(nothing.distance_km).all()
    assert (nothing.missing_share == 1).all()


def test_a_smaller_effective_radius_hides_more(write_raster, ground_of):
    ground = plain_with(write_raster, ground_of, (100, 500, 300))
    standard, sub = (skyline(ground, 46.5, 8.5, 100, radius, reach_km=50).angle_deg for radius in (8500, 4200))
    assert (sub <= standard + 1e-9).all()


def test_horizon_of_many_profiles_is_that_of_each(write_raster):
    distance_km = np.linspace(0.1, 40, 300)
    ground_m = np.random.default_rng(5).uniform(0, 800, (6, 300))
    ground_m[2, :50] = np.nan
    together = horizon(distance_km, ground_m, 100, RADIUS_KM)
    for row in range(6):
        alone = horizon(distance_km, ground_m[row], 100, RADIUS_KM)
        assert (together[0][row], together[1][row]) == alone


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"lat": 95}, "latitude 95 is not possible: use -90 to 90 degrees"),
        ({"lon": np.nan}, "longitude nan is not possible"),
        ({"aerial_amsl_m": 20_000}, "aerial height above sea level 20000 is not possible"),
        ({"effective_earth_radius_km": -1}, "effective Earth radius -1 is not possible"),
        ({"reach_km": 1000}, "reach 1000 is not possible: use 0.1 to 300 km"),
        ({"step_deg": 0.7}, "bearing step 0.7 does not divide the circle"),
    ],
)
def test_what_cannot_be_looked_at_is_refused(ground_of, change, message):
    question = {"lat": 46.5, "lon": 8.5, "aerial_amsl_m": 10, "effective_earth_radius_km": RADIUS_KM}
    with pytest.raises(PathError, match=message):
        skyline(ground_of(), **(question | change))
