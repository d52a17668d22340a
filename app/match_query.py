"""What a sweep of an aerial's terminals says, channel by channel."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict
from typing import Any

from app.chain.match import (
    MATCH_IS_NOT_GAIN,
    Measurement,
    match_over_channels,
    measured_match,
)
from app.channels import centre_mhz
from app.errors import RequestError
from app.lists import table
from app.transmitters.store import Store

Channel = tuple[str, float, float]  # name, centre and bandwidth [MHz]


def match_document(measured: Measurement, channels: Sequence[Channel]) -> dict[str, Any]:
    """Match of a measured aerial at 75 ohms over the wanted channels, with what a chain keeps of it.

    Raises
    ------
    ChainError
        A calibration or pad that cannot be, or that does not fit the sweep: named with the mend.
    """
    match = measured_match(measured)
    return {
        "file": match.name,
        "caution": MATCH_IS_NOT_GAIN,
        "from_mhz": round(float(match.frequency_mhz[0]), 6),
        "to_mhz": round(float(match.frequency_mhz[-1]), 6),
        "points": len(match.frequency_mhz),
        "pad_loss_db": round(float(match.pad_loss_db.mean()), 3),
        "channels": [asdict(one) for one in match_over_channels(match, channels)],
        "reflection": [[round(f, 6), round(magnitude, 6)] for f, magnitude in match.pairs],
    }


def channels_of_raster(raster: str, names: Sequence[str]) -> list[Channel]:
    """Channels by name; ModeError if the raster has none of that name."""
    return [(name, *centre_mhz(raster, name)) for name in names]


def channels_of_emissions(store: Store, ids: Sequence[str]) -> list[Channel]:
    """Channels that emissions of the store are on, each once, by frequency.

    Raises
    ------
    RequestError
        An id that the store does not hold.
    """
    known = {one.id: one for one in store.emissions()}
    for ident in ids:
        if ident not in known:
            raise RequestError(f'emission "{ident}" is not stored: take ids from /api/emissions', field="emissions")
    wanted = {(known[one].frequency_mhz, known[one].bandwidth_mhz): known[one].channel for one in ids}
    return [(name or f"{f:g} MHz", f, bandwidth) for (f, bandwidth), name in sorted(wanted.items())]


def told_match(document: dict[str, Any]) -> str:
    """Return the same as text."""
    rows = [
        {
            "channel": one["channel"],
            "VSWR": _rounded(one["vswr"]),
            "return loss dB": _rounded(one["return_loss_db"]),
            "between": None
            if one["return_loss_db"] is None
            else f"{one['return_loss_low_db']:.1f} and {one['return_loss_high_db']:.1f}",
            "floor dB": _rounded(one["floor_db"]),
            "mismatch dB": _rounded(one["mismatch_loss_db"]),
            "note": one["refused"],
        }
        for one in document["channels"]
    ]
    return f"{table(rows, 'name channels with --channel')}\n\n{document['caution']}"


def _rounded(value: float | None) -> float | None:
    return None if value is None else round(value, 3)
