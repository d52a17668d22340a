"""Path analysis of P.1812: horizons by geometry, heights, what is refused."""

import numpy as np
import pytest

from propagation.errors import ProfileError, RangeError
from propagation.p1812 import path_terms, stacked_paths

MEDIAN_RADIUS_KM = 6371 * 157 / (157 - 40)


def path_of(distance_km, terrain_amsl_m, tx_height_agl_m=50.0, rx_height_agl_m=10.0, **changes):
    arguments = {
        "distance_km": distance_km,
        "terrain_amsl_m": terrain_amsl_m,
        "clutter_height_m": np.zeros(len(distance_km)),
        "zone": np.full(len(distance_km), 4),
        "tx_height_agl_m": tx_height_agl_m,
        "rx_height_agl_m": rx_height_agl_m,
        "tx_latitude_deg": 50.0,
        "tx_longitude_deg": 5.0,
        "rx_latitude_deg": 50.5,
        "rx_longitude_deg": 5.5,
        "delta_n_per_km": 40.0,
    }
    return path_terms(**{**arguments, **changes})


def flat(length_km, step_km=0.25):
    distance = np.arange(0, length_km + step_km / 2, step_km)
    return distance, np.zeros(distance.size)


def test_horizon_over_the_smooth_earth_is_where_the_ray_touches():
    """A ray from height h touches a sphere of radius a at sqrt(2 a h); nearest profile point, 0.25 km."""
    path = path_of(*flat(120), tx_height_agl_m=200, rx_height_agl_m=10)
    assert not path.line_of_sight
    assert path.tx_horizon_distance_km == pytest.approx(np.sqrt(2 * MEDIAN_RADIUS_KM * 0.2), abs=0.13)
    assert path.rx_horizon_distance_km == pytest.approx(np.sqrt(2 * MEDIAN_RADIUS_KM * 0.01), abs=0.13)
    # the touching ray falls by sqrt(2 h / a)
    assert path.tx_horizon_angle_mrad == pytest.approx(-1000 * np.sqrt(2 * 0.2 / MEDIAN_RADIUS_KM), rel=1e-4)


def test_ridge_above_the_ray_ends_the_line_of_sight():
    """Both antennas at 30 m, 10 km apart: the ray is 30 m high, the Earth bulges 500 * 25 / a = 1.463 m."""
    distance = np.linspace(0, 10, 11)
    bulge = 500 * 25 / MEDIAN_RADIUS_KM
    for ridge, sees in [(30 - bulge - 0.01, True), (30 - bulge + 0.01, False)]:
        terrain = np.zeros(11)
        terrain[5] = ridge
        path = path_of(distance, terrain, 30, 30)
        assert path.line_of_sight == sees
        assert path.tx_horizon_distance_km == path.rx_horizon_distance_km == 5


def test_clear_path_has_the_point_nearest_to_the_ray_as_both_horizons():
    distance = np.linspace(0, 20, 21)
    terrain = np.zeros(21)
    terrain[8] = 40
    path = path_of(distance, terrain, 100, 100)
    assert path.line_of_sight
    assert path.tx_horizon_distance_km == 8
    assert path.rx_horizon_distance_km == 12


def test_angular_distance_of_a_clear_path_is_0():
    """Both angles point along the one ray; with the Earth's angle they sum to 0 (eq. (84))."""
    path = path_of(*flat(20), tx_height_agl_m=300, rx_height_agl_m=100)
    assert path.path_angular_distance_mrad == pytest.approx(0, abs=1e-3)


def test_angular_distance_over_one_ridge_is_the_bend_of_the_ray():
    """Ridge of 500 m between antennas at 20 m, each 10 km away: 480 m and the bulge of the Earth,
    500 * 10 * 10 / a = 5.85 m, over the line between them, so the ray bends by 2 atan(485.85 / 10000)."""
    distance = np.linspace(0, 20, 201)
    terrain = np.zeros(201)
    terrain[100] = 500
    path = path_of(distance, terrain, 20, 20)
    # the Recommendation adds small angles where this takes one tangent: 0.0054 mrad
    bend = 2000 * np.arctan((480 + 500 * 100 / MEDIAN_RADIUS_KM) / 10000)
    assert path.path_angular_distance_mrad == pytest.approx(bend, abs=0.006)


def test_clutter_blocks_the_ray_but_makes_no_horizon():
    distance = np.linspace(0, 10, 11)
    cover = np.zeros(11)
    cover[[0, 5, 10]] = 60
    bare, covered = path_of(distance, np.zeros(11)), path_of(distance, np.zeros(11), clutter_height_m=cover)
    assert covered.actual_edge_median > bare.actual_edge_median
    assert covered.tx_horizon_angle_mrad == bare.tx_horizon_angle_mrad
    assert covered.terrain_roughness_m == bare.terrain_roughness_m


