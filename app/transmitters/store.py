"""What is on the air, and the user's roofs and chains, in one SQLite file of the data folder."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from pathlib import Path
from typing import Any

import numpy as np

from app.errors import NotStoredError, RequestError, StoreError
from app.transmitters import documents, readings
from app.transmitters.database import Database
from app.transmitters.documents import Document
from app.transmitters.model import Emission, Multiplex, Transmitter
from app.transmitters.rows import EMISSION, EMISSION_COLUMNS, TRANSMITTER, Source, emission_of, write_source
from terrain.geodesy import distance_and_bearing

DEMO_SOURCE = "demo"  # left out as soon as there is any other source

Found = tuple[Emission, Transmitter, float, float]

_KM_PER_DEGREE = 110.5  # shortest degree of latitude on WGS 84 is 110.57 km, at the equator
_SHOWN = f"(t.source != '{DEMO_SOURCE}' OR NOT EXISTS (SELECT 1 FROM source WHERE id != '{DEMO_SOURCE}'))"


@dataclass(frozen=True, slots=True)
class Replaced:
    """What an import changed: ids of emissions."""

    added: tuple[str, ...]
    changed: tuple[str, ...]
    gone: tuple[str, ...]


class Store:
    """Transmitters, multiplexes, emissions and sources; roofs and chains as JSON documents.

    Every call opens its own connection, so one Store may serve many threads.
    Every method may raise StoreError.
    """

    def __init__(self, database: Database) -> None:
        """Use Store.open."""
        self._database = database

    @classmethod
    def open(cls, data_dir: Path, wait_s: float = 5.0) -> Store:
        """Open the store of a data folder; wait_s seconds of patience with another writer."""
        return cls(Database.open(Path(data_dir), wait_s))

    @property
    def path(self) -> Path:
        """The database file."""
        return self._database.path

    @property
    def read_only(self) -> bool:
        """Whether the folder cannot be written."""
        return self._database.read_only

    # What is on the air

    def emissions_within(
        self, latitude_deg: float, longitude_deg: float, reach_km: float, day: date | None = None
    ) -> list[Found]:
        """Emissions on the air on a day (default today) within a distance, nearest first.

        Each with its transmitter, the WGS 84 distance [km] and the true bearing at the given place [deg].
        """
        today = (day or date.today()).isoformat()
        on_air = "(e.valid_from IS NULL OR e.valid_from <= ?) AND (e.valid_to IS NULL OR e.valid_to >= ?)"
        return self._within(latitude_deg, longitude_deg, reach_km, on_air, [today, today])

    def off_air_within(
        self, latitude_deg: float, longitude_deg: float, reach_km: float, day: date | None = None
    ) -> list[Found]:
        """Emissions that closed before a day (default today) or open after it, as `emissions_within` gives them."""
        today = (day or date.today()).isoformat()
        return self._within(
            latitude_deg, longitude_deg, reach_km, "(e.valid_from > ? OR e.valid_to < ?)", [today, today]
        )

    def _within(
        self, latitude_deg: float, longitude_deg: float, reach_km: float, when: str, values: Sequence[str]
    ) -> list[Found]:
        boxes = _boxes(latitude_deg, longitude_deg, reach_km)
        inside = " OR ".join(["(north >= ? AND south <= ? AND east >= ? AND west <= ?)"] * len(boxes))
        with self._database.transaction() as connection:
            rows = connection.execute(
                f"SELECT {EMISSION}, {TRANSMITTER} FROM transmitter t "
                "JOIN emission e ON e.transmitter = t.number "
                f"WHERE t.number IN (SELECT number FROM transmitter_box WHERE {inside}) "
                f"AND {_SHOWN} AND e.is_on AND {when}",
                [*(edge for box in boxes for edge in box), *values],
            ).fetchall()
        if not rows:
            return []
        transmitters = {row[EMISSION_COLUMNS]: Transmitter(*row[EMISSION_COLUMNS:]) for row in rows}
        masts = list(transmitters.values())
        distance_km, bearing_deg = distance_and_bearing(
            latitude_deg,
            longitude_deg,
            np.array([mast.latitude_deg for mast in masts]),
            np.array([mast.longitude_deg for mast in masts]),
        )
        away = {mast.id: (float(d), float(b)) for mast, d, b in zip(masts, distance_km, bearing_deg, strict=True)}
        found = [
            (emission_of(row[:EMISSION_COLUMNS]), transmitters[row[EMISSION_COLUMNS]], *away[row[EMISSION_COLUMNS]])
            for row in rows
        ]
        return sorted(
            (f for f in found if f[2] <= reach_km), key=lambda f: (f[2], f[1].id, f[0].frequency_mhz, f[0].id)
        )

    def nearest_transmitter(self, latitude_deg: float, longitude_deg: float) -> tuple[Transmitter, float] | None:
        """Return the nearest mast that is on the air today and its distance [km]; None in an empty store."""
        for reach_km in (300, 1500, 21_000):
            found = self.emissions_within(latitude_deg, longitude_deg, reach_km)
            if found:
                return found[0][1], found[0][2]
        return None

    def transmitters(self) -> list[Transmitter]:
        """Every transmitter in use, by id."""
        with self._database.transaction() as connection:
            found = connection.execute(f"SELECT {TRANSMITTER} FROM transmitter t WHERE {_SHOWN} ORDER BY t.id")
            return [Transmitter(*row) for row in found]

    def emissions(self) -> list[Emission]:
        """Every emission in use, on the air or not, by id."""
        with self._database.transaction() as connection:
            rows = connection.execute(
                f"SELECT {EMISSION} FROM emission e JOIN transmitter t ON t.number = e.transmitter "
                f"WHERE {_SHOWN} ORDER BY e.id"
            )
            return [emission_of(row) for row in rows]

    def switch_emission(self, emission_id: str, on: bool) -> Emission:
        """Keep an emission on the air or leave it out; NotStoredError if there is none.

        A new import of its source says anew what is on.
        """
        with self._database.transaction(write=True) as connection:
            connection.execute("UPDATE emission SET is_on = ? WHERE id = ?", [int(on), emission_id])
            row = connection.execute(
                f"SELECT {EMISSION} FROM emission e JOIN transmitter t ON t.number = e.transmitter WHERE e.id = ?",
                [emission_id],
            ).fetchone()
        if row is None:
            raise NotStoredError(
                f'there is no emission "{emission_id}": /api/emissions lists them', field="id", allowed="a listed id"
            )
        return emission_of(row)

    def multiplexes(self) -> dict[str, Multiplex]:
        """Every multiplex in use, by id."""
        with self._database.transaction() as connection:
            rows = connection.execute(f"SELECT id, name FROM multiplex t WHERE {_SHOWN} ORDER BY id, source DESC")
            return {row[0]: Multiplex(*row) for row in rows}

    def sources(self) -> list[Source]:
        """Every source, the demo among them even where it is left out."""
        with self._database.transaction() as connection:
            rows = connection.execute(
                "SELECT id, name, licence, attribution, rows_refused, rows_kept, imported_at FROM source ORDER BY id"
            )
            return [Source(*row) for row in rows]

    def replace_source(
        self,
        source: Source,
        transmitters: Iterable[Transmitter],
        emissions: Iterable[Emission],
        multiplexes: Iterable[Multiplex],
        *,
        dry_run: bool = False,
    ) -> Replaced:
        """Put a source's rows in place of those it had, all or nothing; a dry run only tells the changes.

        Raises
        ------
        StoreError
            An id is used twice or belongs to another source, or an emission names an unknown
            transmitter or multiplex.
        """
        emissions = list(emissions)
        new = {emission.id: emission for emission in emissions}
        with self._database.transaction(write=True) as connection:
            before = {
                row[0]: emission_of(row)
                for row in connection.execute(
                    f"SELECT {EMISSION} FROM emission e JOIN transmitter t ON t.number = e.transmitter "
                    "WHERE e.source = ?",
                    [source.id],
                )
            }
            connection.execute("SAVEPOINT before")
            try:
                write_source(connection, source, transmitters, emissions, multiplexes)
            except sqlite3.IntegrityError as error:
                raise StoreError(
                    f'source "{source.id}" was not stored ({error}): every id once and in no other source, '
                    "each emission with a transmitter and a multiplex of the same source; nothing was changed"
                ) from error
            if dry_run:
                connection.execute("ROLLBACK TO before")
        return Replaced(
            added=tuple(sorted(new.keys() - before.keys())),
            changed=tuple(sorted(key for key in new.keys() & before.keys() if new[key] != before[key])),
            gone=tuple(sorted(before.keys() - new.keys())),
        )

    def delete_source(self, source: str) -> int:
        """Take a source out with all that belongs to it; return how many emissions went.

        Raises
        ------
        NotStoredError
            There is no such source.
        """
        with self._database.transaction(write=True) as connection:
            known = [row[0] for row in connection.execute("SELECT id FROM source ORDER BY id")]
            if source not in known:
                raise NotStoredError(
                    f'there is no source "{source}": stored are {", ".join(known) or "none"}', field="source"
                )
            (count,) = connection.execute("SELECT count(*) FROM emission WHERE source = ?", [source]).fetchone()
            connection.execute("DELETE FROM source WHERE id = ?", [source])
            return int(count)

    # Roofs and chains: {"id", "name", "created", "updated", …}

    def list_roofs(self) -> list[Document]:
        """Every stored roof, oldest first."""
        with self._database.transaction() as connection:
            return documents.listed(connection, "roof")

    def get_roof(self, roof_id: str) -> Document:
        """One roof by id; NotStoredError if there is none."""
        with self._database.transaction() as connection:
            return documents.one(connection, "roof", roof_id)

    def put_roof(self, document: Mapping[str, Any]) -> Document:
        """Store a roof under its "id", or as a new one without; return it as stored."""
        with self._database.transaction(write=True) as connection:
            return documents.put(connection, "roof", document)

    def delete_roof(self, roof_id: str) -> None:
        """Remove one roof; NotStoredError if there is none."""
        with self._database.transaction(write=True) as connection:
            documents.remove(connection, "roof", roof_id)

    def list_chains(self) -> list[Document]:
        """Every stored chain, oldest first."""
        with self._database.transaction() as connection:
            return documents.listed(connection, "chain")

    def get_chain(self, chain: str) -> Document:
        """One chain by id or by name; NotStoredError if there is none."""
        with self._database.transaction() as connection:
            return documents.one(connection, "chain", chain)

    def put_chain(self, document: Mapping[str, Any]) -> Document:
        """Store a chain under its "id", or as a new one without; its name may be taken only once."""
        with self._database.transaction(write=True) as connection:
            return documents.put(connection, "chain", document)

    def delete_chain(self, chain: str) -> None:
        """Remove one chain by id or by name; NotStoredError if there is none."""
        with self._database.transaction(write=True) as connection:
            documents.remove(connection, "chain", chain)

    # Readings: {"id", "latitude_deg", "longitude_deg", "reading", "created", "updated"}

    def list_readings(self) -> list[Document]:
        """Every stored reading, oldest first."""
        with self._database.transaction() as connection:
            return readings.listed(connection)

    def readings_near(self, latitude_deg: float, longitude_deg: float) -> list[Document]:
        """Readings of one roof: those within 30 m of a position, oldest first."""
        with self._database.transaction() as connection:
            return readings.near(connection, latitude_deg, longitude_deg)

    def get_reading(self, reading_id: str) -> Document:
        """One reading by id; NotStoredError if there is none."""
        with self._database.transaction() as connection:
            return readings.one(connection, reading_id)

    def put_reading(self, document: Mapping[str, Any]) -> Document:
        """Store a reading with its position under its "id", or as a new one without; return it as stored."""
        with self._database.transaction(write=True) as connection:
            return readings.put(connection, document)

    def delete_reading(self, reading_id: str) -> None:
        """Remove one reading; NotStoredError if there is none."""
        with self._database.transaction(write=True) as connection:
            readings.remove(connection, reading_id)

    # Parts and whole files

    def list_parts(self) -> list[Document]:
        """Every stored part with its price, oldest first."""
        with self._database.transaction() as connection:
            return documents.listed(connection, "part")

    def get_part(self, part: str) -> Document:
        """One part by id; NotStoredError if there is none."""
        with self._database.transaction() as connection:
            return documents.one(connection, "part", part)

    def put_part(self, document: Mapping[str, Any]) -> Document:
        """Store a part under its "id"; return it as stored."""
        with self._database.transaction(write=True) as connection:
            return documents.put(connection, "part", document)

    def delete_part(self, part: str) -> None:
        """Remove one part; NotStoredError if there is none."""
        with self._database.transaction(write=True) as connection:
            documents.remove(connection, "part", part)

    def put_chains_and_parts(self, chains: Sequence[Mapping[str, Any]], parts: Sequence[Mapping[str, Any]]) -> None:
        """Store many at once: all of them, or none if one cannot be stored."""
        with self._database.transaction(write=True) as connection:
            for chain in chains:
                documents.put(connection, "chain", chain)
            for part in parts:
                documents.put(connection, "part", part)


def _boxes(latitude_deg: float, longitude_deg: float, reach_km: float) -> list[tuple[float, float, float, float]]:
    """South, north, west and east of one or two boxes round all that is in reach, a little too large."""
    if not (-90 <= latitude_deg <= 90 and -180 <= longitude_deg <= 180 and reach_km >= 0):
        raise RequestError(
            f"position {latitude_deg}, {longitude_deg} with a reach of {reach_km} km: "
            "use latitudes -90 to 90, longitudes -180 to 180 degrees and a reach of 0 km or more"
        )
    radius_deg = reach_km / _KM_PER_DEGREE * 1.01 + 1e-4  # 1 % for the ellipsoid against the sphere below
    south, north = latitude_deg - radius_deg, latitude_deg + radius_deg
    if south <= -90 or north >= 90:
        return [(south, north, -180.0, 180.0)]
    # Widest longitude of a small circle on the sphere: sin = sin(radius) / cos(latitude).
    ratio = np.sin(np.radians(radius_deg)) / np.cos(np.radians(latitude_deg))
    half_deg = float(np.degrees(np.arcsin(min(1.0, ratio)))) * 1.01 if radius_deg < 90 else 180.0
    west, east = longitude_deg - half_deg, longitude_deg + half_deg
    if east - west >= 360:
        return [(south, north, -180.0, 180.0)]
    boxes = [(south, north, max(west, -180.0), min(east, 180.0))]
    if west < -180:
        boxes.append((south, north, west + 360, 180.0))
    if east > 180:
        boxes.append((south, north, -180.0, east - 360))
    return boxes
