"""Mobile networks beside the television band, as they load an amplifier."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.tables import rows

FloatArray = NDArray[np.float64]

LEAST_FIELD_DBUV_M = 1.0  # below: no block there


@dataclass(frozen=True, slots=True)
class MobileBlocks:
    """Downlink blocks at a roof, one row each."""

    frequency_mhz: FloatArray  # (b,) centre
    field_dbuv_m: FloatArray  # (b,) of the whole block


def mobile_blocks(assumptions: Assumptions) -> MobileBlocks:
    """Blocks whose field was given by the assumptions `mobile_…_dbuv_m`; usually none."""
    table = rows("mobile_blocks")
    centre = np.array([(float(row["low_mhz"]) + float(row["high_mhz"])) / 2 for row in table])
    field = np.array([assumptions.value(row["assumption"]) for row in table])
    there = field >= LEAST_FIELD_DBUV_M
    return MobileBlocks(centre[there], field[there])
