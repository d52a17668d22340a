"""What is on the air at a roof, for questions beside the main one."""

from __future__ import annotations

from datetime import date

from app.assumptions import Assumptions
from app.fields import fields_at
from app.interferers import SEA_REACH_KM, interferers_at
from app.margins import Air, air_of
from app.request import AssessRequest
from app.roof import Roof
from app.site import site_of
from app.transmitters.store import Store
from terrain.mosaic import Ground


def air_at(
    request: AssessRequest,
    roof: Roof,
    store: Store,
    ground: Ground,
    assumptions: Assumptions,
    today: date | None = None,
) -> Air:
    """Gather all emissions with an answer at a roof, in the way of `assess`.

    Raises
    ------
    RoofError, CoverageError
        The place cannot be a roof.
    """
    site_of(roof, ground)
    on_the_air = store.emissions_within(roof.latitude_deg, roof.longitude_deg, SEA_REACH_KM, today or date.today())
    found = [row for row in on_the_air if row[2] <= request.reach_km]
    availability, method = request.availability_percent, request.method
    fields = fields_at(roof, found, ground, assumptions, availability, method)
    return air_of(fields, interferers_at(roof, fields, on_the_air, ground, assumptions, availability, method))
