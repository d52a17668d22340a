"""Location variability and building entry of P.1812: no published example has them, so by hand."""

import numpy as np
import pytest

from propagation.errors import RangeError
from propagation.p1812.locations import location_deviation_db, location_loss_db


@pytest.mark.parametrize(("side_m", "expected"), [(100, 1.94), (500, 3.04), (1000, 3.70)])
def test_consistency_deviation_of_small_areas_at_600_mhz(side_m, expected):
    """Rec. ITU-R P.1812, section 4.7, formula from memory: its values to two decimals."""
    assert location_deviation_db(600, side_m, 1.5, 10) == pytest.approx(expected, abs=0.006)


def test_deviation_vanishes_10_m_above_the_cover():
    """u(h) = 1 below the cover's top, then 1 - (h - R) / 10."""
    deviations = location_deviation_db(600, 500, [5, 12, 17, 22, 40], 12)
    np.testing.assert_allclose(deviations / deviations[0], [1, 1, 0.5, 0, 0], atol=1e-12)


def test_95_percent_of_locations_cost_1_645_deviations():
    """Normal quantile 1.6449; the Recommendation's approximation gives 1.6452."""
    assert location_loss_db(95, 5.5, False) == pytest.approx(1.6449 * 5.5, abs=2.5e-3)


def test_few_locations_gain_what_many_lose():
    assert location_loss_db(10, 4, False) == pytest.approx(-location_loss_db(90, 4, False))


def test_half_of_the_locations_have_the_median():
    assert location_loss_db(50, 5.5, False) == pytest.approx(0, abs=1e-6)
    assert location_loss_db(50, None, False) == 0


def test_receiver_at_sea_has_no_variation():
    assert location_loss_db([5, 95], 5.5, True).tolist() == [0, 0]


def test_more_locations_never_lose_less():
    assert (np.diff(location_loss_db(np.arange(1, 100), 5.5, False)) > 0).all()


def test_building_adds_its_median_and_joins_its_spread():
    """Spreads of 3 and 4 dB make 5 dB, so 90 % costs 12 dB + 1.2816 * 5 dB."""
    loss = location_loss_db(90, 3, False, building_entry_median_db=12, building_entry_sigma_db=4)
    assert loss == pytest.approx(12 + 1.2816 * 5, abs=2.5e-3)
    assert location_loss_db(50, None, False, building_entry_median_db=12) == 12


def test_no_share_gives_no_value():
    assert np.isnan(location_loss_db(np.nan, None, False))
    assert np.isnan(location_loss_db([50, np.nan], 5, False)).tolist() == [False, True]


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ((0.5, 5, False), r"share of locations 0.5 % is outside .*: use 1 to 99 %"),
        ((95, None, False), "95 % of locations needs location_sigma_db: give the spread in dB"),
        ((95, -2, False), "standard deviation -2 dB is negative: use 0 or more"),
    ],
)
def test_location_argument_that_cannot_be_is_refused(arguments, message):
    with pytest.raises(RangeError, match=message):
        location_loss_db(*arguments)


@pytest.mark.parametrize(
    ("frequency", "side", "message"), [(20, 500, "frequency 20 MHz"), (600, 20, "side of the area 20 m")]
)
def test_deviation_outside_its_range_is_refused(frequency, side, message):
    with pytest.raises(RangeError, match=f"{message} is outside"):
        location_deviation_db(frequency, side, 10, 10)
