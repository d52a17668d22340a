"""Loading of amplifiers against the third-order law and the rating's own definition."""

import numpy as np
import pytest

from app.chain.overload import (
    carrier_to_intermodulation_db,
    derating_db,
    output_intercept_dbuv,
    power_sum_dbuv,
)


def test_six_multiplexes_of_94_at_a_rated_104():
    """OIP3 = 104 + 30 = 134; six of 94 are 94 + 10 log 6 = 101.78; 2 (134 − 101.78) − 1.76 = 62.7 dB.

    Arithmetic (D) on the third-order law for noise-like loading; 0.05 is the rounding of the result.
    """
    levels = np.full(6, 94.0)
    assert power_sum_dbuv(levels) == pytest.approx(101.78, abs=0.005)
    assert carrier_to_intermodulation_db(levels, 104) == pytest.approx(62.7, abs=0.05)


def test_two_equal_carriers_are_three_decibels_more():
    """10 log 2 = 3.01 dB (D)."""
    assert power_sum_dbuv([60, 60]) == pytest.approx(63.01, abs=0.005)


def test_intercept_lies_thirty_decibels_above_the_60_db_rating():
    """U60 = IP3 − 30 (D): two carriers at U have products at 3 U − 2 OIP3, 2 (OIP3 − U) below; 60 dB at 30 below."""
    assert output_intercept_dbuv(104) - 104 == 60 / 2


@pytest.mark.parametrize(
    ("channels", "printed_db"), [(2, 0), (3, 2), (4, 3), (5, 4), (6, 5), (7, 5.5), (8, 6), (10, 7)]
)
def test_derating_table_is_near_the_formula_it_stands_for(channels, printed_db):
    """7.5 log (n − 1) (IEC 60728-3, from memory, MH) against the table as a manufacturer prints it (S2).

    The printed values are rounded down to half decibels: 0 to 0.7 dB below the formula.
    """
    assert derating_db(channels) == printed_db
    assert 0 <= 7.5 * np.log10(channels - 1) - printed_db < 0.7
