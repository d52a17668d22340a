import numpy as np
import pytest

from propagation.errors import RangeError
from propagation.free_space import basic_loss_db, field_strength_dbuv_m


def test_field_halves_with_twice_the_distance():
    near, far = field_strength_dbuv_m([10.0, 20.0])
    assert near - far == pytest.approx(20 * np.log10(2))


def test_ten_times_the_power_is_ten_decibels():
    assert field_strength_dbuv_m(7.0, 10.0) - field_strength_dbuv_m(7.0) == pytest.approx(10.0)


def test_loss_grows_six_decibels_per_octave():
    low, high = basic_loss_db(10.0, [300.0, 600.0])
    assert high - low == pytest.approx(20 * np.log10(2))


def test_no_value_stays_no_value():
    assert np.isnan(field_strength_dbuv_m([np.nan, 1.0])).tolist() == [True, False]


@pytest.mark.parametrize("call", [lambda: field_strength_dbuv_m(0.0), lambda: basic_loss_db(-1.0, 600.0)])
def test_no_distance_has_no_field(call):
    with pytest.raises(RangeError, match="use more than 0 km"):
        call()


def test_no_power_has_no_field():
    with pytest.raises(RangeError, match="radiated power 0 kW"):
        field_strength_dbuv_m(1.0, 0.0)


def test_no_frequency_has_no_loss():
    with pytest.raises(RangeError, match="use more than 0 MHz"):
        basic_loss_db(1.0, 0.0)
