"""What is on the air at a roof: wanted emissions with their fields, and what disturbs them."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from pathlib import Path

from app.assumptions import Assumptions
from app.fields import EmissionField, Found, fields_at
from app.interferers import MOBILE, SEA_REACH_KM, interferers_at
from app.margins import Air, air_of
from app.request import AssessRequest
from app.roof import Roof
from app.transmitters.store import Store
from terrain.mosaic import Ground


@dataclass(frozen=True, slots=True)
class Heard:
    """What is on the air at a roof, from the store to columns."""

    on_the_air: tuple[Found, ...]  # everything that may disturb
    found: tuple[Found, ...]  # what may be wanted among it
    fields: tuple[EmissionField, ...]  # of those, in their order
    air: Air  # those with an answer


def air_at(
    request: AssessRequest,
    roof: Roof,
    store: Store,
    ground: Ground,
    assumptions: Assumptions,
    today: date | None = None,
    refractivity_maps: Path | None = None,
) -> Heard:
    """Return what is on the air in reach of a roof, with its fields."""
    on_the_air = store.emissions_within(roof.latitude_deg, roof.longitude_deg, SEA_REACH_KM, today or date.today())
    found = [row for row in on_the_air if row[2] <= request.reach_km and row[0].system != MOBILE]
    availability, method = request.availability_percent, request.method
    fields = fields_at(roof, found, ground, assumptions, availability, method, refractivity_maps)
    disturbing = interferers_at(roof, fields, on_the_air, ground, assumptions, availability, method, refractivity_maps)
    return Heard(tuple(on_the_air), tuple(found), tuple(fields), air_of(fields, disturbing))
