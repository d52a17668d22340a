"""Rec. ITU-R P.525: free space in its practical units."""

import numpy as np
import pytest

from propagation.free_space import basic_loss_db, field_strength_dbuv_m


@pytest.mark.parametrize(("frequency_mhz", "distance_km"), [(1, 1), (100, 10), (600, 1), (682, 57.3)])
def test_loss_matches_p525_in_practical_units(frequency_mhz, distance_km):
    """Rec. ITU-R P.525-4, eq. (8): 32.4 + 20 log f + 20 log d, constant printed to one decimal."""
    printed = 32.4 + 20 * np.log10(frequency_mhz) + 20 * np.log10(distance_km)
    assert basic_loss_db(distance_km, frequency_mhz) == pytest.approx(printed, abs=0.05)


def test_field_matches_p525_for_eirp():
    """Rec. ITU-R P.525-4, eq. (10): 104.77 (74.8 + 30 for kW, rounded) for 1 kW e.i.r.p. at 1 km.

    1 kW e.r.p. is 2.15 dB more e.i.r.p.
    """
    assert field_strength_dbuv_m(1.0) == pytest.approx(104.77 + 2.15, abs=0.005)


def test_field_and_loss_fit_together():
    """Field to loss by definition: E = 139.37 + 20 log f - Lb for 1 kW e.r.p.; P.1546 eq. (40) prints 139.3.

    139.37: 106.92 dB(µV/m) at 1 km plus 32.45 dB at 1 km and 1 MHz.
    """
    distance, frequency = np.array([0.5, 8.0, 120.0]), 578.0
    reckoned = 139.37 + 20 * np.log10(frequency) - basic_loss_db(distance, frequency)
    assert field_strength_dbuv_m(distance) == pytest.approx(reckoned, abs=0.005)


def test_ten_kilowatts_at_thirty_kilometres():
    """106.92 + 10 - 20 log 30 = 87.38 dB(µV/m)."""
    assert field_strength_dbuv_m(30.0, 10.0) == pytest.approx(87.38, abs=0.005)
