"""Leaves before an aerial."""

import numpy as np
import pytest

from propagation.foliage import woodland_loss_db


@pytest.mark.parametrize(("frequency_mhz", "largest_db"), [(200, 9.7), (500, 19.3), (600, 22.1), (700, 24.8)])
def test_consistency_of_the_largest_loss_with_p833(frequency_mhz, largest_db):
    """Rec. ITU-R P.833-10, section 2.1, eq. (2) with A1 = 0.18 and alpha = 0.752; figures from memory, rounded."""
    assert woodland_loss_db(frequency_mhz, 1e5) == pytest.approx(largest_db, abs=0.06)


def test_no_leaves_cost_nothing_and_more_cost_more():
    loss = woodland_loss_db(600, np.arange(0, 200, 5))
    assert loss[0] == 0
    assert (np.diff(loss) > 0).all()


def test_a_few_metres_cost_the_specific_attenuation():
    """0.08 to 0.12 dB/m at 500 to 600 MHz (P.833, Figure 2, from memory)."""
    assert 0.08 < woodland_loss_db(550, 0.1) / 0.1 < 0.12


def test_one_by_one_is_the_batch():
    f, d = np.array([100.0, 474, 698]), np.array([5.0, 12, 30])
    assert woodland_loss_db(f, d).tolist() == [woodland_loss_db(a, b).item() for a, b in zip(f, d, strict=True)]
