"""Positions as people write them: decimal degrees, degrees and minutes, projected coordinates, Plus Codes."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from openlocationcode import openlocationcode
from pyproj import CRS, Transformer
from pyproj.exceptions import CRSError, ProjError

from app.errors import RequestError
from terrain.land_mask import is_land

EXAMPLES = "44.5,-37.2 or 44°30'0\"N 37°12'0\"W or 89P4GR22+22 or EPSG:32624 643096 4928985 or 24N 643096 4928985"

_NUMBER = r"[-+−]?\d+(?:[.,]\d+)?"
_PROJECTED = re.compile(rf"EPSG:?\s*(\d{{4,6}})\s*[:;,]?\s+({_NUMBER})\s*[;,\s]\s*({_NUMBER})$", re.IGNORECASE)
_UTM = re.compile(
    rf"(?:UTM\s*)?(\d{{1,2}})\s?([C-HJ-NP-X])\s+({_NUMBER})\s*(?:m\s?E)?\s*[;,\s]\s*({_NUMBER})\s*(?:m\s?N)?$",
    re.IGNORECASE,
)
_PLUS_CODE = re.compile(r"[023456789CFGHJMPQRVWX]{2,8}\+[23456789CFGHJMPQRVWX]{0,7}", re.IGNORECASE)
# Signs of degrees, minutes and seconds, and what keyboards offer in their place.
_SIGNS = {
    "°": "d",
    "º": "d",
    "˚": "d",
    "′": "m",
    "'": "m",
    "’": "m",
    "‘": "m",
    "´": "m",
    "`": "m",
    "″": "s",
    '"': "s",
    "”": "s",
    "“": "s",
}
_WORDS = {
    "NORTH": "N", "SOUTH": "S", "EAST": "E", "WEST": "W", "NORD": "N", "SÜD": "S", "SUD": "S", "OST": "E",
    "OUEST": "W", "EST": "E", "OESTE": "W", "NORTE": "N", "SUR": "S", "ESTE": "E", "SUL": "S", "LESTE": "E",
}  # fmt: skip
_AXIS = {"N": ("lat", 1), "S": ("lat", -1), "E": ("lon", 1), "O": ("lon", 1), "W": ("lon", -1)}


@dataclass(frozen=True, slots=True)
class Position:
    """A place on WGS 84, and how it was read."""

    latitude_deg: float
    longitude_deg: float
    form: str  # "decimal", "degrees and minutes", "EPSG:n", "UTM 33N", "Plus Code"
    question: str | None = None  # to be asked before it is used: latitude and longitude may be swapped

    @property
    def swapped(self) -> Position:
        """The same with latitude and longitude exchanged."""
        return Position(self.longitude_deg, self.latitude_deg, self.form)


def parse_position(text: str) -> Position:
    """Read one position.

    Latitude comes first unless letters say otherwise. With a latitude beyond 90, or at sea where the exchanged
    place is on land, the position bears a question.

    Raises
    ------
    RequestError
        It cannot be read, or is no place on Earth: says what came and how to write it.
    """
    written = " ".join(text.replace("\u00a0", " ").split())
    if found := _PROJECTED.match(written):
        return _projected(written, int(found[1]), _number(found[2]), _number(found[3]), f"EPSG:{found[1]}")
    if _PLUS_CODE.fullmatch(written.split(" ")[0]) and "+" in written:
        return _plus_code(written)
    if found := _UTM.match(written):
        zone, north = int(found[1]), found[2].upper() >= "N"
        if not 1 <= zone <= 60:
            raise _unreadable(written, "UTM zones go from 1 to 60")
        code = (32600 if north else 32700) + zone
        return _projected(written, code, _number(found[3]), _number(found[4]), f"UTM {zone}{'N' if north else 'S'}")
    return _geographic(written)


def _geographic(written: str) -> Position:
    first, second, lettered = _two_angles(written)
    (axis_1, value_1, minutes_1), (axis_2, value_2, minutes_2) = first, second
    if lettered and axis_1 == axis_2:
        raise _unreadable(written, "both parts say the same direction")
    lat, lon = (value_2, value_1) if axis_1 == "lon" else (value_1, value_2)
    form = "degrees and minutes" if minutes_1 or minutes_2 else "decimal"
    if not lettered and abs(lat) > 90 and abs(lat) <= 180 and abs(lon) <= 90:
        question = f"latitude {lat:g} is beyond 90 degrees: is it {lon:g},{lat:g}, latitude first?"
        raise RequestError(question, field="position", allowed=f"{lon:g},{lat:g}")
    if not (abs(lat) <= 90 and abs(lon) <= 180):
        raise _unreadable(written, "latitudes go from -90 to 90 and longitudes from -180 to 180")
    return Position(lat, lon, form, None if lettered else _suspicion(lat, lon))


def _suspicion(lat: float, lon: float) -> str | None:
    """A question where the place lies at sea and the exchanged one on land."""
    if abs(lon) > 90 or bool(is_land(lat, lon)) or not bool(is_land(lon, lat)):
        return None
    return f"{lat:g},{lon:g} lies at sea, {lon:g},{lat:g} on land: are latitude and longitude swapped?"


Angle = tuple[str | None, float, bool]  # "lat", "lon" or not said; degrees; whether minutes were given


def _two_angles(written: str) -> tuple[Angle, Angle, bool]:
    text = written.upper()
    for word, letter in _WORDS.items():
        text = re.sub(rf"\b{word}\b", letter, text)
    for sign, letter in _SIGNS.items():
        text = text.replace(sign, letter)
    text = text.replace("mm", "s").replace("−", "-").replace("–", "-")
    text = re.sub(r"\b(LAT|LON|LONG|LATITUDE|LONGITUDE)\b\s*[:=]?", " ", text)
    letters = re.findall(r"[NSEWO]", text)
    if letters:
        if len(letters) != 2:
            raise _unreadable(written, "write one of N, S, E, W with each part")
        after = bool(re.match(r"[^NSEWO]*\d[^NSEWO]*[NSEWO]", text))
        pattern = r"([^NSEWO]*)([NSEWO])" if after else r"([NSEWO])([^NSEWO]*)"
        parts = [(one[1], one[0]) if after else one for one in re.findall(pattern, text)]
        angles = [_angle(written, body, letter) for letter, body in parts]
        return angles[0], angles[1], True
    halves = _halves(written, text)
    return _angle(written, halves[0], None), _angle(written, halves[1], None), False


def _halves(written: str, text: str) -> tuple[str, str]:
    """The parts for latitude and longitude where no letters tell them apart."""
    # A comma between digits is a decimal one only if there are two of them and something else parts the numbers.
    decimal_commas = re.fullmatch(r"\s*[-+]?\d+,\d+\s*[;,\s]\s*[-+]?\d+,\d+\s*", text)
    for mark in (";", "/") if decimal_commas else (";", "/", ","):
        if text.count(mark) == 1:
            left, right = text.split(mark)
            return left, right
    if decimal_commas:
        found = re.findall(r"[-+]?\d+,\d+", text)
        return found[0], found[1]
    words = text.split()
    if len(words) % 2 == 0 and 2 <= len(words) <= 6:
        middle = len(words) // 2
        return " ".join(words[:middle]), " ".join(words[middle:])
    raise _unreadable(written, "two parts are needed")


def _angle(written: str, body: str, letter: str | None) -> Angle:
    body = re.sub(r"^[\s,;/]+|[\s,;/]+$", "", body)
    body = re.sub(r"(?<=\d),(?=\d)", ".", body)
    parts = re.findall(r"\d+(?:\.\d+)?", body)
    rest = re.sub(r"\d+(?:\.\d+)?", "", body).replace(" ", "").replace(":", "")
    sign = -1.0 if rest.startswith("-") else 1.0
    rest = rest.lstrip("+-")
    if not 1 <= len(parts) <= 3 or rest not in ("", "d", "dm", "dms", "m", "ms"):
        raise _unreadable(written, "a part is not a number of degrees")
    numbers = [float(part) for part in parts]
    if any(value >= 60 for value in numbers[1:]):
        raise _unreadable(written, "minutes and seconds stay below 60")
    if any(value != int(value) for value in numbers[:-1]):
        raise _unreadable(written, "only the last of degrees, minutes and seconds has decimals")
    if letter is not None and sign < 0:
        raise _unreadable(written, "write either a sign or a letter, not both")
    degrees = sum(value / 60**power for power, value in enumerate(numbers))
    axis, turn = _AXIS[letter] if letter else (None, 1)
    return axis, sign * turn * degrees, len(numbers) > 1


def _projected(written: str, code: int, x: float, y: float, form: str) -> Position:
    """Easting first, whatever order the register gives the axes in."""
    try:
        crs = CRS.from_epsg(code)
        transformer = Transformer.from_crs(crs, CRS.from_epsg(4326), always_xy=True)
        lon, lat = transformer.transform(x, y)
    except (CRSError, ProjError) as error:
        raise _unreadable(written, f"EPSG:{code} is not known as a coordinate system of places") from error
    area = crs.area_of_use
    if not (math.isfinite(lat) and math.isfinite(lon)) or (area and not _within(area.bounds, lat, lon)):
        name = f"EPSG:{code} ({crs.name})"
        raise _unreadable(written, f"the place lies outside {name}; write the easting first, then the northing")
    return Position(float(lat), float(lon), form)


def _within(bounds: tuple[float, float, float, float], lat: float, lon: float) -> bool:
    """Whether a place lies in an area of use, or within 3 degrees of it, where neighbours still use the system."""
    west, south, east, north = bounds
    east += 360.0 * (east < west)
    return south - 3 <= lat <= north + 3 and (lon - west + 3) % 360 <= east - west + 6


def _plus_code(written: str) -> Position:
    code = written.split(" ")[0].upper()
    if not openlocationcode.isValid(code):
        raise _unreadable(written, "it is no Plus Code")
    if not openlocationcode.isFull(code):
        raise _unreadable(
            written, "a short Plus Code needs its place: write the full code, with eight signs before the +"
        )
    area = openlocationcode.decode(code)
    return Position(area.latitudeCenter, area.longitudeCenter, "Plus Code")


def _number(text: str) -> float:
    return float(text.replace(",", ".").replace("−", "-"))


def _unreadable(written: str, why: str) -> RequestError:
    return RequestError(
        f'position "{written[:80]}" cannot be read: {why}. Write it as {EXAMPLES}', field="position", allowed=EXAMPLES
    )
