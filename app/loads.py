"""What loads amplifiers and set beside the wanted emissions: other emissions on the air, and mobile blocks."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.assumptions import Assumptions
from app.at_aerial import at_aerial
from app.chain.parts import Aerial
from app.levels import level_dbuv
from app.mobile import MobileBlocks

FloatArray = NDArray[np.float64]

# What is left out stays below this all together, in a large aerial: 40 dB of gain later it puts out 85 dB(µV), whose
# products lie 84 dB below it at a rated output of 98 dB(µV).
LEFT_OUT_DBUV = 45.0
LARGE_AERIAL_DBD = 14.0


@dataclass(frozen=True, slots=True)
class Beside:
    """Emissions that are not wanted but strong enough to load an amplifier, one row each."""

    frequency_mhz: FloatArray  # (b,)
    field_dbuv_m: FloatArray  # (b,) median at the aerial
    bearing_deg: FloatArray  # (b,) from the roof
    polarisation: tuple[str, ...]  # (b,)


NOTHING_BESIDE = Beside(np.zeros(0), np.zeros(0), np.zeros(0), ())


def that_load(field_dbuv_m: FloatArray, frequency_mhz: FloatArray) -> NDArray[np.bool_]:
    """Which of some fields (b,) [dB(µV/m)] are needed so that all others load nothing. (b,)"""
    power = 10 ** ((level_dbuv(field_dbuv_m, LARGE_AERIAL_DBD, frequency_mhz) - LEFT_OUT_DBUV) / 10)
    order = np.argsort(power)
    needed = np.zeros(power.shape, dtype=bool)
    needed[order] = np.cumsum(power[order]) > 1
    return needed


def with_loads(
    level: FloatArray,
    aerial: Aerial,
    pointing_deg: ArrayLike,
    polarisation: str,
    beside: Beside,
    blocks: MobileBlocks,
    assumptions: Assumptions,
) -> FloatArray:
    """Append to the levels (…, e) at an aerial's terminals those of all that loads it too, (…, e + b) [dB(µV)].

    Mobile blocks of the assumptions may come from anywhere, so they come from where the aerial points.
    """
    added = []
    if beside.frequency_mhz.size:
        air = at_aerial(
            aerial,
            beside.frequency_mhz,
            beside.bearing_deg,
            beside.polarisation,
            pointing_deg,
            polarisation,
            assumptions,
        )
        added.append(level_dbuv(beside.field_dbuv_m, air.gain_dbd, beside.frequency_mhz) - air.loss_db)
    if blocks.frequency_mhz.size:
        nowhere = np.zeros(blocks.frequency_mhz.shape)
        air = at_aerial(
            aerial, blocks.frequency_mhz, nowhere, ("mixed",) * nowhere.size, 0.0, "horizontal", assumptions
        )
        added.append(level_dbuv(blocks.field_dbuv_m, air.gain_dbd, blocks.frequency_mhz) - air.covering_loss_db)
    lead = level.shape[:-1]
    return np.concatenate([level, *(np.broadcast_to(one, (*lead, one.shape[-1])) for one in added)], axis=-1)
