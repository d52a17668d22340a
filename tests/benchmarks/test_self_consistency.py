"""The self-consistency report in short: 2,000 worlds over 50 roofs, within five points."""

import sys
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).parent))

from worlds import EMISSIONS, consistency, earnings, low_mast, roof_case, world

ROOFS, WORLDS, SEED = 50, 40, 20261201


@pytest.fixture(scope="module")
def cases():
    return [roof_case(number) for number in range(ROOFS)]


@pytest.fixture(scope="module")
def tallies(cases):
    return consistency(cases, WORLDS, SEED)


@pytest.mark.parametrize("which", [0, 1], ids=["before", "after"])
def test_events_of_chance_p_happen_in_p_of_the_worlds(tallies, which):
    deciles = tallies[which].deciles()
    assert len(deciles) >= 9
    for _, chance, happened, _ in deciles:
        assert abs(happened - chance) <= 0.05


@pytest.mark.parametrize("which", [0, 1], ids=["before", "after"])
def test_ninety_percent_intervals_hold_ninety_percent(tallies, which):
    assert 0.88 <= tallies[which].coverage() <= 0.92


def test_readings_sharpen_the_chances(tallies):
    assert tallies[1].brier() < 0.8 * tallies[0].brier()


def test_the_rule_earns_more_than_buying_always_never_or_by_median_margin(cases):
    paid = earnings([*cases, *(roof_case(number) for number in range(ROOFS, 2 * ROOFS))], 30, SEED)
    assert paid.rule > max(paid.always, paid.never, paid.median_margin) + 2 * paid.rule_error
    assert 0.05 < paid.measured_share < 0.6


def test_two_readings_of_a_weak_transmitter_remove_most_of_the_harm(cases):
    """8 dB low without the model knowing: at least 60 % of the excess Brier score goes."""
    assert low_mast(cases[:20], 10, SEED)["removed"] >= 0.60


def test_worlds_have_the_spread_of_the_model(cases):
    rng = np.random.default_rng(SEED)
    drawn = np.stack([world(cases[0], rng).now for _ in range(2000)])
    assert drawn.shape == (2000, EMISSIONS)
    assert drawn.std(axis=0) == pytest.approx(cases[0].now.sigma_db, rel=0.06)  # three standard errors
