"""One path's digest: geometry by hand, and the same numbers as the models that take the whole profile."""

import numpy as np
import pytest

from propagation.constants import EARTH_RADIUS_KM
from propagation.diffraction import delta_bullington_loss_db
from propagation.digest import path_digest, stacked_digests
from propagation.errors import ProfileError
from propagation.fresnel import clearance_ratio

K = 4 / 3 * EARTH_RADIUS_KM


def digest(x, ground, antenna=100.0, aerial=10.0, radius=K, zone=None):
    return path_digest(x, ground, np.full(len(x), 4) if zone is None else zone, antenna, aerial, radius)


def hill(height_m, at=8.0, length=20.0, points=41):
    x = np.linspace(0, length, points)
    ground = np.full(points, 30.0)
    ground[np.argmin(np.abs(x - at))] = height_m
    return x, ground


def test_ridge_into_the_line_by_hand():
    """Ray at 8 of 20 km from 130 to 40 m: 94 m. Bulge 500 * 8 * 12 / 8494.7 = 5.65 m. Ridge 120 m: 31.65 m in."""
    got = digest(*hill(120.0))
    assert got.worst_point_km == pytest.approx(8.0)
    assert got.obstacle_into_line_m == pytest.approx(120 + 5.651 - 94, abs=0.001)
    assert not got.line_of_sight


def test_clear_path_by_hand():
    """Flat ground: least clearance by Fresnel radii near the aerial; the ray is 10 m up there at 20 km."""
    got = digest(*hill(30.0))
    assert got.line_of_sight
    assert got.obstacle_into_line_m < 0
    assert got.worst_point_km > 15


@pytest.mark.parametrize("frequency_mhz", [60.0, 200.0, 682.0])
def test_clearance_ratio_is_the_one_of_the_worst_point(frequency_mhz):
    for height in (30.0, 90.0, 200.0):
        got = digest(*hill(height))
        point = float(got.worst_point_km)
        expected = clearance_ratio(-got.obstacle_into_line_m, point, 20 - point, frequency_mhz)
        assert got.clearance_ratio(frequency_mhz) == pytest.approx(expected)


def test_lower_k_brings_the_ground_up():
    x, ground = hill(90.0)
    assert digest(x, ground, radius=EARTH_RADIUS_KM).clearance < digest(x, ground, radius=K).clearance


def test_horizon_of_a_smooth_path():
    """130.3 (sqrt 0.1 + sqrt 0.01) = 54.2 km for 100 and 10 m."""
    near, far = digest(*hill(30.0, length=50.0)), digest(*hill(30.0, length=60.0))
    assert near.smooth_horizon_km == pytest.approx(54.2, abs=0.1)
    assert not near.beyond_horizon
    assert far.beyond_horizon


def test_water_counts_by_its_length_and_coastal_land_as_land():
    x, ground = hill(30.0)
    zone = np.where(x <= 5, 3, np.where(x <= 10, 1, 4))
    got = digest(x, ground, zone=zone)
    assert got.sea_km == pytest.approx(5.0)
    assert got.sea_km + got.land_km == pytest.approx(20.0)


def test_diffraction_is_that_of_the_whole_profile():
    x, ground = hill(150.0)
    zone = np.where(x >= 15, 1, 4)
    got = digest(x, ground, zone=zone)
    f, poles = np.array([50.0, 200.0, 682.0]), ["horizontal", "vertical", "horizontal"]
    share = got.sea_km / 20
    whole = delta_bullington_loss_db(x, ground, 130.0, 40.0, f, K, share, poles)
    assert got.diffraction(f, poles).loss_db == pytest.approx(whole)
    straight = delta_bullington_loss_db(x, ground, 130.0, 40.0, f, EARTH_RADIUS_KM, share, poles)
    assert got.diffraction_true_earth(f, poles).loss_db == pytest.approx(straight)


def test_angle_between_horizons_by_hand():
    """Single ridge: (250 - 130)/8 + (250 - 40)/12 m/km = 15 + 17.5 = 32.5 mrad; the bulges cancel d/a.

    Each angle is 8 or 12 km / (2 a) less, the path 20 km / a more: 20/(2 a) = 1.177 mrad stay.
    """
    got = digest(*hill(250.0))
    assert got.angular_distance_mrad == pytest.approx(32.5 + 1e3 * 20 / (2 * K), abs=0.003)  # atan
    assert got.angular_distance_true_earth_mrad > got.angular_distance_mrad


def test_path_in_sight_has_no_angle():
    assert digest(*hill(30.0)).angular_distance_mrad == pytest.approx(0, abs=1e-3)  # atan


def test_stack_equals_one_by_one():
    paths = [digest(*hill(30.0)), digest(*hill(200.0, length=90.0, points=77)), digest(*hill(80.0))]
    stack = stacked_digests(paths)
    f = np.array([100.0, 500.0, 700.0])
    assert stack.clearance_ratio(f) == pytest.approx(
        np.array([path.clearance_ratio(g) for path, g in zip(paths, f, strict=True)])
    )
    assert stack.diffraction(f, "vertical").loss_db == pytest.approx(
        np.array([path.diffraction(g, "vertical").loss_db for path, g in zip(paths, f, strict=True)])
    )
    assert stack.line_of_sight.tolist() == [bool(path.line_of_sight) for path in paths]


def test_missing_ground_is_refused():
    x, ground = hill(30.0)
    ground[5] = np.nan
    with pytest.raises(ProfileError, match="fill it"):
        digest(x, ground)
