"""Heights along a path from one array of samples, compiled.

A path is cut into segments of at most 75 km. On each, row and column are cubics through four points of the
geodesic, which departs from it by less than 1 mm (13 mm over 150 km). Four loops follow each other over
arrays that stay in the processor's cache: where, fetch, blend, water. Fused into one they would not become
vector instructions, as memory is fetched at addresses that the first loop has yet to find.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from terrain.compiled import compiled, larger
from terrain.sheet import Sheet

KNOTS = 3  # new ones per segment; the fourth is the next segment's first


class SheetArrays(NamedTuple):
    """What compiled code takes of a sheet."""

    samples: NDArray[Any]  # (rows * columns,) row by row
    water: NDArray[np.bool_]  # (rows * columns,)
    rows: int
    columns: int
    void: float  # missing samples are this or less
    zero: float  # sample at 0 m
    scale: float  # metres = sample × scale + offset_m
    offset_m: float


class Scratch(NamedTuple):
    """Arrays for one thread, long enough for the longest profile."""

    cell: NDArray[np.int64]  # index of each point's upper left corner
    down: NDArray[np.float32]  # share of a cell below it
    right: NDArray[np.float32]  # share to the right
    corners: NDArray[np.float32]  # (4, ...)


def sheet_arrays(sheet: Sheet) -> SheetArrays:
    """Give the arrays of a sheet."""
    rows, columns = sheet.samples.shape
    return SheetArrays(
        samples=sheet.samples.reshape(-1),
        water=sheet.water.reshape(-1),
        rows=rows,
        columns=columns,
        void=sheet.void,
        zero=-sheet.offset_m / sheet.scale,
        scale=float(sheet.scale),
        offset_m=float(sheet.offset_m),
    )


@compiled
def sample_heights(
    sheet: SheetArrays,
    row: NDArray[np.float64],  # (3 segments + 1,) of the geodesic's knots
    column: NDArray[np.float64],
    scratch: Scratch,
    height_m: NDArray[np.float32],  # result (n,)
    wet: NDArray[np.bool_],  # result (n,), filled only where the second answer is true
) -> tuple[bool, bool]:
    """Fill heights and water at equal steps along a path; returns (every height is known, any water)."""
    n = height_m.size
    _where(row, column, sheet.columns, n, scratch.cell, scratch.down, scratch.right)
    _fetch(sheet.samples, sheet.columns, n, scratch.cell, scratch.corners)
    lowest, zeros = _blend(
        n, sheet.zero, sheet.scale, sheet.offset_m, scratch.down, scratch.right, scratch.corners, height_m
    )
    if not lowest > sheet.void:
        return False, False
    if zeros == 0:
        return True, False
    return True, _find_water(
        sheet.water, sheet.columns, n, sheet.zero, scratch.cell, scratch.down, scratch.right, scratch.corners, wet
    )


@compiled
def height_at(sheet: SheetArrays, scratch: Scratch, i: int) -> float:
    """Height of one point of the path sampled last, in double precision. [m]"""
    top = scratch.corners[0, i] + np.float64(scratch.right[i]) * (scratch.corners[1, i] - scratch.corners[0, i])
    low = scratch.corners[2, i] + np.float64(scratch.right[i]) * (scratch.corners[3, i] - scratch.corners[2, i])
    return float((top + np.float64(scratch.down[i]) * (low - top)) * sheet.scale + sheet.offset_m)


@compiled
def inside(row: NDArray[np.float64], column: NDArray[np.float64], rows: int, columns: int) -> bool:
    """Whether the cubics through the knots stay between the array's first and last samples.

    A cubic stays within the hull of its Bézier points.
    """
    for first in range(0, row.size - KNOTS, KNOTS):
        for knots, size in ((row, rows), (column, columns)):
            y0, y1, y2, y3 = knots[first], knots[first + 1], knots[first + 2], knots[first + 3]
            b1 = (-5 * y0 + 18 * y1 - 9 * y2 + 2 * y3) / 6
            b2 = (2 * y0 - 9 * y1 + 18 * y2 - 5 * y3) / 6
            if not (min(y0, b1, b2, y3) >= 0 and max(y0, b1, b2, y3) < size - 1):
                return False
    return True


@compiled
def _where(
    row: NDArray[np.float64],
    column: NDArray[np.float64],
    columns: int,
    points: int,
    cell: NDArray[np.int64],
    down: NDArray[np.float32],
    right: NDArray[np.float32],
) -> None:
    segments = (row.size - 1) // KNOTS
    per_point = segments / (points - 1)
    first = 0
    for segment in range(segments):
        last = points if segment == segments - 1 else int(np.ceil((segment + 1) / per_point))
        k = KNOTS * segment
        r0, r1, r2, r3 = _cubic(row[k], row[k + 1], row[k + 2], row[k + 3])
        c0, c1, c2, c3 = _cubic(column[k], column[k + 1], column[k + 2], column[k + 3])
        # Whole numbers relative to the segment's start fit 32 bits, of which a vector holds twice as many.
        start_row, start_column = np.floor(r0), np.floor(c0)
        start = np.int64(start_row) * columns + np.int64(start_column)
        r0 -= start_row
        c0 -= start_column
        width = np.int32(columns)
        for i in range(first, last):
            t = np.float64(np.int32(i)) * per_point - segment
            r = r0 + t * (r1 + t * (r2 + t * r3))
            c = c0 + t * (c1 + t * (c2 + t * c3))
            whole_r, whole_c = np.floor(r), np.floor(c)
            down[i] = np.float32(r - whole_r)
            right[i] = np.float32(c - whole_c)
            cell[i] = start + np.int64(np.int32(np.int32(whole_r) * width + np.int32(whole_c)))
        first = last


@compiled
def _cubic(y0: float, y1: float, y2: float, y3: float) -> tuple[float, float, float, float]:
    """Coefficients of the cubic through four values at 0, 1/3, 2/3 and 1."""
    return (
        y0,
        (-11 * y0 + 18 * y1 - 9 * y2 + 2 * y3) / 2,
        (18 * y0 - 45 * y1 + 36 * y2 - 9 * y3) / 2,
        (-9 * y0 + 27 * y1 - 27 * y2 + 9 * y3) / 2,
    )


@compiled
def _fetch(
    samples: NDArray[Any], columns: int, points: int, cell: NDArray[np.int64], corners: NDArray[np.float32]
) -> None:
    one = np.uint64(1)
    width = np.uint64(columns)
    for i in range(points):
        at = np.uint64(cell[i])  # unsigned: a signed index would be tested for counting from the end
        below = at + width
        corners[0, i] = samples[at]
        corners[1, i] = samples[at + one]
        corners[2, i] = samples[below]
        corners[3, i] = samples[below + one]


@compiled
def _blend(
    points: int,
    zero: float,
    scale: float,
    offset_m: float,
    down: NDArray[np.float32],
    right: NDArray[np.float32],
    corners: NDArray[np.float32],
    height_m: NDArray[np.float32],
) -> tuple[np.float32, np.int32]:
    """Bilinear heights; returns the lowest corner and how many nearest samples are at 0 m."""
    top_left, top_right, low_left, low_right = corners[0], corners[1], corners[2], corners[3]
    at_zero, metres, base = np.float32(zero), np.float32(scale), np.float32(offset_m)
    half = np.float32(0.5)
    depth = np.float32(-3e38)  # the lowest corner, upside down
    zeros = np.int32(0)
    for i in range(points):
        a, b, c, d = top_left[i], top_right[i], low_left[i], low_right[i]
        v, u = down[i], right[i]
        top, low = a + u * (b - a), c + u * (d - c)
        height_m[i] = (top + v * (low - top)) * metres + base
        depth = larger(depth, larger(larger(-a, -b), larger(-c, -d)))
        near_top, near_low = (b if u > half else a), (d if u > half else c)
        zeros += np.int32((near_low if v > half else near_top) == at_zero)
    return -depth, zeros


@compiled
def _find_water(
    water: NDArray[np.bool_],
    columns: int,
    points: int,
    zero: float,
    cell: NDArray[np.int64],
    down: NDArray[np.float32],
    right: NDArray[np.float32],
    corners: NDArray[np.float32],
    wet: NDArray[np.bool_],
) -> bool:
    """Whether each point's nearest sample is water; only paths that meet 0 m come here."""
    found = False
    half = np.float32(0.5)
    stretch = 64
    for first in range(0, points, stretch):
        last = min(first + stretch, points)
        if not _touches(corners, zero, first, last):
            wet[first:last] = False
            continue
        for i in range(first, last):
            at = cell[i] + np.int64(down[i] > half) * columns + np.int64(right[i] > half)
            here = water[np.uint64(at)]
            wet[i] = here
            found |= here
    return found


@compiled
def _touches(corners: NDArray[np.float32], zero: float, first: int, last: int) -> bool:
    """Whether any corner of a stretch is at 0 m."""
    at_zero = np.float32(zero)
    count = np.int32(0)
    for corner in range(4):
        part = corners[corner, first:last]
        for k in range(part.size):
            count += np.int32(part[k] == at_zero)
    return bool(count > 0)
