"""What an aerial keeps out: its own pattern, the planning curve, the other polarisation."""

import numpy as np
import pytest

from app.assumptions import Assumptions
from app.chain.catalogue import demo_chains
from app.rejection import rejection_db

LOFT, SHORT = demo_chains()[0].aerial, demo_chains()[1].aerial


def rejected(aerial, off_axis_deg, emitted="horizontal"):
    off = np.asarray(off_axis_deg, dtype=float)
    return rejection_db(aerial, np.full(len(off), 650.0), off, "horizontal", [emitted] * len(off), Assumptions())


def test_cross_polar_rejection_does_not_add_to_the_pattern():
    """BT.419-3, Note 3 (from memory, high confidence): 16 dB at all azimuths, together with directivity."""
    off = [0.0, 30.0, 180.0]
    assert rejected(SHORT, off, "vertical") == pytest.approx(np.maximum(rejected(SHORT, off), 16.0))


def test_no_aerial_rejects_more_than_its_ratio_front_to_back():
    assert rejected(SHORT, [180.0]) == pytest.approx([SHORT.front_to_back_db])


def test_a_dipole_keeps_its_figure_of_eight():
    assert rejected(LOFT, [0.0, 180.0]) == pytest.approx([0, 0], abs=1e-9)


def test_one_plane_of_a_mixed_emission_is_half_its_power():
    assert rejected(SHORT, [0.0], "mixed") == pytest.approx([3.0103], abs=1e-4)
