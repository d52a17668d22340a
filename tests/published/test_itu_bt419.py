"""Directivity that planning counts on, Rec. ITU-R BT.419-3."""

import numpy as np
import pytest

from app.chain.bt419 import bt419_rejection_db, planning_curve
from propagation.errors import RangeError


@pytest.mark.parametrize(
    ("angle_deg", "rejection_db"), [(0, 0), (20, 0), (30, 4), (40, 8), (60, 16), (90, 16), (180, 16)]
)
@pytest.mark.parametrize("frequency_mhz", [474, 690])
def test_bands_iv_and_v(frequency_mhz, angle_deg, rejection_db):
    """Corners at 20 and 60 degrees; two public implementations agree (S2)."""
    assert bt419_rejection_db(frequency_mhz, angle_deg) == pytest.approx(rejection_db, abs=1e-9)
    assert bt419_rejection_db(frequency_mhz, -angle_deg) == pytest.approx(rejection_db, abs=1e-9)
    assert bt419_rejection_db(frequency_mhz, 360 - angle_deg) == pytest.approx(rejection_db, abs=1e-9)
    assert planning_curve(frequency_mhz).flag == "S2"


@pytest.mark.parametrize(
    ("frequency_mhz", "angle_deg", "rejection_db"),
    [(200, 27, 0), (200, 45, 6.545), (200, 60, 12), (60, 50, 0), (60, 60, 3), (60, 70, 6), (98, 45, 6.545)],
)
def test_consistency_with_bands_one_to_three_as_recalled(frequency_mhz, angle_deg, rejection_db):
    """Rec. ITU-R BT.419-3 and BS.599, from memory with medium confidence (MM)."""
    assert bt419_rejection_db(frequency_mhz, angle_deg) == pytest.approx(rejection_db, abs=5e-4)


def test_other_polarisation_is_16_db_all_round():
    """BT.419-3, Note 3 (MH): not added to directivity, the larger of both holds."""
    angles = np.arange(0, 181, 5)
    assert (bt419_rejection_db(600, angles, True) == 16).all()
    assert bt419_rejection_db(np.array([600.0, 600]), 10, [False, True]).tolist() == [0, 16]


def test_outside_the_bands_is_told():
    with pytest.raises(RangeError, match=r"1800 MHz is outside Rec\. ITU-R BT\.419: use 41 to 1000 MHz"):
        bt419_rejection_db([600, 1800], 0)
