import numpy as np
import pytest

from propagation.errors import ProfileError
from propagation.fresnel import clearance_ratio, first_zone_radius_m


def test_grazing_ray_has_no_clearance():
    assert clearance_ratio(0.0, 5, 15, 600) == 0


def test_path_is_the_same_from_both_ends():
    assert first_zone_radius_m(5, 15, 600) == first_zone_radius_m(15, 5, 600)


def test_zone_is_widest_in_the_middle():
    d1 = np.arange(1.0, 20.0)
    assert first_zone_radius_m(d1, 20 - d1, 600).argmax() == 9


def test_radius_by_the_two_ways_round():
    """The way over the zone's edge is half a wavelength longer: 5 and 15 km, 0.5 m wavelength.

    sqrt(5000² + r²) + sqrt(15000² + r²) - 20000 = 0.25 m.
    """
    radius = first_zone_radius_m(5, 15, 299.792458 / 0.5)
    assert np.hypot(5000, radius) + np.hypot(15000, radius) - 20000 == pytest.approx(0.25, rel=1e-3)


def test_ground_above_the_ray_counts_negative():
    assert clearance_ratio(-20.0, 5, 15, 600) < 0


def test_end_of_the_path_has_no_zone():
    with pytest.raises(ProfileError, match="take points between both ends"):
        clearance_ratio(20, [0, 10], [20, 10], 600)
