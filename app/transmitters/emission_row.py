"""One row of the template as an emission and its mast."""

from __future__ import annotations

from dataclasses import dataclass
from typing import cast

from app.channels import OFFSET_MHZ, centre_mhz, channel_of
from app.errors import ModeError
from app.network import symbol_of
from app.systems import mode_of
from app.transmitters.cells import Cells
from app.transmitters.model import Emission, Polarisation

LOWEST_MHZ, HIGHEST_MHZ = 45.0, 1000.0  # broadcasting bands I to V with their neighbours
MOST_ERP_KW = 5000.0
LOWEST_ANTENNA_M, HIGHEST_ANTENNA_M = 1.0, 700.0
LOWEST_GROUND_M, HIGHEST_GROUND_M = -450.0, 6000.0
MOST_DELAY_US = 5000.0  # longer than any symbol
PATTERN_STEPS, DEEPEST_PATTERN_DB = 36, 60.0

_POLARISATIONS = {
    "horizontal": "horizontal", "h": "horizontal",
    "vertical": "vertical", "v": "vertical",
    "mixed": "mixed", "m": "mixed",
}  # fmt: skip
_ON = {"yes": "yes", "no": "no", "": "yes"}


@dataclass(frozen=True, slots=True)
class Draft:
    """A row with a usable position; emission is None where the rest of it has faults."""

    line: int
    latitude_deg: float
    longitude_deg: float
    transmitter: str = ""
    ground_amsl_m: float | None = None
    multiplex: str = ""
    emission: Emission | None = None  # without its ids yet


def draft_of(cells: Cells) -> Draft | None:
    """Read a row; None if it has no usable position. Faults are noted in cells."""
    position = _position(cells)
    transmitter, multiplex = cells.name("transmitter"), cells.name("multiplex")
    ground_amsl_m = None
    if cells.text("ground_amsl_m"):
        ground_amsl_m = cells.number("ground_amsl_m", LOWEST_GROUND_M, HIGHEST_GROUND_M, "m", example="120")
    tuned = _tuned(cells)
    mode = _mode(cells, tuned)
    power = _erp(cells)
    polarisation = cells.word("polarisation", _POLARISATIONS)
    antenna_agl_m = cells.number(
        "antenna_agl_m", LOWEST_ANTENNA_M, HIGHEST_ANTENNA_M, "m above the ground", example="150"
    )
    pattern = _pattern(cells)
    valid_from = cells.day("valid_from") if cells.text("valid_from") else None
    valid_to = cells.day("valid_to") if cells.text("valid_to") else None
    if valid_from and valid_to and valid_to < valid_from:
        cells.refuse("valid_to", f"use a day not before valid_from, {valid_from}")
    is_on = cells.word("on", _ON)
    guard = _guard(cells, mode, tuned)
    delay_us = None
    if cells.text("static_delay_us"):
        delay_us = cells.number("static_delay_us", -MOST_DELAY_US, MOST_DELAY_US, "µs", example="12.5")
    if position is None:
        return None
    if (
        cells.refused or tuned is None or mode is None or power is None or antenna_agl_m is None
        or pattern is None or transmitter is None or multiplex is None
    ):  # fmt: skip
        return Draft(cells.row.line, *position)
    emission = Emission(
        id="",
        transmitter_id="",
        multiplex_id="",
        channel=tuned.channel,
        frequency_mhz=tuned.frequency_mhz,
        bandwidth_mhz=tuned.bandwidth_mhz,
        system=mode[0],
        mode=mode[1],
        erp_kw=power[0],
        polarisation=cast(Polarisation, polarisation),
        antenna_agl_m=antenna_agl_m,
        pattern_attenuation_db=pattern[0],
        valid_from=valid_from,
        valid_to=valid_to,
        flags=(*tuned.flags, *power[1], *pattern[1]),
        on=is_on == "yes",
        guard=guard,
        static_delay_us=delay_us,
    )
    return Draft(cells.row.line, *position, transmitter, ground_amsl_m, multiplex, emission)


@dataclass(frozen=True, slots=True)
class _Tuned:
    channel: str
    frequency_mhz: float
    bandwidth_mhz: float
    flags: tuple[str, ...]


def _position(cells: Cells) -> tuple[float, float] | None:
    swapped = ""
    lat, lon = (cells.parsed(cells.text(column)) for column in ("latitude_deg", "longitude_deg"))
    if lat is not None and lon is not None and 90 < abs(lat) <= 180 and abs(lon) <= 90:
        swapped = "; latitude and longitude swapped?"
    latitude = cells.number("latitude_deg", -90, 90, "degrees", example="44.412", hint=swapped)
    longitude = cells.number("longitude_deg", -180, 180, "degrees", example="-36.905")
    if latitude is None or longitude is None:
        return None
    if latitude == 0 and longitude == 0:
        cells.refuse("latitude_deg", "position 0, 0 stands for a missing one: write the mast's own")
        return None
    return latitude, longitude


