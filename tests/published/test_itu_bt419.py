"""Rec. ITU-R BT.419-3, Fig. 1: discrimination of household aerials against interferers."""

import numpy as np
import pytest

from app.assumptions import Assumptions
from app.chain.catalogue import demo_chains
from app.rejection import bt419_db, rejection_db

LOFT, SHORT = demo_chains()[0].aerial, demo_chains()[1].aerial


def test_bands_iv_and_v_match_the_corners_of_the_figure():
    """Flat to 20°, -0.4 dB a degree to 16 dB at 60°; two public implementations of the curve agree (second-hand)."""
    expected = {0: 0, 20: 0, 30: 4, 40: 8, 60: 16, 90: 16, 180: 16}
    assert bt419_db(650.0, list(expected)) == pytest.approx(list(expected.values()), abs=1e-9)


@pytest.mark.parametrize(("frequency_mhz", "off_axis_deg", "expected_db"), [(200, 45, 6.55), (55, 60, 3.0)])
def test_consistency_bands_i_and_iii(frequency_mhz, off_axis_deg, expected_db):
    """Bands I and III of the figure from memory, medium confidence: a consistency check only."""
    assert float(bt419_db(frequency_mhz, off_axis_deg)) == pytest.approx(expected_db, abs=0.01)


def test_cross_polar_rejection_does_not_add_to_the_pattern():
    """BT.419-3, Note 3 (from memory, high confidence): 16 dB at all azimuths, together with directivity."""
    off = np.array([0.0, 30.0, 180.0])
    crossed = rejection_db(SHORT, np.full(3, 650.0), off, "horizontal", ["vertical"] * 3, Assumptions())
    own = rejection_db(SHORT, np.full(3, 650.0), off, "horizontal", ["horizontal"] * 3, Assumptions())
    assert crossed == pytest.approx(np.maximum(own, 16.0))


def test_no_aerial_rejects_more_than_its_own_ratio_front_to_back_and_a_dipole_keeps_its_eight():
    back = rejection_db(SHORT, np.array([650.0]), np.array([180.0]), "horizontal", ["horizontal"], Assumptions())
    assert float(back[0]) == pytest.approx(SHORT.front_to_back_db)
    both_ways = rejection_db(
        LOFT, np.full(2, 650.0), np.array([0.0, 180.0]), "horizontal", ["horizontal"] * 2, Assumptions()
    )
    assert both_ways == pytest.approx([0, 0], abs=1e-9)
