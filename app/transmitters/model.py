"""Transmitter, emission and multiplex: what is on the air."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from typing import Literal

from app.errors import RequestError

Polarisation = Literal["horizontal", "vertical", "mixed"]
POLARISATIONS: tuple[Polarisation, ...] = ("horizontal", "vertical", "mixed")


@dataclass(frozen=True, slots=True)
class Multiplex:
    """A network's content: what people want to watch."""

    id: str
    name: str


@dataclass(frozen=True, slots=True)
class Transmitter:
    """A mast with its position."""

    id: str
    name: str
    latitude_deg: float
    longitude_deg: float
    ground_amsl_m: float | None  # None: taken from the rasters
    source: str  # which import it came from

    def __post_init__(self) -> None:
        """Refuse a mast that is not on Earth."""
        if not (-90 <= self.latitude_deg <= 90 and -180 <= self.longitude_deg <= 180):
            raise RequestError(
                f"transmitter {self.id} at {self.latitude_deg}, {self.longitude_deg}: "
                "use latitudes -90 to 90 and longitudes -180 to 180 degrees"
            )


@dataclass(frozen=True, slots=True)
class Emission:
    """One radio channel from one transmitter."""

    id: str
    transmitter_id: str
    multiplex_id: str
    channel: str  # as the raster names it, "47"; empty if only a frequency is known
    frequency_mhz: float  # centre
    bandwidth_mhz: float  # of the channel: 6, 7 or 8
    system: str  # a key of app.systems
    mode: str  # a mode of that system
    erp_kw: float  # maximum, half-wave dipole reference
    polarisation: Polarisation
    antenna_agl_m: float
    pattern_attenuation_db: tuple[float, ...] = ()  # evenly spaced from north, clockwise; empty: round
    valid_from: date | None = None
    valid_to: date | None = None
    flags: tuple[str, ...] = ()  # what was assumed on import, e.g. "erp-unknown", "pattern-unknown"
    on: bool = True  # off: kept but left out
    guard: str = ""  # carriers and guard interval of a multi-carrier mode, "8K 1/4"; empty: not stated
    static_delay_us: float | None = None  # against the other members of its network; None: not stated

    def attenuation_db(self, bearing_deg: float) -> float:
        """Attenuation below the maximum towards a bearing, linear in dB between the stated directions."""
        steps = len(self.pattern_attenuation_db)
        if steps == 0:
            return 0.0
        place = (bearing_deg % 360) / 360 * steps
        low = int(place) % steps
        share = place - int(place)
        a, b = self.pattern_attenuation_db[low], self.pattern_attenuation_db[(low + 1) % steps]
        return a + (b - a) * share

    def valid_on(self, day: date) -> bool:
        """Whether it is on the air on a day."""
        return (self.valid_from is None or self.valid_from <= day) and (self.valid_to is None or day <= self.valid_to)
