"""One raster of a ground, and what is between its samples."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from terrain.bilinear import ROUNDING, bilinear
from terrain.blocks import Blocks
from terrain.grid import Grid
from terrain.raster import Raster

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Layer:
    """A raster and its samples."""

    raster: Raster
    blocks: Blocks


def surrounded(grid: Grid, row: FloatArray, column: FloatArray) -> NDArray[np.bool_]:
    """Whether positions lie between samples of a raster, rounding errors allowed for."""
    inside: NDArray[np.bool_] = (row >= -ROUNDING) & (row <= grid.rows - 1 + ROUNDING)
    inside &= (column >= -ROUNDING) & (column <= grid.columns - 1 + ROUNDING)
    return inside


def within(layer: Layer, row: FloatArray, column: FloatArray, bridged: bool) -> FloatArray:
    """Bilinear heights at positions between samples of one raster."""
    grid = layer.raster.grid
    top = np.clip(row.astype(np.intp), 0, grid.rows - 2)
    left = np.clip(column.astype(np.intp), 0, grid.columns - 2)
    return bilinear(layer.blocks.cells(top, left, bridged), row - top, column - left)
