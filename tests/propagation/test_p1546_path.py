import numpy as np
import pytest

from propagation.errors import ProfileError
from propagation.p1546.path import path_inputs, sea_length_km


def inputs(x, ground, zone=None, antenna=100.0, aerial=10.0, coastal=False):
    zone = np.full(len(x), 4) if zone is None else zone
    return path_inputs(x, ground, zone, antenna, aerial, coastal_land_is_sea=coastal)


def test_source_height_is_over_the_ground_3_to_15_km_away():
    """Ground 50 m, but 170 m from 3 to 15 km: 100 + 50 - 170."""
    x = np.arange(0.0, 41.0)
    ground = np.where((x >= 3) & (x <= 15), 170.0, 50.0)
    assert inputs(x, ground).h1_source_height_m == -20


def test_short_path_takes_the_ground_from_a_fifth_on():
    """10 km: from 2 km; ground 10 m per km: mean 60 m; 100 + 0 - 60."""
    x = np.arange(0.0, 11.0)
    assert inputs(x, 10 * x).h1_source_height_m == pytest.approx(40)


def test_uneven_spacing_weighs_by_length():
    """10 km: points 2, 3, 10 km at 0, 0, 70 m: area 0 + 35 * 7 over 8 km = 30.625 m."""
    assert inputs([0, 2, 3, 10], [0.0, 0, 0, 70]).h1_source_height_m == pytest.approx(100 - 30.625)


def test_receiver_looks_up_to_a_ridge():
    """Ridge 300 m, 5 km before an aerial at 10 m: atan(290/5000)."""
    x = np.arange(0.0, 41.0)
    ground = np.where(x == 35, 300.0, 0.0)
    assert inputs(x, ground).rx_clearance_angle_deg == pytest.approx(np.degrees(np.arctan(290 / 5000)))


def test_ridges_beyond_reach_are_not_seen():
    """Receiver 16 km, transmitter 15 km; one ridge 17 km from the one and 23 km from the other."""
    x = np.arange(0.0, 41.0)
    ground = np.where(x == 23, 900.0, 0.0)
    got = inputs(x, ground)
    assert got.rx_clearance_angle_deg == pytest.approx(np.degrees(np.arctan(-10 / 16000)))
    assert got.tx_clearance_angle_deg == pytest.approx(np.degrees(np.arctan(-100 / 15000)))


def test_each_end_sees_the_ground_of_the_other_on_a_short_path():
    """10 km of flat ground with a mast's foot 500 m up: the receiver sees it at atan(490/10000)."""
    x = np.arange(0.0, 11.0)
    ground = np.where(x == 0, 500.0, 0.0)
    assert inputs(x, ground).rx_clearance_angle_deg == pytest.approx(np.degrees(np.arctan(490 / 10000)))


def test_borders_of_water_lie_half_way():
    """Water at 4, 5, 6 km of points every kilometre: 3.5 to 6.5 km."""
    x = np.arange(0.0, 11.0)
    zone = np.where((x >= 4) & (x <= 6), 1, 4)
    got = inputs(x, np.zeros(11), zone)
    assert got.sea_km == pytest.approx(3)
    assert got.land_km == pytest.approx(7)


def test_coastal_land_is_sea_only_where_asked():
    x = np.arange(0.0, 11.0)
    zone = np.where(x <= 5, 3, 4)
    assert inputs(x, np.zeros(11), zone).sea_km == 0
    assert inputs(x, np.zeros(11), zone, coastal=True).sea_km == pytest.approx(5.5)


def test_several_lakes_add_up():
    assert sea_length_km([0, 1, 2, 3, 4, 5, 6], [1, 4, 4, 1, 4, 4, 1], (1,)) == pytest.approx(2)


def test_batch_equals_one_by_one():
    x = np.arange(0.0, 21.0)
    ground = np.random.default_rng(3).uniform(0, 300, (5, 21))
    batch = inputs(x, ground)
    for i in range(5):
        one = inputs(x, ground[i])
        assert batch.h1_source_height_m[i] == one.h1_source_height_m
        assert batch.rx_clearance_angle_deg[i] == one.rx_clearance_angle_deg
        assert batch.tx_clearance_angle_deg[i] == one.tx_clearance_angle_deg


def test_missing_ground_is_refused():
    with pytest.raises(ProfileError, match="fill it"):
        inputs([0, 1, 2, 3], [0, np.nan, 0, 0])


def test_profile_without_points_in_the_ring_is_refused():
    with pytest.raises(ProfileError, match="give 2 points 3 to 15 km"):
        inputs([0, 20, 40], [0, 0, 0])
