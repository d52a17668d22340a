"""Patterns in the format of NSMA Recommendation WG16.99.050, Standard Format for Digitized Antenna Patterns.

A file is lines `FIELD:,value`, fields being six letters or digits, and after each POLARI the points of a cut as
`angle,level`; what follows a "!" is a comment. Read here: GUNITS (units of gain and of levels), LOWFRQ, HGHFRQ,
LWGAIN, MDGAIN, HGGAIN, PATTYP (ENVELOPE: corners of a line), PATFRE (frequency of the cuts that follow), PATCUT (H or
AZ: round the horizon, others are left aside), POLARI (aerial/emission) and ENDFIL. Angles run from -180 to 180 with 0
on the axis. Fields and their meaning from memory and from public tables of them; the Recommendation's text was not
read, above all not which way round its angles count: clockwise seen from above is taken, as for bearings.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, field

from app.chain.files import refuse
from app.chain.pattern import FIELD, Cut, MeasuredPattern, Polarisation, checked_cut, checked_pattern
from propagation.constants import HALF_WAVE_DIPOLE_GAIN_DBI

_FIELD = re.compile(r"\s*([A-Z][A-Z0-9]{5})\s*:\s*,?\s*(.*)$", re.IGNORECASE)
_POLARISATIONS: dict[str, tuple[Polarisation, Polarisation]] = {
    "H/H": ("horizontal", "horizontal"),
    "H/V": ("horizontal", "vertical"),
    "V/V": ("vertical", "vertical"),
    "V/H": ("vertical", "horizontal"),
}
_OVER_DIPOLE_DB = {"DBD": 0.0, "DBI": -HALF_WAVE_DIPOLE_GAIN_DBI}
_LEVELS = ("DBR", *_OVER_DIPOLE_DB)


@dataclass(slots=True)
class _Raw:
    """One cut as it stands in the file."""

    line: int
    plane: str
    polarisation: str = ""
    frequency_mhz: float | None = None
    angle_deg: list[float] = field(default_factory=list)
    level_db: list[float] = field(default_factory=list)


def pattern_from_nsma(name: str, text: str) -> MeasuredPattern:
    """Pattern and gain of a file in the NSMA format, from its text.

    Raises
    ------
    ChainError
        A line that is no field and no point, an unknown unit, a file without its end or without a cut round the
        horizon in linear polarisation.
    """
    fields, raw = _lines(name, text)
    gain_unit, level_unit = _units(name, fields)
    plane = "AZ" if any(cut.plane == "AZ" for cut in raw) else "H"  # the same for an aerial without tilt
    wanted = [cut for cut in raw if cut.plane == plane and cut.polarisation in _POLARISATIONS]
    if not wanted:
        listed = ", ".join(f"{cut.plane} {cut.polarisation}" for cut in raw) or "none"
        refuse(
            name,
            f"has no cut round the horizon in linear polarisation ({listed})",
            "use one with AZ or H, H/H or V/V",
            FIELD,
        )
    is_envelope = fields.get("PATTYP", "").upper().startswith("ENV")
    cuts = tuple(_cut(name, cut, wanted, level_unit, is_envelope) for cut in wanted)
    return checked_pattern(name, cuts, _gain(name, fields, gain_unit))


def _lines(name: str, text: str) -> tuple[dict[str, str], list[_Raw]]:
    """Fields before and between the cuts, and the cuts."""
    fields: dict[str, str] = {}
    cuts: list[_Raw] = []
    frequency_mhz: float | None = None
    for number, raw_line in enumerate(text.splitlines(), 1):
        line = raw_line.partition("!")[0].strip()
        if not line:
            continue
        found = _FIELD.match(line)
        if found is None:
            _point(name, number, line, cuts)
            continue
        key, value = found[1].upper(), found[2].strip().rstrip(",").strip()
        match key:
            case "ENDFIL":
                return fields, cuts
            case "PATFRE":
                frequency_mhz = _number(name, f"line {number}: {key}", value.split(",")[0])
            case "PATCUT":
                cuts.append(_Raw(number, value.upper(), frequency_mhz=frequency_mhz))
            case "POLARI" if cuts:
                cuts[-1].polarisation = (
                    re.sub(r"[^A-Z]", "/", value.upper()) if len(value) > 2 else "/".join(value.upper())
                )
            case _:
                fields[key] = value
    refuse(name, "ends without ENDFIL", "it was cut short: get the file again", FIELD)


def _point(name: str, number: int, line: str, cuts: list[_Raw]) -> None:
    cells = [cell for cell in re.split(r"[,\s]+", line) if cell]
    if not cuts or len(cells) not in (2, 3):
        refuse(name, f'line {number}: "{line[:60]}" is no field and no point', "use FIELD:,value or angle,level", FIELD)
    cuts[-1].angle_deg.append(_number(name, f"line {number}: the angle", cells[0]))
    cuts[-1].level_db.append(_number(name, f"line {number}: the level", cells[1]))


def _number(name: str, what: str, text: str) -> float:
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        refuse(name, f'{what} is "{text[:40]}"', "write a number", FIELD)
    return value


def _units(name: str, fields: dict[str, str]) -> tuple[str, str]:
    text = fields.get("GUNITS", "")
    gain, _, level = text.upper().replace(" ", "").partition("/")
    if gain not in _OVER_DIPOLE_DB or level not in _LEVELS:
        refuse(
            name,
            f'GUNITS is "{text}"',
            f"use {' or '.join(_OVER_DIPOLE_DB)} for the gain, then / and one of {', '.join(_LEVELS)} for the levels",
            FIELD,
        )
    return gain, level


def _cut(name: str, cut: _Raw, others: list[_Raw], level_unit: str, is_envelope: bool) -> Cut:
    aerial, emission = _POLARISATIONS[cut.polarisation]
    own = next(
        (
            other
            for other in others
            if other.frequency_mhz == cut.frequency_mhz
            and _POLARISATIONS[other.polarisation] == (aerial, aerial)
            and other.level_db
        ),
        None,
    )
    if own is None:
        refuse(name, f"line {cut.line}: a {cut.polarisation} cut without the aerial's own", "add H/H or V/V", FIELD)
    strongest = max(own.level_db)
    if level_unit == "DBR" and strongest > 0.5:
        refuse(name, f"has a level of {strongest:g} dBr", "levels relative to the strongest are 0 or less", FIELD)
    return checked_cut(
        name,
        cut.angle_deg,
        [strongest - level for level in cut.level_db],
        frequency_mhz=cut.frequency_mhz,
        polarisation=aerial,
        emission=None if emission == aerial else emission,
        is_envelope=is_envelope,
    )


def _gain(name: str, fields: dict[str, str], gain_unit: str) -> tuple[tuple[float, float], ...]:
    """Gain over a half-wave dipole at the low, middle and high frequency, as far as they are stated."""

    def stated(key: str) -> float | None:
        text = fields.get(key, "").split(",")[0].strip()
        return _number(name, key, text) if text else None

    low, high = stated("LOWFRQ"), stated("HGHFRQ")
    if low is None or high is None or not low < high:
        return ()
    found = []
    for frequency_mhz, key in ((low, "LWGAIN"), ((low + high) / 2, "MDGAIN"), (high, "HGGAIN")):
        gain = stated(key)
        if gain is not None:
            found.append((frequency_mhz, gain + _OVER_DIPOLE_DB[gain_unit]))
    return tuple(found)
