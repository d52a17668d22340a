"""How much of an interferer an aerial rejects: its own pattern, or the curves of Rec. ITU-R BT.419-3."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.assumptions import Assumptions
from app.chain import aerial as response
from app.chain.parts import Aerial
from app.tables import rows

FloatArray = NDArray[np.float64]


def bt419_db(frequency_mhz: ArrayLike, off_axis_deg: ArrayLike) -> FloatArray:
    """Rejection off the axis that a plan may count on [dB, 0 or more]; broadcasts.

    References
    ----------
    Rec. ITU-R BT.419-3, Fig. 1 (Bands I, III, IV and V); Band II by BS.599. Symmetric in azimuth.
    """
    corners = _corners()
    row = np.searchsorted(corners[:, 0], np.asarray(frequency_mhz, dtype=float), side="right")
    _, flat_to, floor_from, floor_db = np.moveaxis(corners[np.minimum(row, len(corners) - 1)], -1, 0)
    share = (np.abs(np.asarray(off_axis_deg, dtype=float)) - flat_to) / (floor_from - flat_to)
    return np.asarray(floor_db * np.clip(share, 0, 1))


def curve_of(frequency_mhz: float) -> int:
    """Row of the curve for a frequency [MHz]."""
    return int(np.searchsorted(_corners()[:, 0], frequency_mhz, side="right"))


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
    mixed one loses its other half.
    """
    pattern = response.pattern_loss_db(aerial, off_axis_deg, polarisation, assumptions.value("dipole_null_db"))
    if aerial.pattern == "class" and aerial.beamwidth_deg < 360:
        pattern = np.maximum(pattern, np.minimum(bt419_db(frequency_mhz, off_axis_deg), aerial.front_to_back_db))
    crossed = np.array([one not in (polarisation, "mixed") for one in emitted], dtype=bool)
    mixed_db = np.array([10 * np.log10(2) if one == "mixed" else 0.0 for one in emitted])
    least = np.where(crossed, assumptions.value("cross_polar_db"), 0.0)
    result: FloatArray = np.maximum(pattern, least) + mixed_db
    return result


@cache
def _corners() -> FloatArray:
    names = ("up_to_mhz", "flat_to_deg", "floor_from_deg", "floor_db")
    return np.array([[float(row[name]) for name in names] for row in rows("bt419")])
