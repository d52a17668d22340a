"""Mobile networks beside the television band: their blocks, and those that assumptions put at a roof."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.errors import ModeError
from app.tables import rows

FloatArray = NDArray[np.float64]

MOBILE = "mobile"  # system of an emission of a mobile network: never wanted, it only disturbs
LEAST_FIELD_DBUV_M = 1.0  # below: no block there


@dataclass(frozen=True, slots=True)
class MobileBlocks:
    """Downlink blocks at a roof, one row each."""

    frequency_mhz: FloatArray  # (b,) centre
    field_dbuv_m: FloatArray  # (b,) of the whole block


def mobile_blocks(assumptions: Assumptions) -> MobileBlocks:
    """Blocks whose field was given by the assumptions `mobile_…_dbuv_m`; usually none."""
    blocks = _assumed_blocks()
    field = np.array([assumptions.value(name) for name, _ in blocks])
    there = field >= LEAST_FIELD_DBUV_M
    return MobileBlocks(np.array([centre_mhz for _, centre_mhz in blocks])[there], field[there])


def block_mhz(name: str) -> tuple[float, float]:
    """Centre and width of a block by its name [MHz], such as "europe-700-downlink".

    Raises
    ------
    ModeError
        No such block; the message lists them.
    """
    table = rows("mobile_blocks")
    for row in table:
        if row["id"] == name.strip().casefold():
            low, high = float(row["low_mhz"]), float(row["high_mhz"])
            return (low + high) / 2, high - low
    listed = ", ".join(row["id"] for row in table)
    raise ModeError(
        f'block "{name}" is not known: use one of {listed}, or frequency_mhz with bandwidth_mhz',
        field="channel",
        allowed=listed,
    )


@cache
def _assumed_blocks() -> tuple[tuple[str, float], ...]:
    """Assumption and centre [MHz] of each block that one names."""
    return tuple(
        (row["assumption"], (float(row["low_mhz"]) + float(row["high_mhz"])) / 2)
        for row in rows("mobile_blocks")
        if row["assumption"]
    )