def test_clutter_at_both_ends_has_no_effect():
    cover = np.zeros(41)
    cover[[0, -1]] = 40
    distance = np.linspace(0, 10, 41)
    bare, covered = path_of(distance, np.zeros(41)), path_of(distance, np.zeros(41), clutter_height_m=cover)
    assert covered.actual_edge_median == bare.actual_edge_median


def test_roughness_is_the_highest_ground_between_the_horizons():
    """Ground at 0 m but two ridges of 200 m, the horizons, and a hill of 150 m between them; a hill of
    300 m outside cannot hide behind a ridge, so none stands there. The fitted line is below 0, hence >=."""
    distance = np.linspace(0, 60, 601)
    terrain = np.zeros(601)
    terrain[[200, 400]] = 200
    terrain[300] = 150
    path = path_of(distance, terrain)
    base = min(path.smooth_earth_tx_amsl_m, path.smooth_earth_rx_amsl_m)
    assert path.tx_horizon_distance_km == pytest.approx(20)
    assert path.rx_horizon_distance_km == pytest.approx(20)
    assert path.terrain_roughness_m == pytest.approx(200 - base, abs=1)


def test_paths_of_different_length_stack_into_one_batch():
    one, two = path_of(*flat(20)), path_of(*flat(60, 0.1))
    both = stacked_paths([one, two])
    assert both.path_length_km.shape == (2,)
    assert both.beta0_percent[1] == two.beta0_percent
    assert both.actual_edge_median[0] == one.actual_edge_median


def test_batch_of_paths_equals_one_by_one():
    rng = np.random.default_rng(11)
    distance = np.cumsum(np.concatenate([[0], rng.uniform(0.05, 1, 120)]))
    terrain = rng.uniform(0, 400, (12, 121))
    zone = rng.choice([1, 3, 4], (12, 121))
    heights = rng.uniform(1, 300, 12)
    batch = path_of(distance, terrain, heights, zone=zone)
    for i in range(12):
        single = path_of(distance, terrain[i], heights[i], zone=zone[i])
        for name in ("tx_horizon_distance_km", "rx_horizon_angle_mrad", "terrain_roughness_m", "rx_at_sea"):
            assert getattr(single, name) == getattr(batch, name)[i]
        assert single.smooth_edge_beta0 == pytest.approx(batch.smooth_edge_beta0[i])
        assert single.beta0_percent == pytest.approx(batch.beta0_percent[i])


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        (
            {"tx_height_agl_m": 0.5},
            r"transmitting antenna height 0.5 m is outside .*P.1812-7: use 1 to 3000 m",
        ),
        ({"rx_height_agl_m": 3001}, r"receiving antenna height 3001 m is outside .*: use 1 to 3000 m"),
        ({"delta_n_per_km": 157}, r"lapse of refractivity 157 N/km .*use less than 157 N/km"),
        ({"rx_distance_to_coast_km": -1}, r"distance to the coast -1 km is negative: use 0 at sea and 500"),
        ({"distance_km": np.linspace(0, 0.2, 81)}, r"path length 0.2 km is outside .*: use 0.25 to 3000 km"),
        ({"distance_km": np.linspace(0, 4000, 81)}, r"path length 4000 km is outside"),
    ],
)
def test_quantity_outside_the_recommendation_is_refused(changes, message):
    distance, terrain = flat(20)
    with pytest.raises(RangeError, match=message):
        path_of(**{"distance_km": distance, "terrain_amsl_m": terrain, **changes})


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"terrain_amsl_m": np.where(np.arange(81) == 7, np.nan, 0)}, "lacks a height or distance: fill it"),
        ({"distance_km": np.r_[0, 2, 1, np.linspace(3, 20, 78)]}, "do not rise from 0 km: sort them"),
        ({"distance_km": np.r_[0, 1, 1, np.linspace(3, 20, 78)]}, "drop repeated points"),
        ({"distance_km": np.linspace(1, 20, 81)}, "do not rise from 0 km"),
        ({"terrain_amsl_m": np.zeros(80)}, "give one height for each distance"),
        ({"clutter_height_m": np.full(81, -1.0)}, "clutter height that is negative or no number: use 0"),
        ({"clutter_height_m": np.full(81, np.nan)}, "clutter height that is negative or no number"),
        ({"zone": np.full(81, 7)}, "zone 7 is not known"),
    ],
)
def test_profile_that_is_no_path_is_refused(changes, message):
    distance, terrain = flat(20)
    with pytest.raises(ProfileError, match=message):
        path_of(**{"distance_km": distance, "terrain_amsl_m": terrain, **changes})


def test_four_points_are_too_few_and_five_enough():
    with pytest.raises(ProfileError, match=r"profile has 4 points: P\.1812 needs 5 or more"):
        path_of(np.linspace(0, 3, 4), np.zeros(4))
    assert path_of(np.linspace(0, 3, 5), np.zeros(5)).path_length_km == 3
