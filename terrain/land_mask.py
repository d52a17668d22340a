"""Where there is land and where sea, from Natural Earth's coastline.

Good enough to tell a tile of open sea from one that is missing, not to draw a shore: of the cells
beside real coasts 0.4 to 3 % are on the wrong side, half of them within 0.5 km. Lakes count as land.
"""

from __future__ import annotations

from functools import cache
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike, NDArray

from terrain.grid import Grid

CELLS_PER_DEGREE = 120  # 30 arc-seconds
ROWS, COLUMNS = 180 * CELLS_PER_DEGREE, 360 * CELLS_PER_DEGREE

_FILE = Path(__file__).parent / "data" / "land.npz"


def is_land(latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> NDArray[np.bool_]:
    """Whether positions lie on land; they broadcast. A position that is NaN or out of range counts as land.

    References
    ----------
    Natural Earth 1:10m land (terrain/data/land.source.toml).
    """
    lat, lon = np.broadcast_arrays(np.asarray(latitude_deg, dtype=float), np.asarray(longitude_deg, dtype=float))
    known = np.isfinite(lat) & np.isfinite(lon) & (np.abs(lat) <= 90)
    row = np.clip(np.where(known, 90 - lat, 0) * CELLS_PER_DEGREE, 0, ROWS - 1).astype(np.int64)
    column = (np.where(known, lon + 180, 0) % 360 * CELLS_PER_DEGREE).astype(np.int64) % COLUMNS
    turns = _turns()
    first = np.searchsorted(turns, row * COLUMNS)
    before = np.searchsorted(turns, row * COLUMNS + column, side="right")
    # Every row begins at sea; an odd number of turns up to here means land.
    land: NDArray[np.bool_] = ((before - first) % 2 == 1) | ~known
    return land


def is_sea(latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> NDArray[np.bool_]:
    """Whether positions lie at sea: the opposite of `is_land`."""
    return np.asarray(~is_land(latitude_deg, longitude_deg))


def has_land(south: float, west: float, north: float, east: float) -> bool:
    """Whether any cell of a box [deg] is land; its east may lie beyond 180."""
    first, last = (int(np.floor((90 - side) * CELLS_PER_DEGREE)) for side in (north, south))
    row = np.arange(max(0, first), min(ROWS - 1, last) + 1, dtype=np.int64) * COLUMNS
    start = int(np.floor((west + 180) * CELLS_PER_DEGREE)) % COLUMNS
    end = start + int(np.ceil((east - west) * CELLS_PER_DEGREE))
    spans = [(start, min(end, COLUMNS - 1))] + ([(0, end - COLUMNS)] if end >= COLUMNS else [])
    for left, right in spans:
        begins = np.searchsorted(_turns(), row)
        at_left, at_right = (np.searchsorted(_turns(), row + column, side="right") for column in (left, right))
        # Land at the left side, or a shore on the way to the right one.
        if ((at_left - begins) % 2 == 1).any() or (at_right > at_left).any():
            return True
    return False


def near_sea(latitude_deg: ArrayLike, longitude_deg: ArrayLike, within_km: float = 5.0) -> NDArray[np.bool_]:
    """Whether the sea lies at positions or, in one of eight directions, `within_km` from them."""
    lat, lon = np.broadcast_arrays(np.asarray(latitude_deg, dtype=float), np.asarray(longitude_deg, dtype=float))
    near = is_sea(lat, lon)
    bearing = np.arange(8) * np.pi / 4
    for share in (0.5, 1.0):
        north = share * within_km / 111.2 * np.cos(bearing)
        east = share * within_km / 111.2 * np.sin(bearing)
        for n, e in zip(north, east, strict=True):
            with np.errstate(invalid="ignore"):
                beside = lat + n, lon + e / np.maximum(0.02, np.cos(np.deg2rad(lat)))
            near = near | is_sea(*beside)
    return np.asarray(near)


def shore_of_grid(grid: Grid, top: int, left: int, rows: int, columns: int, within_km: float) -> NDArray[np.bool_]:
    """`near_sea` for a window (rows, columns) of a raster's samples, looked up about every 0.5 km."""
    step = max(1, int(500 / grid.spacing_m))
    row, column = np.arange(0, rows, step), np.arange(0, columns, step)
    lat, lon = grid.position(*np.meshgrid(row + float(top), column + float(left), indexing="ij"))
    near = near_sea(lat, lon, within_km)
    return near.repeat(step, axis=0).repeat(step, axis=1)[:rows, :columns]


@cache
def _turns() -> NDArray[np.int64]:
    """Cells at which sea turns into land or back, counted row by row from the north-west, rising."""
    with np.load(_FILE, allow_pickle=False) as data:
        row = np.repeat(np.arange(ROWS, dtype=np.int64), data["counts"])
        return np.asarray(row * COLUMNS + data["columns"])
