"""Zones, centre of the path, incidence of ducting and the quantile, by hand and by geometry."""

import numpy as np
import pytest
from pyproj import Geod
from scipy.stats import norm

from propagation.errors import ProfileError
from propagation.p1812.climate import (
    beta0_percent,
    inland_weight,
    path_centre_latitude_deg,
    zone_lengths,
)
from propagation.p1812.normal import inverse_complementary_normal

UNEVEN_KM = np.array([0.0, 1.0, 3.0, 4.0, 8.0, 10.0, 11.0])


def test_zone_border_lies_half_way_between_its_points():
    """Inland to 1 km, sea from 3 to 4 km, coast from 8 km: borders at 2 and 6 km, sea 4 of 11 km."""
    sea_share, land, inland = zone_lengths(UNEVEN_KM, [4, 4, 1, 1, 3, 3, 3])
    assert sea_share == pytest.approx(4 / 11)
    assert land == pytest.approx(5)
    assert inland == pytest.approx(2)


def test_longest_run_counts_not_the_sum_of_runs():
    """Inland 0 to 2 and 9 to 11 km with coast between: longest inland 2 km, land the whole 11 km."""
    sea_share, land, inland = zone_lengths(UNEVEN_KM, [4, 4, 3, 3, 3, 4, 4])
    assert (sea_share, land, inland) == (0, pytest.approx(11), pytest.approx(2))


def test_single_point_at_sea_stands_for_half_of_both_intervals():
    sea_share, land, _ = zone_lengths(UNEVEN_KM, [4, 4, 4, 4, 1, 4, 4])
    assert sea_share == pytest.approx((9 - 6) / 11)
    assert land == pytest.approx(6)


def test_path_all_at_sea_has_no_land():
    assert zone_lengths(UNEVEN_KM, np.ones(7, dtype=int)) == (1, 0, 0)


def test_zones_of_a_batch_equal_one_by_one():
    zones = np.random.default_rng(3).choice([1, 3, 4], size=(40, 7))
    batch = zone_lengths(UNEVEN_KM, zones)
    for i, zone in enumerate(zones):
        assert zone_lengths(UNEVEN_KM, zone) == tuple(part[i] for part in batch)


def test_unknown_zone_says_which_codes_there_are():
    with pytest.raises(ProfileError, match="zone 2 is not known: use 1 for sea, 3 for coastal land, 4"):
        zone_lengths(UNEVEN_KM, [4, 4, 2, 4, 4, 4, 4])


def test_path_centre_is_the_geodesic_midpoint_on_a_sphere():
    """pyproj on a sphere of 6371 km; the path length is the distance between the positions."""
    sphere = Geod(a=6371000, b=6371000)
    for lat1, lon1, lat2, lon2 in [(51, -1, 53, 2), (-33, 178, -30, -179), (68, 10, 75, 40)]:
        bearing, _, metres = sphere.inv(lon1, lat1, lon2, lat2)
        _, expected, _ = sphere.fwd(lon1, lat1, bearing, metres / 2)
        assert path_centre_latitude_deg(lat1, lon1, lat2, lon2, metres / 1000) == pytest.approx(expected)


@pytest.mark.parametrize(
    ("latitude", "expected"),
    # over sea mu1 = 1, so beta0 = 10^(1.67 - 0.015 latitude), and 4.17 beyond 70 degrees
    [(0, 46.7735), (45, 9.88553), (-45, 9.88553), (70, 4.16869), (71, 4.17), (90, 4.17)],
)
def test_incidence_over_sea_depends_on_latitude_alone(latitude, expected):
    assert beta0_percent(latitude, 0, 0) == pytest.approx(expected, rel=1e-5)


def test_incidence_beyond_70_degrees_by_hand():
    """300 km inland: tau = 1 - exp(-4.12e-4 * 300^2.41) = 1 to 1e-100, so
    mu1 = (10^(-300/9.4) + 10^(-4.25))^0.2 = 10^-0.85 = 0.141254 and beta0 = 4.17 mu1^1.3 = 0.327443.
    """
    assert beta0_percent(75, 300, 300) == pytest.approx(4.17 * 10 ** (-0.85 * 1.3), rel=1e-9)
    assert beta0_percent(75, 300, 300) == pytest.approx(0.327443, rel=1e-5)


def test_incidence_has_no_step_at_70_degrees():
    """mu1 to the power 0.297 just below and 0.3 beyond, 10^0.62 and 4.17: the text's own rounding, 1 %."""
    land = np.array([0.0, 5, 30, 200])
    assert beta0_percent(70, land, land) == pytest.approx(beta0_percent(70.001, land, land), rel=0.01)


def test_ducting_is_rarer_the_longer_the_land():
    land = np.linspace(0, 400, 81)
    assert (np.diff(beta0_percent(52, land, land)) <= 0).all()


def test_inland_weight_grows_from_0_to_1():
    weights = inland_weight(np.linspace(0, 300, 50))
    assert weights[0] == 0
    assert weights[-1] == pytest.approx(1)
    assert (np.diff(weights) >= 0).all()


def test_quantile_is_within_its_published_error_of_the_normal():
    """Abramowitz and Stegun, 26.2.23: error of the approximation below 4.5e-4."""
    shares = np.concatenate([np.geomspace(1e-6, 0.5, 200), 1 - np.geomspace(1e-6, 0.5, 200)])
    assert np.abs(inverse_complementary_normal(shares) - norm.isf(shares)).max() < 4.5e-4


def test_quantile_is_odd_about_one_half_and_clipped():
    assert inverse_complementary_normal(0.2) == pytest.approx(-inverse_complementary_normal(0.8))
    assert inverse_complementary_normal(1e-9) == inverse_complementary_normal(1e-6)
    assert np.isnan(inverse_complementary_normal(np.nan))
