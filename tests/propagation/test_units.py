import numpy as np
import pytest

from propagation.units import (
    db_from_ratio,
    dbm_from_dbuv,
    dbuv_from_dbm,
    ratio_from_db,
    wavelength_m,
)


def test_decibels_there_and_back():
    ratio = np.array([1e-12, 0.5, 1.0, 2.0, 1e9])
    assert ratio_from_db(db_from_ratio(ratio)) == pytest.approx(ratio)


def test_double_power_is_three_decibels():
    assert db_from_ratio(2.0) == pytest.approx(3.0103, abs=1e-4)


def test_a_milliwatt_in_75_ohms_is_108_75_dbuv():
    """sqrt(1e-3 * 75) V = 273.86 mV; 20 log 273861 = 108.75."""
    assert dbuv_from_dbm(0.0) == pytest.approx(108.75, abs=0.001)


def test_levels_there_and_back():
    assert dbm_from_dbuv(dbuv_from_dbm(-80.0)) == pytest.approx(-80.0)


def test_wavelength_at_300_mhz_is_one_metre():
    assert wavelength_m(299.792458) == pytest.approx(1.0)
