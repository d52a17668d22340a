"""Where many paths run over a sheet: lengths, points, and the few places of each geodesic that the kernels need."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from terrain.geodesy import distance_and_bearing
from terrain.profile import FEWEST_POINTS, MOST_POINTS
from terrain.sheet import Sheet
from terrain.ways import points_on

FloatArray = NDArray[np.float64]
IndexArray = NDArray[np.int64]

SEGMENT_KM = 75.0  # a cubic through four points follows the geodesic within 1 mm up to here
_KNOTS = 3  # per segment; the fourth is the next one's first


@dataclass(frozen=True, slots=True)
class Lines:
    """Paths (p,) from transmitters to roofs over one sheet."""

    length_km: FloatArray
    points: IndexArray  # as many as `profile.sample_profile` takes; 0 where an end lies outside the sheet
    middle_latitude_deg: FloatArray  # of the profile's middle point
    middle_longitude_deg: FloatArray
    first_knot: IndexArray  # (p + 1,) into row and column
    row: FloatArray  # (k,) of the knots on the sheet
    column: FloatArray
    knot_latitude_deg: FloatArray  # (k,)
    knot_longitude_deg: FloatArray


def lines_over(
    sheet: Sheet,
    tx_latitude_deg: FloatArray,
    tx_longitude_deg: FloatArray,
    rx_latitude_deg: FloatArray,
    rx_longitude_deg: FloatArray,
    spacing_m: float | None = None,
) -> Lines:
    """Lay paths (p,) over a sheet; spacing as for `profile.sample_profile`."""
    paths = tx_latitude_deg.size
    length, bearing = distance_and_bearing(tx_latitude_deg, tx_longitude_deg, rx_latitude_deg, rx_longitude_deg)
    segments = np.maximum(np.ceil(length / SEGMENT_KM), 1.0)
    first = np.concatenate([[0], np.cumsum(_KNOTS * segments.astype(np.int64) + 1)])

    # All knots of all paths in one row; the middle points, which depend on the ends' rasters, follow later.
    path = np.repeat(np.arange(paths), np.diff(first))
    number = np.arange(first[-1]) - first[path]
    away = number * (length / (_KNOTS * segments))[path]
    lat, lon = points_on(tx_latitude_deg, tx_longitude_deg, bearing, first, away)
    start, end = first[:-1], first[1:] - 1
    lat[start], lon[start], lat[end], lon[end] = tx_latitude_deg, tx_longitude_deg, rx_latitude_deg, rx_longitude_deg
    row, column = sheet.grid.index(lat, lon)

    step = np.full(paths, np.nan if spacing_m is None else spacing_m)
    if spacing_m is None:
        step = np.fmin(sheet.spacing_m(row[start], column[start]), sheet.spacing_m(row[end], column[end]))
    with np.errstate(invalid="ignore"):
        points = np.clip(np.ceil(1e3 * length / step - 1e-9) + 1, FEWEST_POINTS, MOST_POINTS)
    points = np.where(np.isfinite(step) & (length > 0), points, 0).astype(np.int64)
    middle = length * (points // 2) / np.maximum(points - 1, 1)
    middle_lat, middle_lon = points_on(tx_latitude_deg, tx_longitude_deg, bearing, np.arange(paths + 1), middle)
    return Lines(length, points, middle_lat, middle_lon, first, row, column, lat, lon)
