"""Limits, trends and errors; outside checks are in tests/published/test_itu_p526.py and test_pycraf_diffraction.py."""

import numpy as np
import pytest

from propagation.constants import EARTH_RADIUS_KM
from propagation.diffraction import (
    bullington_edge,
    bullington_loss_db,
    delta_bullington,
    delta_bullington_loss_db,
    knife_edge_loss_db,
    smooth_earth,
)
from propagation.errors import ProfileError

K = 4 / 3 * EARTH_RADIUS_KM
FLAT_EARTH = 1e12  # km; no bulge


def ridge(height_m, at=10, points=41, length=20.0):
    x = np.linspace(0, length, points)
    ground = np.zeros(points)
    ground[np.argmin(np.abs(x - at))] = height_m
    return x, ground


def test_knife_edge_loss_rises_with_the_obstacle():
    nu = np.linspace(-2, 10, 500)
    assert (np.diff(knife_edge_loss_db(nu)) >= 0).all()


def test_far_below_the_ray_there_is_no_loss():
    assert knife_edge_loss_db([-0.78, -5.0]).tolist() == [0, 0]


def test_no_value_stays_no_value():
    assert np.isnan(knife_edge_loss_db(np.nan))


def test_single_edge_without_earth_is_that_edge():
    """Bullington's point falls on a single peak. nu = h sqrt(2 (d1 + d2) / (lambda d1 d2)), P.526 eq. (26).

    h = 60 m over the line at 10 + 10 km, lambda 0.5 m: 60 sqrt(2 * 20e3 / (0.5 * 1e8)) = 1.697.
    """
    x, ground = ridge(100.0)
    edge = bullington_edge(x, ground, 40.0, 40.0, FLAT_EARTH)
    assert edge / np.sqrt(0.5) == pytest.approx(60 * np.sqrt(2 * 20e3 / (0.5 * 1e8)), rel=1e-6)


def test_clear_path_edge_is_its_nearest_point():
    """Ground 20 m below the ray in the middle of 20 km is the nearest by Fresnel radii."""
    x, ground = ridge(20.0)
    edge = bullington_edge(x, ground, 40.0, 40.0, FLAT_EARTH)
    assert edge / np.sqrt(0.5) == pytest.approx(-20 * np.sqrt(2 * 20e3 / (0.5 * 1e8)), rel=1e-6)


def test_high_clear_path_loses_nothing():
    x, ground = ridge(0.0)
    assert delta_bullington_loss_db(x, ground, 500.0, 500.0, 600.0, K, 0.0, "horizontal") == 0


def test_loss_grows_with_the_hill():
    heights = np.linspace(0, 500, 26)
    losses = [float(delta_bullington_loss_db(*ridge(h), 100.0, 10.0, 600.0, K, 0.0, "horizontal")) for h in heights]
    assert (np.diff(losses) >= 0).all()
    assert losses[-1] > losses[0] + 20


def test_hill_shades_high_frequencies_more():
    x, ground = ridge(200.0)
    low, high = bullington_loss_db(x, ground, 100.0, 10.0, [60.0, 600.0], K)
    assert high > low


def test_path_loses_the_same_both_ways():
    x, ground = ridge(150.0, at=6)
    forth = delta_bullington_loss_db(x, ground, 120.0, 15.0, 600.0, K, 0.0, "horizontal")
    back = delta_bullington_loss_db(20 - x[::-1], ground[::-1], 15.0, 120.0, 600.0, K, 0.0, "horizontal")
    assert forth == pytest.approx(back)


def test_moving_everything_up_changes_nothing():
    x, ground = ridge(150.0, at=6)
    low = delta_bullington_loss_db(x, ground, 120.0, 15.0, 600.0, K, 0.0, "vertical")
    high = delta_bullington_loss_db(x, ground + 1000, 1120.0, 1015.0, 600.0, K, 0.0, "vertical")
    assert low == pytest.approx(high)


def test_smooth_earth_under_a_plane_is_the_plane():
    x = np.linspace(0, 30, 61)
    fit = smooth_earth(x, 100 + 4 * x, 400.0, 500.0)
    assert fit.tx_fit_amsl_m == pytest.approx(100)
    assert fit.rx_fit_amsl_m == pytest.approx(220)


def test_smooth_earth_never_stands_above_the_ground_at_an_end():
    x = np.linspace(0, 30, 61)
    hills = 300 * np.sin(np.pi * x / 30)
    smooth = smooth_earth(x, hills, 50.0, 50.0)
    assert smooth.tx_amsl_m <= hills[0]
    assert smooth.rx_amsl_m <= hills[-1]


def test_batch_equals_one_by_one():
    x, ground = ridge(150.0, at=6)
    frequencies, radii, poles = [60.0, 200.0, 600.0], [EARTH_RADIUS_KM, K], ["horizontal", "vertical", "vertical"]
    batch = delta_bullington_loss_db(x, ground, 120.0, 15.0, frequencies, np.reshape(radii, (2, 1)), 0.3, poles)
    one_by_one = [
        [
            float(delta_bullington_loss_db(x, ground, 120.0, 15.0, f, radius, 0.3, pole))
            for f, pole in zip(frequencies, poles, strict=True)
        ]
        for radius in radii
    ]
    assert batch == pytest.approx(np.array(one_by_one))


def test_many_profiles_at_once_equal_one_by_one():
    profiles = [ridge(h, at=p) for h, p in ((0, 3), (120, 5), (300, 15))]
    x, ground = profiles[0][0], np.array([g for _, g in profiles])
    batch = delta_bullington_loss_db(x, ground, 120.0, 15.0, 600.0, K, 0.0, "horizontal")
    one = [float(delta_bullington_loss_db(*p, 120.0, 15.0, 600.0, K, 0.0, "horizontal")) for p in profiles]
    assert batch == pytest.approx(np.array(one))


def test_terms_add_up():
    x, ground = ridge(150.0, at=6)
    terms = delta_bullington(x, ground, 120.0, 15.0, 0.0, 0.0, 600.0, K, 0.0, "horizontal")
    assert terms.loss_db == terms.actual_db + max(terms.spherical_db - terms.smooth_db, 0)


@pytest.mark.parametrize(
    ("distance", "height", "message"),
    [
        ([0, 1, 2], [1, 2], "give one height for each distance"),
        ([0, 1], [1, 2], "at least one between both ends"),
        ([0, 1, 2], [1, np.nan, 2], "fill it before computing"),
        ([0, 1, 1, 2], [1, 2, 3, 4], "drop repeated points"),
        ([1, 2, 3], [1, 2, 3], "rise from 0 km"),
    ],
)
def test_profile_that_is_no_path_is_refused(distance, height, message):
    with pytest.raises(ProfileError, match=message):
        bullington_edge(distance, height, 50.0, 10.0, K)
