import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.chain.overload import (
    DERATING_SOURCE,
    carrier_to_intermodulation_db,
    derating_db,
    headroom_db,
    mean_level_dbuv,
    power_sum_dbuv,
)

levels = st.lists(st.floats(20, 110), min_size=1, max_size=12).map(np.array)


@given(levels, st.floats(0, 20))
def test_each_decibel_more_of_everything_costs_two(level, more_db):
    before = carrier_to_intermodulation_db(level, 104)
    after = carrier_to_intermodulation_db(level + more_db, 104)
    assert before - after == pytest.approx(np.full(level.size, 2 * more_db), abs=1e-9)


@given(levels, levels)
def test_powers_add_in_any_order(some, others):
    together = power_sum_dbuv(np.concatenate((some, others)))
    assert power_sum_dbuv([power_sum_dbuv(some), power_sum_dbuv(others)]) == pytest.approx(together, abs=1e-9)
    assert together >= max(some.max(), others.max()) - 1e-9


def test_weaker_multiplex_loses_its_level_difference():
    """Five of 90 and one of 70: the mean Σp²/Σp is 10 log((5·10¹⁸ + 10¹⁴) / (5·10⁹ + 10⁷)) = 89.991."""
    got = carrier_to_intermodulation_db([90] * 5 + [70], 104)
    assert got[0] - got[5] == pytest.approx(89.991 - 70, abs=1e-3)
    assert got[0] == pytest.approx(2 * (134 - 96.998) - 1.761, abs=2e-3)


def test_strong_block_of_a_mobile_network_buries_what_is_weak():
    """The same six multiplexes with and without a block 30 dB above them."""
    alone = carrier_to_intermodulation_db([70.0] * 6, 104)
    beside = carrier_to_intermodulation_db([70.0] * 6 + [100.0], 104)
    assert (beside[:6] < alone - 60).all()


def test_unknown_signal_loads_nothing_and_stays_unknown():
    got = carrier_to_intermodulation_db([80, np.nan, 80], 104)
    assert np.isnan(got[1])
    assert got[[0, 2]] == pytest.approx(carrier_to_intermodulation_db([80, 80], 104))
    assert mean_level_dbuv([80, np.nan, 80]) == pytest.approx(80)


def test_nothing_at_all_overloads_nothing():
    assert np.isnan(carrier_to_intermodulation_db([np.nan, np.nan], 104)).all()
    assert headroom_db([np.nan], 104) == np.inf


def test_headroom_ends_twelve_decibels_below_the_intercept():
    """Rated 104: OIP3 134, ceiling 122."""
    assert headroom_db([119 - 10 * np.log10(2)] * 2, 104) == pytest.approx(3)
    assert headroom_db([123.0], 104) == pytest.approx(-1)


def test_batch_equals_one_by_one():
    batch = np.random.default_rng(1).uniform(40, 100, (4, 3, 7))
    rated = np.array([98.0, 103, 108])
    singly = [[carrier_to_intermodulation_db(batch[i, j], rated[j]) for j in range(3)] for i in range(4)]
    assert carrier_to_intermodulation_db(batch, rated) == pytest.approx(np.array(singly))
    assert headroom_db(batch, rated).shape == (4, 3)


def test_derating_rises_with_every_channel_and_ends_in_the_formula():
    steps = [derating_db(channels) for channels in range(1, 60)]
    assert steps[0] == 0
    assert (np.diff(steps) >= 0).all()
    assert derating_db(9) == 6.5
    assert derating_db(50) == pytest.approx(7.5 * np.log10(49))
    assert "S2" in DERATING_SOURCE


def test_any_number_of_weak_emissions_changes_nothing():
    """294 of −20 dB(µV) beside six of 94 and one of 84: what the others are left stays within 0.001 dB."""
    few = carrier_to_intermodulation_db([94] * 6 + [84], 104)
    many = carrier_to_intermodulation_db([94] * 6 + [84] + [-20] * 294, 104)
    assert many[:7] == pytest.approx(few, abs=1e-3)