def _tuned(cells: Cells) -> _Tuned | None:
    """Channel, centre and width of a row, from its channel, its frequency or both."""
    faults = len(cells.refused)
    channel, raster = cells.text("channel"), cells.text("raster")
    frequency = _frequency(cells) if cells.text("frequency_mhz") else None
    width = None
    if cells.text("bandwidth_mhz"):
        width = cells.number("bandwidth_mhz", 6, 8, "MHz", example="8")
    if len(cells.refused) > faults:
        return None
    if channel and not raster:
        cells.refuse("raster", f'channel "{channel}" needs the name of its raster, such as europe-uhf-8')
        return None
    if not channel and frequency is None:
        cells.refuse("channel", "write a channel with its raster, or a frequency_mhz with its bandwidth_mhz")
        return None
    flags: tuple[str, ...] = ()
    if raster:
        try:
            channel = channel or channel_of(raster, cast(float, frequency))
            centre, raster_width = centre_mhz(raster, channel)
        except ModeError as error:
            column = error.field if error.field in ("raster", "channel", "frequency_mhz") else "channel"
            cells.note(column, error.message)
            return None
        if width is not None and width != raster_width:
            cells.refuse("bandwidth_mhz", f"channels of {raster} have {raster_width:g} MHz: correct or empty it")
            return None
        width = raster_width
        if frequency is None:
            frequency, flags = centre, ("frequency-from-channel",)
        elif abs(frequency - centre) > OFFSET_MHZ:
            cells.refuse(
                "frequency_mhz",
                f"channel {channel} of {raster} is at {centre:g} MHz: correct one of them or leave one empty",
            )
            return None
    if width is None:
        cells.refuse("bandwidth_mhz", "write the width of the channel, 6, 7 or 8 MHz, or its raster")
        return None
    return _Tuned(channel, cast(float, frequency), width, flags)


def _frequency(cells: Cells) -> float | None:
    value = cells.parsed(cells.text("frequency_mhz"))
    hint = ""
    for unit, divisor in (("kHz", 1e3), ("Hz", 1e6)):
        if value is not None and LOWEST_MHZ <= value / divisor <= HIGHEST_MHZ:
            hint = f"; is it in {unit}? {cells.text('frequency_mhz')} {unit} is {value / divisor:g} MHz"
    return cells.number("frequency_mhz", LOWEST_MHZ, HIGHEST_MHZ, "MHz", example="682", hint=hint)


def _mode(cells: Cells, tuned: _Tuned | None) -> tuple[str, str] | None:
    """System and mode as the tables write them."""
    try:
        mode = mode_of(cells.text("system"), cells.text("mode"))
        if tuned is not None:
            mode.noise_bandwidth_mhz(tuned.bandwidth_mhz)
    except ModeError as error:
        cells.note(error.field or "mode", error.message)
        return None
    return mode.system, mode.name


def _guard(cells: Cells, mode: tuple[str, str] | None, tuned: _Tuned | None) -> str:
    """Guard interval as the tables of multi-carrier systems write it; empty where it is not stated."""
    text = " ".join(cells.text("guard").upper().split())
    if text and mode is not None and tuned is not None:
        try:
            if symbol_of(mode[0], tuned.bandwidth_mhz, text) is None:
                cells.refuse("guard", f"{mode[0]} is no multi-carrier system: leave it empty")
        except ModeError as error:
            cells.note("guard", error.message)
    return text


def _erp(cells: Cells) -> tuple[float, tuple[str, ...]] | None:
    """Return the maximum ERP; "<=10" is a limit, so the real power stays unknown and is flagged."""
    text = cells.text("erp_kw")
    limit = text.removeprefix("<=").removeprefix("≤").strip()
    value = cells.parsed(limit)
    if value is None:
        cells.refuse("erp_kw", "write a number such as 100, or <=100 where only the limit is known")
        return None
    if not 0 < value <= MOST_ERP_KW:
        is_watt = f"; is it in W? {limit} W is {value / 1e3:g} kW" if value > MOST_ERP_KW else ""
        cells.refuse("erp_kw", f"use more than 0, up to {MOST_ERP_KW:g} kW{is_watt}")
        return None
    return value, ("erp-unknown",) if limit != text else ()


def _pattern(cells: Cells) -> tuple[tuple[float, ...], tuple[str, ...]] | None:
    text = cells.text("pattern_db")
    match text.casefold():
        case "round":
            return (), ()
        case "unknown":
            return (), ("pattern-unknown",)
        case "":
            return (), ("pattern-assumed-round",)
    values = [cells.parsed(part) for part in text.split()]
    if len(values) != PATTERN_STEPS or any(v is None or not 0 <= v <= DEEPEST_PATTERN_DB for v in values):
        cells.refuse(
            "pattern_db",
            f"write {PATTERN_STEPS} attenuations from 0 to {DEEPEST_PATTERN_DB:g} dB separated by spaces, "
            f'one every 10° from north clockwise ({len(values)} came), or "round" or "unknown"',
        )
        return None
    known = tuple(v for v in values if v is not None)
    return known, ("pattern-above-maximum",) if min(known) > 0.5 else ()
