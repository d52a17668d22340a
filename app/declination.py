"""Magnetic declination: how far a compass stands from true north, today, and how far that can be off."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from functools import lru_cache

from pygeomag import GeoMag

COEFFICIENTS = "wmm/WMM_2025.COF"
MODEL = "World Magnetic Model 2025"
VALID_FROM, VALID_TO = date(2025, 1, 1), date(2029, 12, 31)


@dataclass(frozen=True, slots=True)
class Declination:
    """Of one place and day."""

    declination_deg: float  # east positive: compass bearing = true bearing - declination
    error_deg: float  # standard deviation, by the model's own error model
    day: date
    model: str = MODEL


def declination_at(latitude_deg: float, longitude_deg: float, height_m: float, day: date) -> Declination | None:
    """Return the declination at a place on a day; None near a magnetic pole or outside the model's years.

    Iron nearby (masts, roofs, cars) is not in it.

    References
    ----------
    NOAA and BGS, World Magnetic Model 2025, technical report, error model of section 3; the zone in which a
    compass is of no use has a horizontal intensity below 2000 nT.
    """
    if not VALID_FROM <= day <= VALID_TO:
        return None
    year = day.year + (day.timetuple().tm_yday - 1) / 365.25
    found = _model().calculate(glat=latitude_deg, glon=longitude_deg, alt=height_m / 1000, time=year)
    if found.in_blackout_zone:
        return None
    return Declination(float(found.d), float(found.calculate_uncertainty().d), day)


def declination_document(one: Declination | None) -> dict[str, object] | None:
    """Return the declination as the answer carries it."""
    if one is None:
        return None
    return {
        "declination_deg": round(one.declination_deg, 2),
        "error_deg": round(one.error_deg, 2),
        "day": one.day.isoformat(),
        "model": one.model,
    }


@lru_cache(maxsize=1)
def _model() -> GeoMag:
    return GeoMag(coefficients_file=COEFFICIENTS)
