"""Readings of one request: where each was taken, what the model says of it, and what could be read next."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path

import numpy as np

from app.air import Air, air_of
from app.air_at import Heard
from app.assumptions import Assumptions
from app.chain.parts import AerialPolarisation, Chain
from app.chance import Knowledge
from app.errors import NotStoredError, ReadingError
from app.evidence import Evidence, weigh
from app.fields import EmissionField, fields_at
from app.interferers import interferers_at
from app.margins import Turned, turn
from app.reading_value import Readable
from app.readings import AT_THE_AERIAL, INSTRUMENTS, Reading, reading_from_document
from app.request import NOTHING, AssessRequest
from app.roof import Roof
from app.statements import QUANTILE_99, Situation
from app.stored_chains import stored_chain
from app.transmitters.store import Store
from app.vantage import MEASURING_AERIAL, Vantage, measuring_chain, vantage
from terrain.mosaic import Ground

SAME_HEIGHT_M = 0.25
HEIGHT_STEP_M = 0.5
MOST_HEIGHTS = 6  # each costs one more computation of all fields
LEAST_READABLE_DBUV = 15.0  # a level that a meter shows at all


@dataclass(frozen=True, slots=True)
class Place:
    """One request on its way, as far as fields and first pointings."""

    request: AssessRequest
    store: Store
    ground: Ground
    heard: Heard
    turned: Mapping[str, Turned]  # before any reading
    assumptions: Assumptions
    refractivity_maps: Path | None = None
    _airs: dict[float, Air] = field(default_factory=dict)
    _vantages: dict[tuple[str, float, str, str, float], Vantage] = field(default_factory=dict)

    def default_chain(self) -> str | None:
        """Name of what is up now, else of the first chain."""
        now = self.request.now
        return now if now not in (None, NOTHING) else next(iter(self.turned), None)

    def look(self, reading: Reading) -> tuple[Vantage, Air]:
        """Return how one was looking when a reading was taken; LookupError if that cannot be said."""
        name = reading.chain or self.default_chain()
        if name is None:
            raise LookupError("no chain to read through: name one")
        if name == MEASURING_AERIAL and name not in self.turned:
            plane = reading.polarisation or self._plane_of(reading)
            return self.seen_from(measuring_chain(), 0.0, plane, AT_THE_AERIAL, reading)
        one = self.turned.get(name) or self._turned(name)
        point = reading.point or ""
        if point not in ("", AT_THE_AERIAL, *one.chain.outlet_names):
            names = ", ".join((AT_THE_AERIAL, *one.chain.outlet_names))
            raise LookupError(f'chain "{name}" has no point "{point}": use one of {names}; kept, not used')
        pointing_deg = one.pointing_deg if reading.pointing_deg is None else reading.pointing_deg
        return self.seen_from(one.chain, pointing_deg, reading.polarisation or one.polarisation, point, reading)

    def neighbour(self, chain: Chain, pointing_deg: float, polarisation: str) -> tuple[Vantage, Air]:
        """Return how a neighbour's aerial looks."""
        plane: AerialPolarisation = "vertical" if polarisation == "vertical" else "horizontal"
        return self.seen_from(chain, pointing_deg, plane, "", None)

    def seen_from(
        self,
        chain: Chain,
        pointing_deg: float,
        polarisation: AerialPolarisation,
        point: str,
        reading: Reading | None,
    ) -> tuple[Vantage, Air]:
        """Return a way of looking, computed once."""
        height_m = self.request.roof.aerial_agl_m
        if reading is not None and reading.aerial_agl_m is not None:
            height_m = reading.aerial_agl_m
        air = self._air_at(height_m)
        key = (chain.name, pointing_deg, polarisation, point, height_m)
        if key not in self._vantages:
            self._vantages[key] = vantage(
                chain, pointing_deg, polarisation, point, air, self.request.roof, self.assumptions
            )
        return self._vantages[key], air

    def fields_on(self, roof: Roof, availability_percent: int) -> list[EmissionField]:
        """Return all fields again for another height or share of time."""
        return fields_at(
            roof,
            self.heard.found,
            self.ground,
            self.assumptions,
            availability_percent,
            self.request.method,
            self.refractivity_maps,
        )

    def _air_at(self, height_m: float) -> Air:
        height_m = round(height_m / HEIGHT_STEP_M) * HEIGHT_STEP_M
        if abs(height_m - self.request.roof.aerial_agl_m) <= SAME_HEIGHT_M:
            return self.heard.air
        if height_m not in self._airs:
            if len(self._airs) >= MOST_HEIGHTS:
                raise LookupError(f"readings at more than {MOST_HEIGHTS} heights: this one is kept, not used")
            roof = replace(self.request.roof, aerial_agl_m=max(1.0, height_m))
            share, method = self.request.availability_percent, self.request.method
            fields = self.fields_on(roof, share)
            disturbers = interferers_at(
                roof, fields, self.heard.on_the_air, self.ground, self.assumptions, share, method
            )
            self._airs[height_m] = air_of(fields, disturbers)
        return self._airs[height_m]

    def _plane_of(self, reading: Reading) -> AerialPolarisation:
        """How a measuring aerial is held for what is read: as the transmitter's antenna is."""
        found = (
            one.emission.polarisation
            for one in self.heard.fields
            if reading.emission in (one.emission.id, str(one.emission.channel))
            or reading.multiplex == one.emission.multiplex_id
        )
        return "vertical" if next(found, "") == "vertical" else "horizontal"

    def _turned(self, name: str) -> Turned:
        try:
            chain = stored_chain(self.store, name)
        except NotStoredError as error:
            raise LookupError(f"{error.message}; kept, not used") from error
        return turn(
            chain, self.heard.air, self.request.roof, sorted(set(self.heard.air.multiplex_of)), self.assumptions
        )


