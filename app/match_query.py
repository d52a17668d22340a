"""What a sweep of an aerial's terminals says, channel by channel."""

from __future__ import annotations

from dataclasses import asdict
from pathlib import Path
from typing import Any

from app.chain.match import (
    MATCH_IS_NOT_GAIN,
    Measurement,
    match_over_channels,
    measured_match,
)
from app.chain.touchstone import read_touchstone
from app.channels import centre_mhz
from app.lists import table


def match_document(
    file: Path,
    calibrated: str,
    pad: str = "none",
    own_pad: Path | None = None,
    standard_ohm: float | None = None,
    raster: str = "europe-uhf-8",
    channels: tuple[str, ...] = (),
) -> dict[str, Any]:
    """Match of a measured aerial at 75 ohms over the wanted channels, with what a chain keeps of it.

    Raises
    ------
    ChainError
        A file, calibration or pad that cannot be: named with the mend.
    ModeError
        An unknown raster or channel.
    """
    measured = Measurement(
        read_touchstone(file),
        calibrated,  # type: ignore[arg-type]  # measured_match checks the words
        pad,  # type: ignore[arg-type]
        None if own_pad is None else read_touchstone(own_pad),
        standard_ohm,
    )
    match = measured_match(measured)
    wanted = [(name, *centre_mhz(raster, name)) for name in channels]
    return {
        "file": file.name,
        "caution": MATCH_IS_NOT_GAIN,
        "channels": [asdict(one) for one in match_over_channels(match, wanted)],
        "reflection": [[round(f, 6), round(magnitude, 6)] for f, magnitude in match.pairs],
    }


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
