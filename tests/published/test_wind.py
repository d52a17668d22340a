"""Wind pressure, moments and tubes against IEC 60728-11 (from memory, MH) and mechanics."""

import pytest

from app.chain.wind import (
    LARGEST_MOMENT_N_M,
    LONGEST_FREE_M,
    STEEL_N_MM2,
    Mast,
    Mounted,
    area_from_load_m2,
    check_mast,
    section_modulus_cm3,
    wind_load_n,
    wind_pressure_n_m2,
)


@pytest.mark.parametrize(("height_m", "pressure", "wind_m_s"), [(10, 800, 36), (20, 800, 36), (20.1, 1100, 42)])
def test_pressure_is_that_of_the_standard_and_of_its_wind(height_m, pressure, wind_m_s):
    """800 N/m² up to 20 m, 1100 above; q = ½ · 1.25 · v²: 810 and 1102 N/m² (D), rounded in the standard."""
    assert wind_pressure_n_m2(height_m) == pressure
    assert 0.5 * 1.25 * wind_m_s**2 == pytest.approx(pressure, rel=0.015)


def test_moment_of_two_aerials():
    """60 N at 2.0 m and 40 N at 1.2 m: 120 + 48 = 168 N·m (arithmetic); the tube's own wind comes on top."""
    aerials = [Mounted("upper", area_from_load_m2(60), 2.0), Mounted("lower", area_from_load_m2(40), 1.2)]
    mast = Mast(diameter_mm=40, wall_mm=2, free_m=2.0, clamped_m=1.0)
    check = check_mast(mast, aerials, 10)
    assert check.loads_n == pytest.approx((60, 40))
    # 1.2 · 800 · 0.04 · 2.0 = 76.8 N at 1.0 m
    assert check.mast_load_n == pytest.approx(76.8)
    assert check.moment_n_m - check.mast_load_n * 1.0 == pytest.approx(168)


@pytest.mark.parametrize(
    ("diameter_mm", "wall_mm", "modulus_cm3", "moment_n_m"),
    [(40, 2, 2.16, 340), (50, 2, 3.48, 540), (60, 2.9, 7.1, 1100)],
)
def test_tubes_bear_what_mechanics_says(diameter_mm, wall_mm, modulus_cm3, moment_n_m):
    """W = π (D⁴ − d⁴) / (32 D) at 155 N/mm² (D); moments rounded to 5 and 10 N·m."""
    modulus = section_modulus_cm3(diameter_mm, wall_mm)
    assert modulus == pytest.approx(modulus_cm3, rel=0.003)
    assert modulus * STEEL_N_MM2 == pytest.approx(moment_n_m, rel=0.016)


def test_load_is_drag_times_pressure_times_area():
    """IEC 60728-11: c = 1.2; 0.1 m² at 800 N/m²: 96 N (arithmetic)."""
    assert wind_load_n(0.1, 800) == pytest.approx(96)


def test_limits_are_those_of_the_standard():
    """IEC 60728-11, section 12.2: 6 m of free mast and 1650 N·m at the clamp (MH)."""
    assert (LONGEST_FREE_M, LARGEST_MOMENT_N_M) == (6, 1650)
