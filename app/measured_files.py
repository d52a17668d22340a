"""Measured files as they are uploaded: what a sweep says of an aerial's match, and a pattern for an aerial."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from app.chain.match import Measurement
from app.chain.pattern_files import pattern_from_bytes
from app.chain.touchstone import Touchstone, touchstone_from_bytes
from app.chain_file import pattern_document
from app.match_query import channels_of_emissions, channels_of_raster, match_document
from app.transmitters.store import Store


@dataclass(frozen=True, slots=True)
class Upload:
    """A file as it came: its name and its bytes."""

    name: str
    content: bytes

    def sweep(self) -> Touchstone:
        """Return what a Touchstone file holds; ChainError if it is none."""
        return touchstone_from_bytes(self.name, self.content)


def uploaded_match(
    sweep: Upload,
    calibrated: str,
    pad: str,
    own_pad: Upload | None,
    standard_ohm: float | None,
    emissions: Sequence[str],
    raster: str,
    channels: Sequence[str],
    store: Store,
) -> dict[str, Any]:
    """Match over the channels of stored emissions and of a raster's named channels, as `match_document` says it."""
    measured = Measurement(
        sweep.sweep(),
        calibrated,  # type: ignore[arg-type]  # measured_match checks the words
        pad,  # type: ignore[arg-type]
        None if own_pad is None else own_pad.sweep(),
        standard_ohm,
    )
    wanted = [*channels_of_emissions(store, emissions), *channels_of_raster(raster, channels)]
    return match_document(measured, wanted)


def uploaded_pattern(file: Upload) -> dict[str, Any]:
    """Pattern as the keys of an aerial, and what each cut says in figures.

    Raises
    ------
    ChainError
        The file, its line where there is one, what came and what to do.
    """
    pattern = pattern_from_bytes(file.name, file.content)
    return {
        "file": file.name,
        "aerial": pattern_document(pattern),
        "cuts": [
            {
                "frequency_mhz": cut.frequency_mhz,
                "polarisation": cut.polarisation,
                "emission": cut.emission,
                "points": len(cut.angle_deg),
                "beamwidth_deg": None if cut.is_cross else cut.beamwidth_deg,
                "back_db": None if cut.is_cross else cut.back_db,
            }
            for cut in pattern.cuts
        ],
    }
