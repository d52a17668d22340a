"""Heights along a path from one sheet of samples, compiled.

A path is cut into segments of at most 75 km. On each, row and column are cubics through four points of the
geodesic, which departs from it by less than 1 mm (13 mm over 150 km). Stretches of a few hundred points then go
through three loops, over arrays that stay in the processor's nearest cache: where, fetch, blend. In one loop they
would not become vector instructions, as memory is fetched at addresses that the first has yet to find.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from terrain.compiled import ask_for, compiled, first_of, larger, pair_at, second_of
from terrain.patches import BLOCK, CELLS_ACROSS, CELLS_DOWN, ROOM, WIDTH
from terrain.sheet import Sheet

KNOTS = 3  # new ones per segment; the fourth is the next segment's first
STRETCH = 512  # points: positions within one are 32-bit floats from its start, to 0.0001 of a cell

_DOWN, _ACROSS, _WIDTH, _BLOCK, _ROOM = (np.uint32(n) for n in (CELLS_DOWN, CELLS_ACROSS, WIDTH, BLOCK, ROOM))

Cubic = tuple[float, float, float, float]
Whole = int | np.int32


class SheetArrays(NamedTuple):
    """What compiled code takes of a sheet."""

    patches: NDArray[Any]  # flat
    rows: int
    columns: int
    blocks_across: int
    gap: float  # sample where there is none
    water: float  # sample that is water
    zero: float  # sample at 0 m
    scale: float  # metres = sample × scale + offset_m
    offset_m: float


class Scratch(NamedTuple):
    """Arrays (STRETCH,) for one thread."""

    place: NDArray[np.uint32]  # of each point's upper left corner in the patches
    down: NDArray[np.float32]  # share of a cell below it
    right: NDArray[np.float32]  # share to the right
    upper: NDArray[Any]  # both upper corners in one word
    lower: NDArray[Any]


def sheet_arrays(sheet: Sheet) -> SheetArrays:
    """Give the arrays of a sheet."""
    return SheetArrays(
        patches=sheet.patches.reshape(-1),
        rows=sheet.grid.rows,
        columns=sheet.grid.columns,
        blocks_across=sheet.patches.shape[1],
        gap=sheet.gap,
        water=sheet.water,
        zero=-float(sheet.offset_m) / float(sheet.scale),
        scale=float(sheet.scale),
        offset_m=float(sheet.offset_m),
    )


def scratch_for(sheet: SheetArrays) -> Scratch:
    """Make room for one thread."""
    word = np.int32 if sheet.patches.dtype == np.int16 else np.int64
    shares = np.empty((2, STRETCH), np.float32)
    words = np.empty((2, STRETCH), word)
    return Scratch(np.empty(STRETCH, np.uint32), shares[0], shares[1], words[0], words[1])


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
    segments = (row.size - 1) // KNOTS
    per_point = segments / (n - 1)
    any_water = False
    first = 0
    for segment in range(segments):
        last = n if segment == segments - 1 else int(np.ceil((segment + 1) / per_point))
        rows, columns = cubic_of(row, segment), cubic_of(column, segment)
        for start in range(first, last, STRETCH):
            stop = min(start + STRETCH, last)
            t = start * per_point - segment
            _where(_from(rows, t, per_point), _from(columns, t, per_point), sheet.blocks_across, stop - start, scratch)
            _fetch(sheet.patches, stop - start, scratch)
            lowest = _blend(sheet.scale, sheet.offset_m, scratch, height_m[start:stop])
            if lowest > sheet.water:
                if any_water:
                    wet[start:stop] = False
                continue
            if not lowest > sheet.gap:
                return False, False
            if _blend_water(sheet, scratch, height_m[start:stop], wet[start:stop]) and not any_water:
                wet[:start] = False
                any_water = True
        first = last
    return True, any_water


@compiled
def height_at(sheet: SheetArrays, row: NDArray[np.float64], column: NDArray[np.float64], points: int, i: int) -> float:
    """Height of one point of a path whose samples are all known, in double precision. [m]"""
    segments = (row.size - 1) // KNOTS
    at = i * (segments / (points - 1))
    segment = min(int(at), segments - 1)
    t = at - segment
    r, c = value_of(cubic_of(row, segment), t), value_of(cubic_of(column, segment), t)
    top, left = int(r), int(c)
    height = 0.0
    for down in range(2):
        for right in range(2):
            sample = float(sheet.patches[_place(top, left, sheet.blocks_across) + down * WIDTH + right])
            sample = sheet.zero if sample == sheet.water else sample
            height += sample * (r - top if down else 1 - (r - top)) * (c - left if right else 1 - (c - left))
    return height * sheet.scale + sheet.offset_m


@compiled
def inside(row: NDArray[np.float64], column: NDArray[np.float64], rows: int, columns: int) -> bool:
    """Whether the cubics through the knots stay between the sheet's first and last samples.

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
def cubic_of(knots: NDArray[np.float64], segment: int) -> Cubic:
    """Coefficients of the cubic through a segment's four knots at 0, 1/3, 2/3 and 1."""
    k = KNOTS * segment
    y0, y1, y2, y3 = knots[k], knots[k + 1], knots[k + 2], knots[k + 3]
    return (
        y0,
        (-11 * y0 + 18 * y1 - 9 * y2 + 2 * y3) / 2,
        (18 * y0 - 45 * y1 + 36 * y2 - 9 * y3) / 2,
        (-9 * y0 + 27 * y1 - 27 * y2 + 9 * y3) / 2,
    )


