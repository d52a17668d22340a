import numpy as np
import pytest

from propagation.constants import EARTH_RADIUS_KM
from propagation.errors import RangeError
from propagation.refraction import effective_earth_radius_km


def test_no_lapse_leaves_the_true_earth():
    assert effective_earth_radius_km(0.0) == EARTH_RADIUS_KM


def test_radius_grows_with_the_lapse():
    assert (np.diff(effective_earth_radius_km(np.arange(-50.0, 157.0))) > 0).all()


def test_no_value_stays_no_value():
    assert np.isnan(effective_earth_radius_km(np.nan))


def test_rays_that_follow_the_earth_have_no_radius():
    with pytest.raises(RangeError, match="use less than 157"):
        effective_earth_radius_km(157.0)
