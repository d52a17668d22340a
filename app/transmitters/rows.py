"""Rows of the database and the dataclasses that they hold."""

from __future__ import annotations

import sqlite3
import struct
from collections.abc import Iterable
from dataclasses import dataclass
from datetime import UTC, date, datetime
from typing import Any, cast

from app.errors import StoreError
from app.transmitters.model import Emission, Multiplex, Polarisation, Transmitter

EMISSION = (
    "e.id, t.id, e.multiplex, e.channel, e.frequency_mhz, e.bandwidth_mhz, e.system, e.mode, e.erp_kw, "
    "e.polarisation, e.antenna_agl_m, e.pattern_cdb, e.valid_from, e.valid_to, e.flags, e.is_on, "
    "e.guard, e.static_delay_us"
)
EMISSION_COLUMNS = EMISSION.count(",") + 1
TRANSMITTER = "t.id, t.name, t.latitude_deg, t.longitude_deg, t.ground_amsl_m, t.source"


@dataclass(frozen=True, slots=True)
class Source:
    """Where a set of transmitters came from."""

    id: str
    name: str
    licence: str = ""
    attribution: str = ""
    rows_refused: int = 0
    rows_kept: int = 0  # set by the store
    imported_at: str = ""  # set by the store: UTC, ISO 8601


def write_source(
    connection: sqlite3.Connection,
    source: Source,
    transmitters: Iterable[Transmitter],
    emissions: Iterable[Emission],
    multiplexes: Iterable[Multiplex],
) -> None:
    """Write a source and all that belongs to it in place of what it had, inside a transaction."""
    connection.execute("DELETE FROM source WHERE id = ?", [source.id])  # its rows go with it
    emissions = list(emissions)
    now = datetime.now(UTC).isoformat(timespec="seconds")
    connection.execute(
        "INSERT INTO source (id, name, licence, attribution, imported_at, rows_kept, rows_refused) "
        "VALUES (?, ?, ?, ?, ?, ?, ?)",
        [
            source.id,
            source.name,
            source.licence,
            source.attribution,
            now,
            len(emissions),
            source.rows_refused,
        ],
    )
    connection.executemany(
        "INSERT INTO transmitter (id, source, name, latitude_deg, longitude_deg, ground_amsl_m) "
        "VALUES (?, ?, ?, ?, ?, ?)",
        ((t.id, source.id, t.name, t.latitude_deg, t.longitude_deg, t.ground_amsl_m) for t in transmitters),
    )
    connection.executemany(
        "INSERT INTO multiplex (source, id, name) VALUES (?, ?, ?)",
        ((source.id, m.id, m.name) for m in multiplexes),
    )
    connection.executemany(
        "INSERT INTO emission VALUES (?, ?, (SELECT number FROM transmitter WHERE id = ? AND source = ?), "
        "?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)",
        (_emission_row(sent, source.id) for sent in emissions),
    )


def _emission_row(emission: Emission, source_id: str) -> tuple[object, ...]:
    hundredths = [round(100 * value) for value in emission.pattern_attenuation_db]
    return (
        emission.id,
        source_id,
        emission.transmitter_id,
        source_id,
        emission.multiplex_id,
        emission.channel,
        emission.frequency_mhz,
        emission.bandwidth_mhz,
        emission.system,
        emission.mode,
        emission.erp_kw,
        emission.polarisation,
        emission.antenna_agl_m,
        struct.pack(f"<{len(hundredths)}H", *hundredths),
        emission.valid_from.isoformat() if emission.valid_from else None,
        emission.valid_to.isoformat() if emission.valid_to else None,
        " ".join(emission.flags),
        int(emission.on),
        emission.guard,
        emission.static_delay_us,
    )


def emission_of(row: tuple[Any, ...]) -> Emission:
    """Emission of a row with the columns of EMISSION; StoreError if another program damaged it."""
    (
        key, transmitter, multiplex, channel, frequency, bandwidth, system, mode, erp,
        polarisation, height, pattern, valid_from, valid_to, flags, is_on, guard, delay,
    ) = row  # fmt: skip
    try:
        return Emission(
            id=key,
            transmitter_id=transmitter,
            multiplex_id=multiplex,
            channel=channel,
            frequency_mhz=frequency,
            bandwidth_mhz=bandwidth,
            system=system,
            mode=mode,
            erp_kw=erp,
            polarisation=cast(Polarisation, polarisation),
            antenna_agl_m=height,
            pattern_attenuation_db=tuple(v / 100 for v in struct.unpack(f"<{len(pattern) // 2}H", pattern)),
            valid_from=date.fromisoformat(valid_from) if valid_from else None,
            valid_to=date.fromisoformat(valid_to) if valid_to else None,
            flags=tuple(flags.split()),
            on=bool(is_on),
            guard=guard,
            static_delay_us=delay,
        )
    except (ValueError, TypeError, AttributeError, struct.error) as error:
        raise StoreError(
            f'the stored emission "{key}" is damaged ({error}): import its file again, or restore a backup'
        ) from error
