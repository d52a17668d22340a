"""Rejection off the axis that planning counts on where no pattern is measured (Rec. ITU-R BT.419)."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from app.tables import rows
from propagation.errors import RangeError

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class PlanningCurve:
    """One band of Rec. ITU-R BT.419: nothing near the axis, then a slope, then a floor."""

    band: str
    lowest_mhz: float
    highest_mhz: float
    flat_to_deg: float
    floor_from_deg: float
    floor_db: float
    flag: str
    source: str


PLANNING_CURVES = tuple(
    PlanningCurve(
        row["band"],
        float(row["lowest_mhz"]),
        float(row["highest_mhz"]),
        float(row["flat_to_deg"]),
        float(row["floor_from_deg"]),
        float(row["floor_db"]),
        row["flag"],
        row["source"],
    )
    for row in rows("bt419")
)
ORTHOGONAL_DB = 16.0  # of the other polarisation, at any angle, Rec. ITU-R BT.419-3, Note 3 (MH)


def planning_curve(frequency_mhz: float) -> PlanningCurve:
    """Curve of the band that a frequency [MHz] lies in, with its flag.

    Raises
    ------
    RangeError
        Outside bands I to V.
    """
    for curve in PLANNING_CURVES:
        if curve.lowest_mhz <= frequency_mhz < curve.highest_mhz:
            return curve
    low, high = PLANNING_CURVES[0].lowest_mhz, PLANNING_CURVES[-1].highest_mhz
    raise RangeError(f"{frequency_mhz:g} MHz is outside Rec. ITU-R BT.419: use {low:g} to {high:g} MHz")


def bt419_rejection_db(
    frequency_mhz: ArrayLike, off_axis_deg: ArrayLike, is_orthogonal: ArrayLike = False
) -> FloatArray:
    """Rejection of an interferer that planning counts on [dB, 0 or more]; broadcasts, frequencies on the last axis.

    For interference only: a wanted signal off the axis is not to lose this. Of the other polarisation 16 dB are
    rejected at any angle; that and directivity do not add up, the larger holds.

    References
    ----------
    Rec. ITU-R BT.419-3, Figure 1 and Note 3; Rec. ITU-R BS.599 for band II. Flags by band in `PLANNING_CURVES`.
    """
    f = np.asarray(frequency_mhz, dtype=float)
    curves = [planning_curve(value) for value in f.reshape(-1).tolist()]
    flat, start, floor = (
        np.array([getattr(curve, key) for curve in curves]).reshape(f.shape)
        for key in ("flat_to_deg", "floor_from_deg", "floor_db")
    )
    angle = np.abs((np.asarray(off_axis_deg, dtype=float) + 180) % 360 - 180)
    directivity = floor * np.clip((angle - flat) / (start - flat), 0, 1)
    return np.asarray(np.where(is_orthogonal, np.maximum(directivity, ORTHOGONAL_DB), directivity))
