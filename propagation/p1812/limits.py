"""What Rec. ITU-R P.1812 admits: one check for every bounded quantity."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from propagation.errors import RangeError


def within(name: str, value: ArrayLike, lowest: float, highest: float, unit: str) -> NDArray[np.float64]:
    """Return the value as an array, or raise RangeError if any of it lies outside; NaN passes."""
    values = np.asarray(value, dtype=float)
    outside = (values < lowest) | (values > highest)
    if outside.any():
        raise RangeError(
            f"{name} {values[outside].flat[0]:g} {unit} is outside Rec. ITU-R P.1812-7: "
            f"use {lowest:g} to {highest:g} {unit}"
        )
    return values
