"""Declination against the World Magnetic Model."""

from __future__ import annotations

from datetime import date

import pytest

from app.declination import declination_at

# NOAA and BGS, World Magnetic Model 2025, table of test values: year 2025.0, height 0 km; from memory, hence
# `consistency_`. Printed to 0.01 degrees; the model wants the height above the ellipsoid.
TABLE = ((80.0, 0.0, 1.28), (0.0, 120.0, -0.16), (-80.0, 240.0, 68.78))


@pytest.mark.parametrize(("latitude_deg", "longitude_deg", "declination_deg"), TABLE)
def test_consistency_declination_is_that_of_the_models_table(latitude_deg, longitude_deg, declination_deg):
    found = declination_at(latitude_deg, longitude_deg, 0.0, date(2025, 1, 1))
    assert found is not None
    assert found.declination_deg == pytest.approx(declination_deg, abs=0.0051)


def test_error_is_that_of_the_models_own_error_model():
    """WMM2025 technical report, error model: sqrt(0.26^2 + (5417 / H)^2) degrees, H in nT; from memory (MH)."""
    found = declination_at(0.0, 120.0, 0.0, date(2025, 1, 1))
    horizontal_nt = 39_677.8  # at that place, as the library tells it
    assert found is not None
    assert found.error_deg == pytest.approx((0.26**2 + (5417 / horizontal_nt) ** 2) ** 0.5, abs=0.01)


def test_there_is_no_compass_bearing_near_a_magnetic_pole_or_outside_the_models_years():
    assert declination_at(86.0, 140.0, 0.0, date(2025, 6, 1)) is None
    assert declination_at(50.0, 0.0, 0.0, date(2031, 1, 1)) is None
