"""How much of an interferer an aerial rejects: its own pattern, or what planning counts on."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from app.assumptions import Assumptions
from app.chain import aerial as response
from app.chain.bt419 import PLANNING_CURVES, bt419_rejection_db, planning_curve
from app.chain.parts import Aerial

FloatArray = NDArray[np.float64]

LOWEST_MHZ, HIGHEST_MHZ = PLANNING_CURVES[0].lowest_mhz, PLANNING_CURVES[-1].highest_mhz - 1e-3


def rejection_db(
    aerial: Aerial,
    frequency_mhz: FloatArray,
    off_axis_deg: FloatArray,
    polarisation: str,
    emitted: Sequence[str],
    assumptions: Assumptions,
) -> FloatArray:
    """Loss of interferers (i,) against an aerial that would point at them in their polarisation [dB], (…, i).

    The larger of the aerial's own pattern and of BT.419-3, the latter never beyond the aerial's front-to-back
    ratio; a dipole and a round aerial have their own pattern only. An interferer of the other polarisation
    loses the cross-polar figure or the pattern, whichever is more: they do not add up (BT.419-3, Note 3). A
    mixed one loses its other half. Beyond bands I to V the nearest band's curve is taken.

    References
    ----------
    Rec. ITU-R BT.419-3, Fig. 1 and Note 3.
    """
    pattern = response.pattern_loss_db(aerial, off_axis_deg, polarisation, assumptions.value("dipole_null_db"))
    if aerial.pattern == "class" and aerial.beamwidth_deg < 360:
        planned = bt419_rejection_db(np.clip(frequency_mhz, LOWEST_MHZ, HIGHEST_MHZ), off_axis_deg)
        pattern = np.maximum(pattern, np.minimum(planned, aerial.front_to_back_db))
    crossed = np.array([one not in (polarisation, "mixed") for one in emitted], dtype=bool)
    mixed_db = np.array([10 * np.log10(2) if one == "mixed" else 0.0 for one in emitted])
    least = np.where(crossed, assumptions.value("cross_polar_db"), 0.0)
    result: FloatArray = np.maximum(pattern, least) + mixed_db
    return result


def band_of(frequency_mhz: float) -> str:
    """Band whose curve holds for a frequency [MHz]."""
    return planning_curve(min(max(frequency_mhz, LOWEST_MHZ), HIGHEST_MHZ)).band