def readings_of(request: AssessRequest, store: Store) -> list[Reading]:
    """Return the readings that came with a request and those stored for its roof."""
    stored: list[Reading] = []
    if request.stored_readings:
        roof = request.roof
        for document in store.readings_near(roof.latitude_deg, roof.longitude_deg):
            stored.append(reading_from_document(document["reading"] | {"id": document["id"]}))
    return [*request.readings, *stored]


def evidence_at(place: Place) -> Evidence:
    """Return what the readings of a request leave of the errors; nothing without readings."""
    readings = readings_of(place.request, place.store)
    if not readings or not (place.heard.air.fields or place.request.readings):
        return Evidence((), None)  # kept ones wait until something is in reach
    if not place.heard.air.fields:
        raise ReadingError(
            "readings cannot be compared: nothing in reach can be predicted here; they are kept", field="readings"
        )
    roof_m = place.request.roof.aerial_agl_m
    same = [
        replace(one, aerial_agl_m=None)
        if one.aerial_agl_m is not None and abs(one.aerial_agl_m - roof_m) <= SAME_HEIGHT_M
        else one
        for one in readings
    ]
    fade_db, enhancement_db = _weather(place)
    names = {one.name: key for key, one in place.store.multiplexes().items()}
    return weigh(same, Situation(place.assumptions, place.look, place.neighbour, enhancement_db, fade_db, names))


def what_can_be_read(place: Place, turned: Mapping[str, Turned], known: Knowledge | None) -> list[Readable]:
    """Return the levels that a person could read at the roof as it is now.

    Through what is up, at the outlet that decides; with nothing up, through a measuring aerial held where the new one
    is going to stand.
    """
    if not place.heard.air.fields or len(turned) + (place.request.now == NOTHING) < 2:
        return []
    air, roof = place.heard.air, place.request.roof
    value = place.assumptions.value
    if place.request.now == NOTHING:
        planes: tuple[AerialPolarisation, ...] = ("horizontal", "vertical")
        looks = [vantage(measuring_chain(), 0.0, plane, "", air, roof, place.assumptions, known) for plane in planes]
        upright = np.array([one == "vertical" for one in air.signals.polarisation])
        levels = np.where(upright, looks[1].level_draws(), looks[0].level_draws())
        through, points = MEASURING_AERIAL, looks[0].read_at
    else:
        one = turned[str(place.default_chain())]
        looked = vantage(one.chain, one.pointing_deg, one.polarisation, "", air, roof, place.assumptions, known)
        levels = looked.level_draws()
        through, points = one.chain.name, looked.read_at
    meter = INSTRUMENTS["meter"]
    fade_db, enhancement_db = _weather(place)
    readables = []
    for e, here in enumerate(air.fields):
        weather = (fade_db[here.emission.id] + enhancement_db[here.emission.id]) / 2 / QUANTILE_99
        parts = (meter.calibration_sd_db, meter.repeat_sd_db, value("position_sd_db"), weather)
        if float((levels[:, e] >= LEAST_READABLE_DBUV).mean()) >= 0.05:
            spread_db = float(np.linalg.norm(parts))
            readables.append(
                Readable(
                    here.emission.id,
                    here.bearing_deg,
                    levels[:, e],
                    spread_db,
                    LEAST_READABLE_DBUV,
                    through,
                    points[e],
                )
            )
    return readables


def _weather(place: Place) -> tuple[dict[str, float], dict[str, float]]:
    """Fade to 99 % and enhancement of 1 % of time by emission [dB], whatever availability is asked for."""
    fields: Sequence[EmissionField] = place.heard.fields
    if place.request.availability_percent != 99:
        fields = place.fields_on(place.request.roof, 99)
    return (
        {one.emission.id: one.fade_db for one in fields},
        {one.emission.id: one.enhancement_db for one in fields},
    )
