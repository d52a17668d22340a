"""Where a compass points."""

from datetime import date

import pytest

from app.declination import declination
from app.errors import RequestError


@pytest.mark.parametrize(
    ("latitude", "longitude", "height_km", "day", "published_deg"),
    [
        # WMM2025 test values (NOAA NCEI, WMM2025_TestValues.txt), from memory: 2025.0, sea level.
        (80.0, 0.0, 0.0, date(2025, 1, 1), 1.28),
        (0.0, 120.0, 0.0, date(2025, 1, 1), -0.16),
        (-80.0, 240.0, 0.0, date(2025, 1, 1), 68.78),
    ],
)
def test_consistency_with_the_published_test_values(latitude, longitude, height_km, day, published_deg):
    found = declination(latitude, longitude if longitude <= 180 else longitude - 360, day, 1e3 * height_km)
    assert found.declination_deg == pytest.approx(published_deg, abs=0.01)


def test_the_compass_shows_less_than_true_where_it_points_east():
    found = declination(0, 0, date(2026, 6, 1))
    assert found.compass_deg(100.0) == pytest.approx(100.0 - found.declination_deg)


def test_error_grows_towards_the_magnetic_pole_and_is_said():
    near, far = declination(86, 140, date(2026, 6, 1)), declination(10, 10, date(2026, 6, 1))
    assert near.error_deg > 3 * far.error_deg
    assert "useless" in near.caution or "unreliable" in near.caution
    assert far.caution == ""
    assert "19 in 20" in far.text


def test_the_model_of_the_day_is_used_and_a_day_without_one_is_refused():
    assert declination(50, 10, date(2024, 12, 31)).model == "WMM2020"
    assert declination(50, 10, date(2025, 1, 1)).model == "WMM2025"
    with pytest.raises(RequestError, match="from 2015 to 2029"):
        declination(50, 10, date(2030, 1, 1))
