"""Where open tiles come from: declarative entries, and the names of the tiles a circle needs."""

from __future__ import annotations

import math
import re
import tomllib
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any
from urllib.parse import urlsplit

from terrain.errors import SourceError
from terrain.raster import KINDS

_OWN = Path(__file__).parent / "data" / "sources.toml"
# So far around the middle of a circle that no tile of its bounding box is left out.
_DEGREE_KM = 111.0


@dataclass(frozen=True, slots=True)
class TileSource:
    """One set of open tiles; the fields are explained in data/sources.toml."""

    id: str
    title: str
    holds: str  # "elevation" or "cover"
    url: str
    naming: str
    tile_deg: int
    kind: str
    spacing_m: float
    samples: str
    datum: str
    typical_mb: float
    largest_mb: float
    licence: str
    attribution: str
    absent: tuple[int, ...] = (404,)
    instead: str | None = None

    def __post_init__(self) -> None:
        """Refuse an entry that cannot be followed."""
        if not re.match(r"https?://[^/{}]+/", self.url):
            self._refuse("url", self.url, "an address that begins with https:// or http:// and a fixed host")
        if self.naming not in NAMINGS:
            self._refuse("naming", self.naming, ", ".join(NAMINGS))
        if self.holds not in ("elevation", "cover"):
            self._refuse("holds", self.holds, "elevation or cover")
        if self.holds == "elevation" and self.kind not in KINDS:
            self._refuse("kind", self.kind, ", ".join(KINDS))
        if not (1 <= self.tile_deg <= 30 and 0 < self.typical_mb <= self.largest_mb <= 20_000):
            self._refuse(
                "tile_deg, typical_mb or largest_mb",
                f"{self.tile_deg}, {self.typical_mb:g}, {self.largest_mb:g}",
                "1 to 30 degrees, and sizes above 0 with the largest at most 20000 MB",
            )
        try:
            self.url.format(name="", band="", tile="")
        except (KeyError, IndexError, ValueError):
            self._refuse("url", self.url, "only {name}, {band} and {tile} in braces")

    def _refuse(self, what: str, came: object, allowed: str) -> None:
        raise SourceError(f'source "{self.id}": {what} is {came}: use {allowed}')

    @property
    def host(self) -> str:
        """Server that is asked."""
        return urlsplit(self.url).netloc

    def file_name(self, corner: Corner) -> str:
        """Name under which a tile is kept: the last part of its address."""
        return self.address(corner).rsplit("/", 1)[1]

    def address(self, corner: Corner) -> str:
        """Where a tile lies, by its south-west corner."""
        return self.url.format(name=NAMINGS[self.naming](corner), band=corner.tile[:3], tile=corner.tile)


@dataclass(frozen=True, slots=True, order=True)
class Corner:
    """South-west corner of a tile in whole degrees; longitude from -180 to below 180."""

    south: int
    west: int

    @property
    def tile(self) -> str:
        """The usual short name: N49E011."""
        return f"{self._ns}{abs(self.south):02d}{self._ew}{abs(self.west):03d}"

    @property
    def _ns(self) -> str:
        return "N" if self.south >= 0 else "S"

    @property
    def _ew(self) -> str:
        return "E" if self.west >= 0 else "W"


def _copernicus(number: int) -> Callable[[Corner], str]:
    def name(corner: Corner) -> str:
        tile = corner.tile
        return f"Copernicus_DSM_COG_{number}_{tile[:3]}_00_{tile[3:]}_00_DEM"

    return name


NAMINGS: dict[str, Callable[[Corner], str]] = {
    "copernicus-10": _copernicus(10),
    "copernicus-30": _copernicus(30),
    "south-west": lambda corner: corner.tile,
    "worldcover": lambda corner: f"ESA_WorldCover_10m_2021_v200_{corner.tile}_Map",
}


def tile_sources(own: Path | None = None) -> dict[str, TileSource]:
    """Return every known source by id; those in the user's file `own` go before ours.

    Raises SourceError for an entry that cannot be followed.
    """
    entries = _entries(_OWN)
    if own is not None and own.is_file():
        entries |= _entries(own)
    sources = {key: _source(key, entry) for key, entry in entries.items()}
    for one in sources.values():
        if one.instead is not None and one.instead not in sources:
            raise SourceError(f'source "{one.id}": instead is {one.instead}: use one of {", ".join(sources)}')
    return sources


def corners_of_circle(lat: float, lon: float, reach_km: float, tile_deg: int) -> list[Corner]:
    """South-west corners of the tiles that a circle on the Earth meets, from south-west to north-east.

    A circle over the 180th meridian or a pole is followed across. Latitudes and longitudes in degrees.
    """
    south = max(-90.0, lat - reach_km / _DEGREE_KM)
    north = min(90.0, lat + reach_km / _DEGREE_KM)
    rows = range(math.floor(south / tile_deg) * tile_deg, math.ceil(north / tile_deg) * tile_deg, tile_deg)
    return sorted({corner for row in rows for corner in _row_of_circle(lat, lon, reach_km, tile_deg, row)})


def _row_of_circle(lat: float, lon: float, reach_km: float, tile_deg: int, row: int) -> list[Corner]:
    """Corners of one row of tiles: as far east and west as the circle reaches at any latitude of the row."""
    wide_deg = 0.0
    for step in range(9):
        at = max(-90.0, min(90.0, row + tile_deg * step / 8))
        wide_deg = max(wide_deg, _half_width_deg(lat, at, reach_km))
    if not wide_deg:
        return []
    if wide_deg >= 180:
        return [Corner(row, west) for west in range(-180, 180, tile_deg)]
    first, last = (math.floor((lon + side) / tile_deg) * tile_deg for side in (-wide_deg, wide_deg))
    return [Corner(row, (west + 180) % 360 - 180) for west in range(first, last + 1, tile_deg)]


def _half_width_deg(lat: float, at: float, reach_km: float) -> float:
    """Longitudes either side of the middle that lie within reach at a latitude, on a slightly smaller sphere."""
    if abs(at) >= 89.999:
        return 180.0 if (90 - abs(lat)) * _DEGREE_KM <= reach_km and at * lat > 0 else 0.0
    reach = math.radians(reach_km / _DEGREE_KM)
    phi, theta = math.radians(lat), math.radians(at)
    cosine = (math.cos(reach) - math.sin(phi) * math.sin(theta)) / max(1e-12, math.cos(phi) * math.cos(theta))
    return 0.0 if cosine >= 1 else 180.0 if cosine <= -1 else math.degrees(math.acos(cosine))


def _entries(path: Path) -> dict[str, Any]:
    try:
        return tomllib.loads(path.read_text(encoding="utf-8"))
    except (OSError, UnicodeDecodeError, tomllib.TOMLDecodeError) as error:
        raise SourceError(f"{path} cannot be read ({error}): mend it or move it away") from error


def _source(key: str, entry: Any) -> TileSource:
    try:
        return TileSource(id=key, **(entry | {"absent": tuple(entry.get("absent", (404,)))}))
    except (TypeError, AttributeError, KeyError) as error:
        needed = ", ".join(TileSource.__dataclass_fields__)
        raise SourceError(f'source "{key}" lacks a field or has a strange one ({error}): use {needed}') from error
