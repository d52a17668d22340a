"""Heights for small real rasters."""

import numpy as np
import pytest


@pytest.fixture
def slope():
    """Heights of a plane, 3 m down per row and 2 m per column to the right, in the middle of pixels."""

    def heights(rows=20, columns=30, dtype="int16"):
        return (100 + 3 * np.arange(rows)[:, None] + 2 * np.arange(columns)).astype(dtype)

    return heights
