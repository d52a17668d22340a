import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.chain.parts import Aerial
from app.chain.stacking import RULES_OF_THUMB, Stack, directivity_increase_db, stacked_gain_db, stacked_loss_db
from app.errors import ChainError

YAGI = Aerial(id="a", name="a", gain_dbd=((470, 6), (694, 10)), beamwidth_deg=40, front_to_back_db=20)
MHZ = np.array([474.0, 600, 690])
stacks = st.builds(
    lambda shape, spacing: Stack(*shape, spacing),
    st.sampled_from([(2, "horizontal"), (2, "vertical"), (4, "horizontal"), (4, "vertical"), (4, "square")]),
    st.floats(0.1, 20),
)


@given(stacks, st.floats(-180, 180), st.floats(50, 800))
def test_stacking_changes_nothing_on_the_axis_and_only_takes_off_it(stack, angle_deg, frequency_mhz):
    assert stacked_loss_db(stack, 0, frequency_mhz) == 0
    loss = stacked_loss_db(stack, angle_deg, frequency_mhz)
    assert 0 <= loss <= 20 + 1e-9
    assert stacked_loss_db(stack, -angle_deg, frequency_mhz) == pytest.approx(loss, abs=1e-6)


@given(stacks)
def test_group_is_never_less_directive_and_little_more_than_its_number(stack):
    """1 dB over 10 log n: what the best spacing adds to the trade's 3 and 6 dB for this pattern."""
    increase = directivity_increase_db(stack, YAGI, MHZ)
    assert (increase > 0).all()
    assert (increase < 10 * np.log10(stack.count) + 1).all()


def test_close_together_there_is_little_to_gain():
    near, far = (directivity_increase_db(Stack(2, "vertical", d), YAGI, MHZ) for d in (0.1, 1.0))
    assert (near < 0.4).all()
    assert (near < far).all()


def test_above_each_other_the_horizontal_pattern_stays():
    angles = np.arange(0, 181)
    assert not stacked_loss_db(Stack(2, "vertical", 1), angles, 600).any()
    assert stacked_loss_db(Stack(2, "horizontal", 1), angles, 600).any()
    assert np.array_equal(
        stacked_loss_db(Stack(4, "square", 1), angles, 600), stacked_loss_db(Stack(2, "horizontal", 1), angles, 600)
    )


def test_combiner_comes_off_the_gain():
    free = stacked_gain_db(Stack(2, "vertical", 1, combiner_loss_db=0), YAGI, 600)
    assert stacked_gain_db(Stack(2, "vertical", 1, combiner_loss_db=4), YAGI, 600) == pytest.approx(free - 4)


def test_upright_dipoles_swap_their_planes():
    """A pair side by side with rods upright is the pair above each other with rods flat, turned by 90°."""
    dipole = Aerial(
        id="d", name="d", gain_dbd=((470, 0), (694, 0)), beamwidth_deg=78, front_to_back_db=0, pattern="dipole"
    )
    upright = directivity_increase_db(Stack(2, "horizontal", 0.4), dipole, MHZ, "vertical")
    assert upright == pytest.approx(directivity_increase_db(Stack(2, "vertical", 0.4), dipole, MHZ, "horizontal"))


def test_batch_equals_one_by_one():
    singly = [float(stacked_gain_db(Stack(4, "square", 0.8), YAGI, f)[0]) for f in MHZ]
    assert stacked_gain_db(Stack(4, "square", 0.8), YAGI, MHZ) == pytest.approx(singly)


def test_rules_of_thumb_are_text_with_flags():
    assert {flag for _, flag in RULES_OF_THUMB} == {"T", "MH"}


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ((3, "vertical", 1), "3 stacked aerials: use 2 or 4"),
        ((2, "round", 1), 'layout "round" is not known: use horizontal, vertical, square'),
        ((2, "square", 1), "a square takes four aerials"),
        ((2, "vertical", 0), "spacing_m 0 is not possible: use 0.1 to 20 m"),
        ((2, "vertical", float("nan")), "spacing_m nan is not possible"),
        ((2, "vertical", 1, -1), "combiner_loss_db -1 is not possible"),
    ],
)
def test_no_stack_is_refused_with_the_mend(arguments, message):
    with pytest.raises(ChainError, match=message):
        Stack(*arguments)
