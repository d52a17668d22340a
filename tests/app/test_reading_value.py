"""The value of a reading where a meter shows nothing."""

import numpy as np
import pytest

from app.chance import DRAWS
from app.reading_value import Readable, value_of


def test_levels_below_what_a_meter_shows_teach_only_that():
    """Two equal halves, 0 and 10 dB(µV), both under the 15 that a meter shows: nothing can be told apart."""
    level = np.where(np.arange(DRAWS) % 2 == 0, 0.0, 10.0)
    worth = np.where(level > 5, 30.0, -10.0)
    seen = Readable("e", 0.0, level, 1.0)
    unseen = Readable("e", 0.0, level, 1.0, least_dbuv=15.0)
    assert value_of(seen, worth) == pytest.approx(0.5 * 30 - 10, abs=0.5)  # E max(E(U | r), 0) - E(U)
    assert value_of(unseen, worth) == pytest.approx(0, abs=0.01)
