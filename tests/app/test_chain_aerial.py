import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.chain.aerial import gain_dbd, in_range, off_axis_deg, pattern_loss_db, polarisation_loss_db
from app.chain.parts import Aerial

ANGLES = np.linspace(0, 180, 3601)


def aerial(**changes):
    frame = {"beamwidth_deg": 40, "front_to_back_db": 20, "gain_dbd": ((470, 6), (570, 9), (690, 12))}
    return Aerial(id="a", name="a", **{**frame, **changes})


DIPOLE = aerial(pattern="dipole", beamwidth_deg=78, front_to_back_db=0)
classes = st.builds(
    lambda width, back: aerial(beamwidth_deg=width, front_to_back_db=back),
    st.floats(10, 200),
    st.floats(6, 40),
)


def test_gain_is_linear_in_frequency_between_the_points():
    assert gain_dbd(aerial(), [470, 520, 570, 630, 690]) == pytest.approx([6, 7.5, 9, 10.5, 12])


def test_gain_beyond_the_table_falls_from_its_end():
    """Half and twice the end of the table are one octave off."""
    assert gain_dbd(aerial(), [235, 1380], fall_db_per_octave=40) == pytest.approx([6 - 40, 12 - 40])
    assert in_range(aerial(), [469, 470, 690, 691]).tolist() == [False, True, True, False]


@given(classes)
def test_class_pattern_is_what_defines_it(one):
    """0 dB on the axis, 3 dB at half the beamwidth, front to back at the back, falling all the way."""
    loss = pattern_loss_db(one, ANGLES)
    assert loss[0] == 0
    assert pattern_loss_db(one, one.beamwidth_deg / 2) == pytest.approx(3, abs=1e-9)
    assert loss[-1] == pytest.approx(one.front_to_back_db, abs=1e-9)
    assert (np.diff(loss) >= -1e-9).all()


@given(classes)
def test_pattern_is_continuous_and_the_same_on_both_sides(one):
    loss = pattern_loss_db(one, ANGLES)
    assert np.abs(np.diff(loss)).max() < 1.0  # dB per 0.05 degrees, narrowest beam of 10 degrees included
    assert pattern_loss_db(one, -ANGLES) == pytest.approx(loss)
    assert pattern_loss_db(one, 360 - ANGLES) == pytest.approx(loss)


def test_round_aerial_loses_nothing():
    assert not pattern_loss_db(aerial(beamwidth_deg=360, front_to_back_db=0), ANGLES).any()


def test_dipole_is_a_figure_of_eight():
    """cos²: 6.02 dB at 60 degrees, the same to the back as to the front, no deeper than the stated null."""
    assert pattern_loss_db(DIPOLE, [0, 60, 90, 120, 180], null_db=20) == pytest.approx(
        [0, 6.0206, 20, 6.0206, 0], abs=1e-4
    )


def test_dipole_with_upright_rods_is_round():
    assert not pattern_loss_db(DIPOLE, ANGLES, "vertical").any()


def test_angle_off_the_axis_goes_the_shorter_way():
    assert off_axis_deg([350, 10, 180, 0], 5).tolist() == [15, 5, 175, 5]
    assert off_axis_deg(90, np.arange(360)[:, None]).shape == (360, 1)


def test_polarisation():
    assert polarisation_loss_db("horizontal", "horizontal") == 0
    assert polarisation_loss_db("vertical", "vertical") == 0
    assert polarisation_loss_db("horizontal", "vertical", cross_polar_db=16) == 16
    assert polarisation_loss_db("vertical", "mixed") == pytest.approx(3.0103, abs=1e-4)


def test_batch_equals_one_by_one():
    one = aerial()
    singly = [float(pattern_loss_db(one, angle)) for angle in ANGLES]
    assert pattern_loss_db(one, ANGLES) == pytest.approx(singly, abs=1e-12)
