"""What is known of a roof: one reading each, checked, with the uncertainty its instrument deserves.

Kinds: "level" dB(µV) across 75 ohms, "cn" dB, "mer" dB (saturates at its instrument's limit), "seen" (perfect,
breaks up, not found), "count" (today I get 3), "order" (of strength or quality within one list of a set; the figures
themselves mean nothing), "neighbour" (an aerial nearby, which says little). Scan lists become "seen" and "order"
readings in app/scan_list.py.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, fields
from datetime import date
from typing import Any, Literal, get_args

from app.errors import ReadingError

Kind = Literal["level", "cn", "mer", "seen", "count", "order", "neighbour"]
State = Literal["perfect", "breaks up", "not found"]
Size = Literal["small", "medium", "large"]
KINDS: tuple[Kind, ...] = get_args(Kind)
STATES: tuple[State, ...] = get_args(State)
SIZES: tuple[Size, ...] = get_args(Size)

AT_THE_AERIAL = "aerial"  # the point before the first part behind it


@dataclass(frozen=True, slots=True)
class Instrument:
    """What an instrument can be trusted with."""

    calibration_sd_db: float  # in common to all its readings
    repeat_sd_db: float  # anew with each reading
    mer_limit_db: float  # MER of a perfect signal


# Common practice, no source: classes of the trade's data sheets, from memory.
INSTRUMENTS: Mapping[str, Instrument] = {
    "meter": Instrument(1.5, 0.7, 36.0),  # an installer's, calibrated
    "analyser": Instrument(0.8, 0.4, 42.0),
    "stick": Instrument(3.0, 1.5, 30.0),  # a tuner on a computer
    "set": Instrument(4.0, 2.0, 30.0),  # figures of a television set's own menu
}
# What can be meant by each figure; outside it is a slip of the pen, the unit or the key.
RANGES: Mapping[str, tuple[float, float, str]] = {
    "level": (-20.0, 130.0, "dB(µV) across 75 ohms; dBm + 108.8 and dBmV + 60 give dB(µV)"),
    "cn": (-20.0, 60.0, "dB"),
    "mer": (0.0, 60.0, "dB"),
}
LEAST_SD_DB, LARGEST_SD_DB = 0.1, 20.0


@dataclass(frozen=True, slots=True)
class Reading:
    """One thing known of a roof. What is None takes a default when it is used."""

    kind: Kind
    emission: str | None = None  # id, or the channel where one emission in reach has it
    multiplex: str | None = None  # id or name; any of its emissions
    value_db: float | None = None
    state: State | None = None
    count: int | None = None  # multiplexes that are received
    stronger: tuple[str, ...] = ()  # order: emissions or multiplexes, strongest first
    day: date | None = None
    chain: str | None = None  # name; default what is up now, else the first
    pointing_deg: float | None = None
    polarisation: Literal["horizontal", "vertical"] | None = None
    aerial_agl_m: float | None = None
    point: str | None = None  # an outlet's name, "aerial", or None: the outlet that decides
    instrument: str = "meter"
    sd_db: float | None = None  # stated spread in place of the instrument's
    limit_db: float | None = None  # MER of a perfect signal on this instrument
    size: Size | None = None  # neighbour's aerial
    works: bool | None = None  # neighbour's reception
    confirmed: bool = False  # looked at again: counts however surprising
    id: str = ""
    note: str = ""

    def __post_init__(self) -> None:
        """Refuse what cannot have been read."""
        _word("kind", self.kind, KINDS)
        _word("instrument", self.instrument, tuple(INSTRUMENTS))
        if self.polarisation is not None:
            _word("polarisation", self.polarisation, ("horizontal", "vertical"))
        _number("sd_db", self.sd_db, LEAST_SD_DB, LARGEST_SD_DB, "dB")
        _number("limit_db", self.limit_db, 15, 60, "dB")
        _number("pointing_deg", self.pointing_deg, 0, 360, "degrees from true north")
        _number("aerial_agl_m", self.aerial_agl_m, 1, 200, "m above the ground")
        if self.kind in RANGES:
            lowest, highest, unit = RANGES[self.kind]
            if self.value_db is None:
                raise ReadingError(f"{self._what} has no value_db: give it in {unit}", field="value_db", allowed=unit)
            _number("value_db", self.value_db, lowest, highest, unit)
        if self.kind == "seen":
            if self.state is None:
                raise ReadingError(
                    f"{self._what} has no state: use {', '.join(STATES)}", field="state", allowed=", ".join(STATES)
                )
            _word("state", self.state, STATES)
        if self.kind == "count":
            if self.count is None:
                raise ReadingError(
                    "the count is missing: say in `count` how many multiplexes are received", field="count"
                )
            _number("count", self.count, 0, 1000, "multiplexes")
        elif self.kind == "order":
            if len(self.stronger) < 2:
                raise ReadingError(
                    "an order needs at least two channels: list them in `stronger`, strongest first", field="stronger"
                )
        elif self.kind == "neighbour":
            if self.pointing_deg is None or self.works is None:
                raise ReadingError(
                    "a neighbour's aerial needs pointing_deg (where it points) and works (true or false)",
                    field="pointing_deg" if self.pointing_deg is None else "works",
                )
            _word("size", self.size or "medium", SIZES)
        elif not (self.emission or self.multiplex):
            raise ReadingError(
                f"{self._what} does not say of what: name an emission (id or channel) or a multiplex", field="emission"
            )

    @property
    def _what(self) -> str:
        return f"the reading of {self.emission or self.multiplex or self.kind}"

    @property
    def of(self) -> str:
        """What it is a reading of, as it was said."""
        return self.emission or self.multiplex or ", ".join(self.stronger) or "neighbour's aerial"

    def spread_db(self) -> tuple[float, float]:
        """Standard deviations: in common to all readings of the instrument, and anew with each reading."""
        if self.sd_db is not None:
            return 0.0, self.sd_db
        instrument = INSTRUMENTS[self.instrument]
        return instrument.calibration_sd_db, instrument.repeat_sd_db

    def mer_limit_db(self) -> float:
        """MER that this instrument shows of a perfect signal."""
        return INSTRUMENTS[self.instrument].mer_limit_db if self.limit_db is None else self.limit_db


READING_KEYS = tuple(one.name for one in fields(Reading))
UNCONFIRMED = ("confirmed", False)
_TEXT = ("kind", "emission", "multiplex", "state", "chain", "polarisation", "point", "instrument", "size", "id", "note")
_NUMBERS = ("value_db", "pointing_deg", "aerial_agl_m", "sd_db", "limit_db")


def reading_from_document(document: Mapping[str, Any]) -> Reading:
    """Return the reading of a JSON object; ReadingError names the field and what is allowed."""
    unknown = sorted(set(document) - set(READING_KEYS))
    if unknown:
        raise ReadingError(
            f'"{unknown[0]}" is not known of a reading: use {", ".join(READING_KEYS)}',
            field=unknown[0],
            allowed=", ".join(READING_KEYS),
        )
    if document.get("kind") is None:
        raise ReadingError(f"the reading has no kind: use {', '.join(KINDS)}", field="kind", allowed=", ".join(KINDS))
    values: dict[str, Any] = {key: value for key, value in document.items() if value is not None}
    for key, value in values.items():
        if key in _TEXT and not (isinstance(value, str) and len(value) <= 4000 and value.isprintable()):
            raise ReadingError(f"{key} is {value!r:.60}: write it as text", field=key, allowed="text")
        if key in _NUMBERS and (isinstance(value, bool) or not isinstance(value, int | float)):
            raise ReadingError(f"{key} is {value!r:.60}: write a number", field=key, allowed="a number")
        if key == "count" and (isinstance(value, bool) or not isinstance(value, int)):
            raise ReadingError(f"count is {value!r:.60}: write a whole number", field=key, allowed="a whole number")
        if key in ("works", "confirmed") and not isinstance(value, bool):
            raise ReadingError(f"{key} is {value!r:.60}: use true or false", field=key, allowed="true or false")
    if "stronger" in values:
        names = values["stronger"]
        if not isinstance(names, Sequence) or isinstance(names, str) or not all(isinstance(n, str) for n in names):
            raise ReadingError("stronger is no list of names: list channels, strongest first", field="stronger")
        values["stronger"] = tuple(names)
    if "day" in values and not isinstance(values["day"], date):
        try:
            values["day"] = date.fromisoformat(values["day"])
        except (TypeError, ValueError):
            raise ReadingError(
                f"day is {values['day']!r:.60}: write it as 2026-10-31", field="day", allowed="a date, year first"
            ) from None
    return Reading(**values)


def reading_to_document(reading: Reading) -> dict[str, Any]:
    """Return a reading as a JSON object, without what was not said."""
    document = {key: getattr(reading, key) for key in READING_KEYS}
    document["day"] = reading.day.isoformat() if reading.day else None
    document["stronger"] = list(reading.stronger)
    return {
        key: value for key, value in document.items() if value not in (None, "", []) and (key, value) != UNCONFIRMED
    }


def _word(name: str, value: str, allowed: Sequence[str]) -> None:
    if value not in allowed:
        words = ", ".join(allowed)
        raise ReadingError(f'{name} "{value:.60}" is not known: use {words}', field=name, allowed=words)


def _number(name: str, value: float | None, lowest: float, highest: float, unit: str) -> None:
    if value is not None and not (math.isfinite(value) and lowest <= value <= highest):
        raise ReadingError(
            f"{name} {value:g} is not possible: use {lowest:g} to {highest:g} {unit}",
            field=name,
            allowed=f"{lowest:g} to {highest:g}",
        )
