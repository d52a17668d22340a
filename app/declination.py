"""Where a compass points: magnetic declination by place and day, with its error."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from typing import Any

from pygeomag import GeoMag

from app.errors import RequestError

# Year of each World Magnetic Model and the file that pygeomag keeps it in; each holds for five years.
_MODELS = {2015: "wmm/WMM_2015v2.COF", 2020: "wmm/WMM_2020.COF", 2025: "wmm/WMM_2025.COF"}
_LAST_YEAR = 2030
# Horizontal field below which a compass is of little or no use.
_UNRELIABLE_NT, _USELESS_NT = 6000.0, 2000.0


@dataclass(frozen=True, slots=True)
class Declination:
    """Direction of a compass needle, east of true north."""

    declination_deg: float  # positive to the east
    error_deg: float  # standard deviation: model and local crust
    model: str
    day: date
    caution: str  # empty where a compass can be relied on
    useless: bool = False  # so near a magnetic pole that it says nothing

    def compass_deg(self, true_deg: float) -> float:
        """What a compass shows for a true bearing, 0 to 360."""
        return (true_deg - self.declination_deg) % 360

    @property
    def text(self) -> str:
        """In words, for the rigger."""
        side = "east" if self.declination_deg >= 0 else "west"
        away = f"{abs(self.declination_deg):.1f}° {side} of true north here on {self.day.isoformat()}"
        doubt = f"±{2 * self.error_deg:.1f}° (19 in 20; {self.model}; iron near the roof not counted)"
        return f"A compass points {away}, {doubt}. {self.caution}".rstrip()


def declination(latitude_deg: float, longitude_deg: float, day: date, height_m: float = 0.0) -> Declination:
    """Return the declination at a place on a day from the World Magnetic Model that holds then.

    Raises
    ------
    RequestError
        The day lies outside the models, 2015 to 2029.

    References
    ----------
    World Magnetic Model 2015v2, 2020, 2025 (NOAA NCEI and BGS) as in pygeomag; error: "The US/UK World Magnetic
    Model for 2025-2030", error model, sqrt(0.26² + (5417/H)²) degrees, and likewise for the editions before.
    """
    edition = day.year - day.year % 5
    if edition not in _MODELS:
        raise RequestError(
            f"no magnetic model holds on {day.isoformat()}: use a day from 2015 to {_LAST_YEAR - 1}",
            field="day",
            allowed=f"2015-01-01 to {_LAST_YEAR - 1}-12-31",
        )
    start, end = date(day.year, 1, 1), date(day.year + 1, 1, 1)
    year = day.year + (day - start).days / (end - start).days
    model = GeoMag(coefficients_file=_MODELS[edition])
    field = model.calculate(glat=latitude_deg, glon=longitude_deg, alt=height_m / 1e3, time=year)
    caution = ""
    if field.h < _USELESS_NT:
        caution = "So near the magnetic pole a compass is useless: use the sun or a map."
    elif field.h < _UNRELIABLE_NT:
        caution = "So near the magnetic pole a compass is unreliable."
    return Declination(
        declination_deg=float(field.d),
        error_deg=float(field.calculate_uncertainty().d),
        model=f"WMM{edition}",
        day=day,
        caution=caution,
        useless=field.h < _USELESS_NT,
    )


def compass_text(latitude_deg: float, longitude_deg: float, day: date) -> str:
    """Say where a compass points, or that no model holds on that day."""
    try:
        return declination(latitude_deg, longitude_deg, day).text
    except RequestError as error:
        return str(error)


def compass_document(latitude_deg: float, longitude_deg: float, day: date, height_m: float) -> dict[str, Any] | None:
    """Return the declination as the answer carries it; None where a compass says nothing, or no model holds."""
    try:
        found = declination(latitude_deg, longitude_deg, day, height_m)
    except RequestError:
        return None
    if found.useless:
        return None
    return {
        "declination_deg": round(found.declination_deg, 2),
        "error_deg": round(found.error_deg, 2),
        "day": day.isoformat(),
        "model": found.model,
        "caution": found.caution,
    }
