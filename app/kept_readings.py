"""Readings as people send and keep them: single ones, scan lists, and the list of all."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from datetime import date
from typing import Any

from app.errors import ReadingError
from app.readings import Reading, reading_from_document, reading_to_document
from app.roof import check
from app.scan_list import ANY, OnAir, ScanList, read_scan_list
from app.transmitters.store import Store
from app.vantage import MEASURING_AERIAL

REACH_KM = 150.0
SCAN_LIST = "scan list"
SCAN_KEYS = ("kind", "text", "complete", "chain", "day", "pointing_deg", "polarisation", "point", "note")


def on_air_at(store: Store, latitude_deg: float, longitude_deg: float, reach_km: float = REACH_KM) -> list[OnAir]:
    """Return what a scan list taken at a roof may name, nearest first."""
    names = store.multiplexes()
    return [
        OnAir(
            one.id,
            one.multiplex_id,
            names[one.multiplex_id].name if one.multiplex_id in names else one.multiplex_id,
            one.channel,
            one.frequency_mhz,
        )
        for one, _, _, _ in store.emissions_within(latitude_deg, longitude_deg, reach_km, date.today())
    ]


def readings_of_documents(
    documents: list[Mapping[str, Any]], store: Store, latitude_deg: float, longitude_deg: float
) -> tuple[list[Reading], list[ScanList]]:
    """Return the readings of JSON objects, scan lists taken apart; ReadingError names which one is wrong."""
    readings: list[Reading] = []
    lists: list[ScanList] = []
    for number, document in enumerate(documents):
        try:
            if document.get("kind") == SCAN_LIST:
                lists.append(_scan_list(document, store, latitude_deg, longitude_deg))
                readings.extend(lists[-1].readings)
            else:
                readings.append(reading_from_document(document))
        except ReadingError as error:
            error.field = f"readings.{number}" + (f".{error.field}" if error.field else "")
            raise
    return readings, lists


def keep(store: Store, latitude_deg: float, longitude_deg: float, document: Mapping[str, Any]) -> dict[str, Any]:
    """Store a reading or a whole scan list; return what was stored and what of a list was not understood."""
    check("latitude_deg", latitude_deg, -90, 90, "degrees north")
    check("longitude_deg", longitude_deg, -180, 180, "degrees east")
    readings, lists = readings_of_documents([document], store, latitude_deg, longitude_deg)
    stored = [
        store.put_reading(
            {"latitude_deg": latitude_deg, "longitude_deg": longitude_deg, "reading": _body(one), "id": one.id}
        )
        for one in readings
    ]
    return {
        "readings": stored,
        "scan_list": scan_document(lists[0]) if lists else None,
        "notes": _notes(readings, store, latitude_deg, longitude_deg),
    }


def _notes(readings: Sequence[Reading], store: Store, latitude_deg: float, longitude_deg: float) -> list[str]:
    """Say which readings no answer will use as things are: of what is not on the air, or through an unknown chain."""
    known = {
        name
        for one in on_air_at(store, latitude_deg, longitude_deg)
        for name in (one.emission, one.multiplex, one.name, one.channel)
        if name
    }
    chains = {str(one["name"]) for one in store.list_chains()}
    notes = []
    for one in readings:
        named = [name for name in (one.emission, one.multiplex) if name]
        if named and not any(name in known for name in named):
            notes.append(
                f'"{named[0]:.60}" is no channel or multiplex on the air within {REACH_KM:g} km: kept, and not used '
                "before it is; `gainworth transmitters list` shows what is stored"
            )
        if one.chain and one.chain not in (*chains, MEASURING_AERIAL):
            stored = ", ".join(sorted(chains)) or "none"
            notes.append(
                f'no chain "{one.chain:.60}" is stored: kept, and used by answers that bring it; stored: {stored}'
            )
    return list(dict.fromkeys(notes))


def scan_document(scan: ScanList) -> dict[str, Any]:
    """Return what was recognised in a pasted list, and the rest."""
    return {
        "recognised": [
            {
                "line": one.line,
                "text": one.text,
                "of": one.of,
                "state": one.state,
                "strength_percent": one.strength_percent,
                "quality_percent": one.quality_percent,
            }
            for one in scan.recognised
        ],
        "not_recognised": [{"line": line, "text": text} for line, text in scan.rest],
    }


def told_kept(document: Mapping[str, Any]) -> str:
    """Return what was kept in lines; of a scan list also what was not understood."""
    count = len(document["readings"])
    lines = [f"{count} reading{'' if count == 1 else 's'} kept: {', '.join(one['id'] for one in document['readings'])}"]
    scan = document["scan_list"]
    if scan:
        lines += [f"line {one['line']}: {one['of']} {one['state']}" for one in scan["recognised"]]
        lines += [f"line {one['line']} not recognised: {one['text']}" for one in scan["not_recognised"]]
    return "\n".join([*lines, *document["notes"]])


def reading_rows(store: Store) -> list[dict[str, Any]]:
    """One row per stored reading, for the command line."""
    rows = []
    for document in store.list_readings():
        one = reading_from_document(document["reading"])
        rows.append(
            {
                "id": document["id"],
                "latitude_deg": document["latitude_deg"],
                "longitude_deg": document["longitude_deg"],
                "day": one.day.isoformat() if one.day else "",
                "kind": one.kind,
                "of": one.of,
                "value": one.value_db if one.value_db is not None else one.state or one.works,
                "chain": one.chain or "",
                "point": one.point or "",
                "confirmed": one.confirmed,
            }
        )
    return rows


def _body(reading: Reading) -> dict[str, Any]:
    return {key: value for key, value in reading_to_document(reading).items() if key != "id"}


def _scan_list(document: Mapping[str, Any], store: Store, latitude_deg: float, longitude_deg: float) -> ScanList:
    unknown = sorted(set(document) - set(SCAN_KEYS))
    if unknown:
        raise ReadingError(
            f'"{unknown[0]}" is not known of a scan list: use {", ".join(SCAN_KEYS)}',
            field=unknown[0],
            allowed=", ".join(SCAN_KEYS),
        )
    text = document.get("text")
    if not isinstance(text, str):
        raise ReadingError("the scan list has no text: paste what the set shows", field="text", allowed="text")
    common = {
        key: document[key] for key in ("chain", "day", "pointing_deg", "polarisation", "point") if key in document
    }
    # One reading in the usual way checks what all of them share.
    shared = reading_from_document({"kind": "seen", "emission": "any", "state": "perfect", **common})
    common = {
        key: document[key] for key in ("chain", "day", "pointing_deg", "polarisation", "point") if key in document
    }
    shared = reading_from_document({**reading_to_document(ANY), **common})
    on_air = on_air_at(store, latitude_deg, longitude_deg)
    return read_scan_list(text, on_air, bool(document.get("complete", False)), shared)
