"""What is stored, as rows for the command line and the API."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from app.transmitters.store import Store
from terrain.cover import Cover
from terrain.mosaic import Ground


def emission_rows(store: Store) -> list[dict[str, Any]]:
    """One row per emission, with its mast."""
    masts = {one.id: one for one in store.transmitters()}
    names = store.multiplexes()
    return [
        {
            "transmitter": masts[one.transmitter_id].name,
            "multiplex": names[one.multiplex_id].name if one.multiplex_id in names else one.multiplex_id,
            "channel": one.channel,
            "frequency_mhz": one.frequency_mhz,
            "system": one.system,
            "mode": one.mode,
            "erp_kw": one.erp_kw,
            "polarisation": one.polarisation,
            "antenna_agl_m": one.antenna_agl_m,
            "latitude_deg": masts[one.transmitter_id].latitude_deg,
            "longitude_deg": masts[one.transmitter_id].longitude_deg,
            "valid_to": one.valid_to.isoformat() if one.valid_to else "",
            "source": masts[one.transmitter_id].source,
            "id": one.id,
        }
        for one in store.emissions()
    ]


def raster_rows(ground: Ground) -> list[dict[str, Any]]:
    """One row per raster, in use or refused."""
    used = [
        {
            "file": one.name,
            "state": "in use",
            "kind": one.kind,
            "spacing_m": round(one.spacing_m, 1),
            "note": "" if one.unit in ("", "m", "metre", "meter", "metres", "meters") else f"heights in {one.unit}",
        }
        for one in ground.rasters
    ]
    refused = [
        {"file": one.path.name, "state": "refused", "kind": "", "spacing_m": "", "note": one.message}
        for one in ground.refused
    ]
    return [*used, *refused]


def cover_rows(cover: Cover | None) -> list[dict[str, Any]]:
    """One row per land-cover map, in use or refused."""
    if cover is None:
        return []
    used = [
        {
            "file": one.name,
            "state": "in use",
            "classes": one.classes,
            "spacing_m": round(one.grid.spacing_m, 1),
            "note": "",
        }
        for one in cover.rasters
    ]
    refused = [
        {"file": one.path.name, "state": "refused", "classes": "", "spacing_m": "", "note": one.message}
        for one in cover.refused
    ]
    return [*used, *refused]


def chain_rows(store: Store) -> list[dict[str, Any]]:
    """One row per stored chain."""
    from app.stored_chains import stored_chain

    rows = []
    for document in store.list_chains():
        chain = stored_chain(store, str(document["id"]))
        rows.append(
            {
                "name": chain.name,
                "title": chain.title,
                "price": chain.price,
                "currency": chain.currency,
                "outlets": ", ".join(chain.outlet_names),
                "parts": " > ".join(part.name for part in chain.parts),
            }
        )
    return rows


def table(rows: Sequence[Mapping[str, Any]], empty: str) -> str:
    """Rows as columns of text; `empty` says what to do where there are none."""
    if not rows:
        return empty
    keys = list(rows[0])
    cells = [keys, *([_text(row[key]) for key in keys] for row in rows)]
    widths = [max(len(row[column]) for row in cells) for column in range(len(keys))]
    return "\n".join(
        "  ".join(cell.ljust(width) for cell, width in zip(row, widths, strict=True)).rstrip() for row in cells
    )


def _text(value: Any) -> str:
    return "" if value is None else f"{value:g}" if isinstance(value, float) else str(value)
