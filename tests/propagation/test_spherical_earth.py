import numpy as np
import pytest

from propagation.constants import EARTH_RADIUS_KM
from propagation.errors import RangeError
from propagation.spherical_earth import spherical_earth_loss_db

K = 4 / 3 * EARTH_RADIUS_KM


def loss(d, h1=100.0, h2=10.0, f=600.0, radius=K, sea=0.0, polarisation="horizontal"):
    return spherical_earth_loss_db(d, h1, h2, f, radius, sea, polarisation)


def test_clear_path_loses_nothing():
    """300 m over both ends at 10 km: some 297 m clear, and 0.6 of the first zone is 21 m."""
    assert loss(10.0, 300.0, 300.0) == 0


def test_loss_grows_with_distance():
    d = np.linspace(1, 200, 400)
    assert (np.diff(loss(d)) >= 0).all()


def test_loss_is_continuous_at_the_horizon():
    """sqrt(2 * 8494.67) (sqrt 0.1 + sqrt 0.01) = 54.25 km."""
    horizon = np.sqrt(2 * K) * (np.sqrt(0.1) + np.sqrt(0.01))
    before, after = loss(np.array([horizon - 1e-6, horizon + 1e-6]))
    assert before == pytest.approx(after, abs=0.01)


def test_loss_is_the_same_both_ways():
    assert loss(80.0, 100.0, 10.0) == pytest.approx(loss(80.0, 10.0, 100.0))


def test_higher_antennas_lose_less():
    assert (np.diff(loss(80.0, np.array([10.0, 50.0, 100.0, 300.0]))) < 0).all()


def test_larger_earth_loses_less():
    assert loss(80.0, radius=K) < loss(80.0, radius=EARTH_RADIUS_KM)


def test_polarisation_matters_over_sea_at_low_frequencies_only():
    """P.526, section 3.1: negligible above 20 MHz over land and above 300 MHz over sea."""
    both = ["horizontal", "vertical"]
    at_600 = loss(80.0, sea=1.0, polarisation=both)
    assert abs(at_600[0] - at_600[1]) < 0.3
    on_land = loss(80.0, f=100.0, polarisation=both)
    assert abs(on_land[0] - on_land[1]) < 0.3
    low_at_sea = loss(80.0, h1=5.0, h2=5.0, f=30.0, sea=1.0, polarisation=both)
    assert low_at_sea[0] > low_at_sea[1] + 10


def test_share_of_sea_weights_both_surfaces():
    land, half, sea = loss(80.0, h2=3.0, f=40.0, sea=np.array([0.0, 0.5, 1.0]), polarisation="vertical")
    assert half == pytest.approx((land + sea) / 2)
    assert land != sea


def test_no_value_stays_no_value():
    assert np.isnan(loss(np.nan))


def test_antenna_below_the_smooth_earth_is_refused():
    with pytest.raises(RangeError, match="raise the antenna"):
        loss(80.0, 0.0)


def test_other_polarisation_is_refused():
    with pytest.raises(RangeError, match='"circular" is not known: use "horizontal" or "vertical"'):
        loss(80.0, polarisation="circular")
