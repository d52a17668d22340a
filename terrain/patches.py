"""Samples laid out so that a path in any direction finds them close together.

In rows, as a raster has them, a path to the north meets a new memory line, and a new page of memory, at each point.
Here a memory line holds a patch of 5 × 6 samples: 4 × 5 cells with all their corners, those at the far rim held again
by the next patch. 8 × 8 patches make a block of 4 kB, as large as a page. A path meets a new line at every third point,
a new page at every thirtieth. (Numbers of 16 bits; of 32 bits, patches and blocks are twice as large.)
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import numpy as np
from numpy.typing import NDArray

CELLS_DOWN, CELLS_ACROSS = 4, 5  # of a patch
WIDTH = CELLS_ACROSS + 1
ROOM = 32  # samples of a patch, the last two unused
BLOCK = 8  # patches down and across
MOST_PLACES = 2**32  # their numbers have 32 bits


def blocks_of(rows: int, columns: int) -> tuple[int, int]:
    """How many blocks, down and across, hold that many samples."""
    return -(-rows // (CELLS_DOWN * BLOCK)), -(-columns // (CELLS_ACROSS * BLOCK))


def laid_out(samples: NDArray[Any], gap: float) -> Iterator[NDArray[Any]]:
    """Lay samples (rows, columns) out in rows of blocks (across, 8, 8, 32); `gap` fills what is over."""
    down, across = blocks_of(*samples.shape)
    rows, columns = CELLS_DOWN * BLOCK, CELLS_ACROSS * BLOCK * across
    for number in range(down):
        part = samples[number * rows : (number + 1) * rows + 1]
        padded = np.full((rows + 1, columns + 1), gap, samples.dtype)
        padded[: part.shape[0], : part.shape[1]] = part
        row = CELLS_DOWN * np.arange(BLOCK)[:, None] + np.arange(CELLS_DOWN + 1)
        column = CELLS_ACROSS * np.arange(BLOCK * across)[:, None] + np.arange(WIDTH)
        patches = padded[row[:, :, None, None], column].reshape(BLOCK, CELLS_DOWN + 1, across, BLOCK, WIDTH)
        blocks = np.full((across, BLOCK, BLOCK, ROOM), gap, samples.dtype)
        blocks[..., : (CELLS_DOWN + 1) * WIDTH] = patches.transpose(2, 0, 3, 1, 4).reshape(across, BLOCK, BLOCK, -1)
        yield blocks


def in_rows(patches: NDArray[Any], rows: int, columns: int) -> NDArray[Any]:
    """Samples (rows, columns) of patches (down, across, 8, 8, 32): `laid_out` undone."""
    down, across = patches.shape[:2]
    cells = patches[..., : CELLS_DOWN * WIDTH].reshape(down, across, BLOCK, BLOCK, CELLS_DOWN, WIDTH)[
        ..., :CELLS_ACROSS
    ]
    whole = cells.transpose(0, 2, 4, 1, 3, 5).reshape(down * BLOCK * CELLS_DOWN, across * BLOCK * CELLS_ACROSS)
    return whole[:rows, :columns]
