"""Troposcatter, ducting, time interpolation and combination of P.1812: by hand, limits and trends."""

import numpy as np
import pytest

from propagation.free_space import basic_loss_db
from propagation.p1812 import path_terms
from propagation.p1812.combination import combined_loss, free_space_loss_db, short_term_gain_db
from propagation.p1812.diffraction import diffraction_loss_db, time_interpolation_factor
from propagation.p1812.ducting import coupling_loss_db, ducting_loss_db
from propagation.p1812.troposcatter import troposcatter_loss_db


def path_of(length_km=100.0, zone=1, terrain=None, **changes):
    distance = np.linspace(0, length_km, 401)
    arguments = {
        "distance_km": distance,
        "terrain_amsl_m": np.zeros(401) if terrain is None else terrain,
        "clutter_height_m": 0.0 * distance,
        "zone": np.broadcast_to(zone, 401),
        "tx_height_agl_m": 50.0,
        "rx_height_agl_m": 50.0,
        "tx_latitude_deg": 54.0,
        "tx_longitude_deg": 5.0,
        "rx_latitude_deg": 54.5,
        "rx_longitude_deg": 6.0,
        "delta_n_per_km": 40.0,
    }
    return path_terms(**{**arguments, **changes})


@pytest.mark.parametrize(("time_percent", "expected"), [(50, 181.600275), (1, 166.927065)])
def test_troposcatter_by_hand(time_percent, expected):
    """600 MHz, 100 km, 10 mrad, 320 N: Lf = 25 log 0.6 - 2.5 (log 0.3)^2 = -6.229725;
    190.1 + Lf + 40 + 5.73 - 48 = 181.600275; at 1 % less 10.125 (log 50)^0.7 = 14.67321."""
    assert troposcatter_loss_db(600, 100, 10, 320, time_percent) == pytest.approx(expected, abs=1e-5)


def test_troposcatter_without_a_value_gives_none():
    assert np.isnan(troposcatter_loss_db(600, [100, np.nan], 10, 320, np.nan)).all()


def test_free_space_keeps_the_rounded_constant():
    """92.4 instead of 92.45 (20 log(4 pi 1e12 / c) = 92.4478): 0.0478 dB under the exact loss."""
    path = path_of(tx_height_agl_m=1000.0, rx_height_agl_m=1000.0)
    difference = basic_loss_db(100, 600) - free_space_loss_db(path, 600)
    assert difference == pytest.approx(0.0478, abs=1e-4)


def test_multipath_changes_nothing_at_50_percent_and_gains_below():
    gains = short_term_gain_db(path_of(), np.array([50.0, 20.0, 1.0]))
    assert gains[0] == 0
    assert (np.diff(gains) < 0).all()


def test_antenna_at_50_m_on_the_coast_gains_3_db_from_ducts_over_sea():
    """Eq. (49) at 50 m over sea level: tanh(0) = 0, so -3 dB at the water's edge."""
    inland = coupling_loss_db(path_of(), np.array(0.6))
    coast = coupling_loss_db(path_of(tx_distance_to_coast_km=0.0), np.array(0.6))
    both = coupling_loss_db(path_of(tx_distance_to_coast_km=0.0, rx_distance_to_coast_km=0.0), np.array(0.6))
    assert (inland - coast, inland - both) == (pytest.approx(3), pytest.approx(6))


def test_coast_counts_only_where_three_quarters_of_the_path_are_sea():
    zone = np.where(np.arange(401) < 110, 4, 1)  # 72.6 % sea
    far, near = (path_of(zone=zone, tx_distance_to_coast_km=km) for km in (500.0, 0.0))
    assert coupling_loss_db(far, np.array(0.6)) == coupling_loss_db(near, np.array(0.6))


def test_ducting_loss_falls_with_the_share_of_time():
    losses = ducting_loss_db(path_of(), 600, np.array([1.0, 2, 5, 10, 20, 50]))
    assert (np.diff(losses) > 0).all()


def test_ducts_are_stronger_over_sea_than_over_land():
    assert ducting_loss_db(path_of(zone=1), 600, 1) < ducting_loss_db(path_of(zone=4), 600, 1) - 10


def test_rough_ground_breaks_the_duct():
    ridge = np.zeros(401)
    ridge[180:220] = 300
    rough, smooth = path_of(zone=4, terrain=ridge), path_of(zone=4)
    assert ducting_loss_db(rough, 600, 1) > ducting_loss_db(smooth, 600, 1) + 10


def test_time_factor_is_1_up_to_beta0_and_0_at_50_percent():
    factors = time_interpolation_factor(np.array([1, 4, 8, 8.001, 20, 50]), 8.0)
    assert factors[:3].tolist() == [1, 1, 1]
    assert factors[3] == pytest.approx(1, abs=1e-3)  # both branches of eq. (40) meet at beta0
    assert factors[5] == pytest.approx(0, abs=1e-8)
    assert (np.diff(factors) <= 0).all()


def test_diffraction_at_50_percent_is_the_median():
    assert diffraction_loss_db(30.0, 10.0, 50, 1e-9) == 30
    assert diffraction_loss_db(30.0, 10.0, 1, 1.0) == 10


def combined(path, time_percent, **changes):
    losses = {
        "los_p_db": 120.0,
        "los_beta0_db": 118.0,
        "diffraction_p_db": 30.0,
        "loss_diffraction_median_db": 155.0,
        "loss_diffraction_p_db": 150.0,
        "loss_ducting_db": 300.0,
        "loss_troposcatter_db": 300.0,
        "time_interpolation_fi": time_interpolation_factor(time_percent, path.beta0_percent),
    }
    return combined_loss(path, time_percent, **{k: np.asarray(v) for k, v in {**losses, **changes}.items()})


def test_two_mechanisms_of_equal_loss_gain_1_5_db():
    """Eq. (63): -5 log(2 * 10^(-0.2 L)) = L - 5 log 2 = L - 1.505 dB."""
    assert combined(path_of(), 10, loss_troposcatter_db=150.0).combined_db == pytest.approx(
        150 - 5 * np.log10(2), abs=1e-6
    )


def test_huge_ducting_loss_leaves_diffraction_alone():
    """1775 dB and more overflow the printed form of eq. (60)."""
    with np.errstate(all="raise", under="ignore"):
        result = combined(path_of(), 10, loss_ducting_db=1e5, loss_troposcatter_db=1e5)
    assert result.combined_db == pytest.approx(150)


def test_notional_minimum_is_the_same_from_both_sides_of_beta0():
    """Eq. (59) at p = beta0: p >= beta0 gives Lb0b + (1 - sea) Ldp, p < beta0 the same with Lb0p = Lb0b."""
    path = path_of(zone=3)
    beta0 = float(path.beta0_percent)
    assert 1 < beta0 < 50
    at, below = combined(path, beta0, los_p_db=118.0), combined(path, beta0 * (1 - 1e-12), los_p_db=118.0)
    assert at.notional_min_los_sea_db == pytest.approx(118 + 30)
    assert below.notional_min_los_sea_db == pytest.approx(118 + 30)
