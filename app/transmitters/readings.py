"""Readings in the store: a JSON object each, with the place where it was taken."""

from __future__ import annotations

import json
import sqlite3
import uuid
from collections.abc import Mapping
from datetime import UTC, datetime
from typing import Any

import numpy as np

from app.errors import NotStoredError, RequestError
from app.transmitters.documents import damaged, read_body
from terrain.geodesy import distance_and_bearing

Document = dict[str, Any]

SAME_ROOF_KM = 0.03
_BOX_DEG = 0.0004  # of latitude: 44 m
_SELECT = "SELECT id, latitude_deg, longitude_deg, body, created, updated FROM reading"


def listed(connection: sqlite3.Connection) -> list[Document]:
    """Every reading, oldest first."""
    return [_document(row) for row in connection.execute(f"{_SELECT} ORDER BY number")]


def near(connection: sqlite3.Connection, latitude_deg: float, longitude_deg: float) -> list[Document]:
    """Readings within 30 m of a position, oldest first."""
    wide = _BOX_DEG / max(np.cos(np.radians(latitude_deg)), 0.01)
    rows = connection.execute(
        f"{_SELECT} WHERE latitude_deg BETWEEN ? AND ? AND longitude_deg BETWEEN ? AND ? ORDER BY number",
        [latitude_deg - _BOX_DEG, latitude_deg + _BOX_DEG, longitude_deg - wide, longitude_deg + wide],
    ).fetchall()
    if not rows:
        return []
    away_km, _ = distance_and_bearing(
        latitude_deg, longitude_deg, np.array([row[1] for row in rows]), np.array([row[2] for row in rows])
    )
    return [_document(row) for row, km in zip(rows, away_km, strict=True) if km <= SAME_ROOF_KM]


def one(connection: sqlite3.Connection, key: str) -> Document:
    """One reading by id; NotStoredError tells how many there are."""
    row = connection.execute(f"{_SELECT} WHERE id = ?", [key]).fetchone()
    if row is None:
        count = connection.execute("SELECT count(*) FROM reading").fetchone()[0]
        raise NotStoredError(
            f'there is no reading "{key}": {count} are stored, `gainworth readings list` shows them', field="reading"
        )
    return _document(row)


def put(connection: sqlite3.Connection, document: Mapping[str, Any]) -> Document:
    """Store a reading {"latitude_deg", "longitude_deg", "reading", "id" or none}, checked by who calls."""
    key = str(document.get("id") or uuid.uuid4().hex[:12])
    try:
        text = json.dumps(document["reading"], allow_nan=False, ensure_ascii=False)
        (text + key).encode()  # half a surrogate pair has no UTF-8
    except (TypeError, ValueError) as error:
        raise RequestError(f"the reading cannot be stored ({error}): use JSON with finite numbers") from error
    now = datetime.now(UTC).isoformat(timespec="seconds")
    connection.execute(
        "INSERT INTO reading (id, latitude_deg, longitude_deg, body, created, updated) VALUES (?, ?, ?, ?, ?, ?) "
        "ON CONFLICT (id) DO UPDATE SET latitude_deg = excluded.latitude_deg, "
        "longitude_deg = excluded.longitude_deg, body = excluded.body, updated = excluded.updated",
        [key, document["latitude_deg"], document["longitude_deg"], text, now, now],
    )
    return one(connection, key)


def remove(connection: sqlite3.Connection, key: str) -> None:
    """Remove one reading; NotStoredError if there is none."""
    one(connection, key)
    connection.execute("DELETE FROM reading WHERE id = ?", [key])


def _document(row: tuple[Any, ...]) -> Document:
    key, latitude_deg, longitude_deg, body, created, updated = row
    what = f'reading "{key}"'
    held = read_body(body, what, key)
    places = isinstance(latitude_deg, float) and isinstance(longitude_deg, float)
    if not isinstance(held, dict) or not places or not all(isinstance(one, str) for one in (key, created, updated)):
        raise damaged(what, key)
    return {
        "id": key,
        "latitude_deg": latitude_deg,
        "longitude_deg": longitude_deg,
        "reading": held,
        "created": created,
        "updated": updated,
    }