@compiled
def value_of(cubic: Cubic, t: float) -> float:
    """Value of a cubic."""
    return cubic[0] + t * (cubic[1] + t * (cubic[2] + t * cubic[3]))


@compiled
def _from(cubic: Cubic, t: float, step: float) -> Cubic:
    """Give the same cubic counted in steps from t."""
    return (
        value_of(cubic, t),
        (cubic[1] + t * (2 * cubic[2] + t * 3 * cubic[3])) * step,
        (cubic[2] + 3 * cubic[3] * t) * step**2,
        cubic[3] * step**3,
    )


@compiled
def _where(rows: Cubic, columns: Cubic, blocks_across: int, points: int, scratch: Scratch) -> None:
    """Find the cell of each point, its place in the patches, and the point's place in it."""
    down, right, place = scratch.down, scratch.right, scratch.place
    first_row, first_column = np.floor(rows[0]), np.floor(columns[0])
    r0, r1, r2, r3 = np.float32(rows[0] - first_row), np.float32(rows[1]), np.float32(rows[2]), np.float32(rows[3])
    c0, c1 = np.float32(columns[0] - first_column), np.float32(columns[1])
    c2, c3 = np.float32(columns[2]), np.float32(columns[3])
    above, before = np.int32(first_row), np.int32(first_column)
    across = np.int32(blocks_across)
    for k in range(points):
        t = np.float32(np.int32(k))
        r = r0 + t * (r1 + t * (r2 + t * r3))
        c = c0 + t * (c1 + t * (c2 + t * c3))
        whole_r, whole_c = np.floor(r), np.floor(c)
        down[k] = r - whole_r
        right[k] = c - whole_c
        place[k] = _place(np.int32(above + np.int32(whole_r)), np.int32(before + np.int32(whole_c)), across)


@compiled
def _place(row: Whole, column: Whole, blocks_across: Whole) -> np.uint32:
    """Place of a cell's upper left corner: patches.py.

    Not signed, as whole division is then a shift; and cut to 32 bits, of which a vector holds twice as many.
    """
    r, c, across = np.uint32(row), np.uint32(column), np.uint32(blocks_across)
    fifths = (np.float32(np.int32(column)) + np.float32(0.5)) * np.float32(1 / CELLS_ACROSS)
    patch_row, patch_column = np.uint32(r // _DOWN), np.uint32(np.int32(fifths))
    block = np.uint32((patch_row // _BLOCK) * across + patch_column // _BLOCK)
    patch = np.uint32((block * _BLOCK + patch_row % _BLOCK) * _BLOCK + patch_column % _BLOCK)
    return np.uint32(patch * _ROOM + (r % _DOWN) * _WIDTH + c - patch_column * _ACROSS)


@compiled
def _fetch(patches: NDArray[Any], points: int, scratch: Scratch) -> None:
    """Fetch corners: first ask for all, so that memory is at work on many at once."""
    place, upper, lower = scratch.place, scratch.upper, scratch.lower
    for k in range(points):
        ask_for(patches, np.uint64(place[k]))
    for k in range(points):
        at = np.uint64(place[k])
        upper[k] = pair_at(patches, at)
        lower[k] = pair_at(patches, at + np.uint64(WIDTH))


@compiled
def _blend(scale: float, offset_m: float, scratch: Scratch, height_m: NDArray[np.float32]) -> np.float32:
    """Bilinear heights over land; returns the lowest corner."""
    down, right, upper, lower = scratch.down, scratch.right, scratch.upper, scratch.lower
    metres, base = np.float32(scale), np.float32(offset_m)
    depth = np.float32(-3e38)  # the lowest corner, upside down
    for k in range(height_m.size):
        a, b, c, d = first_of(upper[k]), second_of(upper[k]), first_of(lower[k]), second_of(lower[k])
        top, low = a + right[k] * (b - a), c + right[k] * (d - c)
        height_m[k] = (top + down[k] * (low - top)) * metres + base
        depth = larger(depth, larger(larger(-a, -b), larger(-c, -d)))
    return -depth


@compiled
def _blend_water(sheet: SheetArrays, scratch: Scratch, height_m: NDArray[np.float32], wet: NDArray[np.bool_]) -> bool:
    """The same where a corner is water; a point is at sea where its nearest sample is. Returns whether any is."""
    down, right, upper, lower = scratch.down, scratch.right, scratch.upper, scratch.lower
    metres, base = np.float32(sheet.scale), np.float32(sheet.offset_m)
    water, zero, half = np.float32(sheet.water), np.float32(sheet.zero), np.float32(0.5)
    count = np.int32(0)
    for k in range(height_m.size):
        a, b, c, d = first_of(upper[k]), second_of(upper[k]), first_of(lower[k]), second_of(lower[k])
        u, v = right[k], down[k]
        near_top, near_low = (b if u > half else a), (d if u > half else c)
        here = (near_low if v > half else near_top) == water
        wet[k] = here
        count += np.int32(here)
        a, b = (zero if a == water else a), (zero if b == water else b)
        c, d = (zero if c == water else c), (zero if d == water else d)
        top, low = a + u * (b - a), c + u * (d - c)
        height_m[k] = (top + v * (low - top)) * metres + base
    return bool(count > 0)
