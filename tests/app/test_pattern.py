import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.chain.pattern import checked_cut, checked_pattern
from app.errors import ChainError

ROUND = np.arange(0, 360, 10)
EIGHT = np.round(20 * np.sin(np.radians(ROUND)) ** 2, 2)


def pattern(*cuts):
    return checked_pattern("own", cuts)


def cut(loss=EIGHT, **keys):
    return checked_cut("own", ROUND, np.broadcast_to(loss, ROUND.shape), **keys)


@given(st.floats(-1080, 1080))
def test_angle_may_be_any_turn(angle_deg):
    one = cut()
    assert one.at(angle_deg) == pytest.approx(one.at(angle_deg + 360), abs=1e-6)


@given(st.permutations(range(36)))
def test_points_may_come_in_any_order_and_turn(order):
    turned = [ROUND[i] - 360 * (i % 2) for i in order]
    assert checked_cut("own", turned, EIGHT[list(order)]) == cut()


def test_between_bearings_it_is_linear_in_decibels_also_across_north():
    one = checked_cut("own", ROUND, np.where(ROUND == 350, 4.0, np.where(ROUND == 0, 0.0, 10.0)))
    assert one.at([355, -5, 352.5]) == pytest.approx([2, 2, 3])
    assert one.at(345) == pytest.approx(7)


def test_between_frequencies_it_is_linear_and_beyond_them_the_nearest():
    both = pattern(cut(0 * EIGHT, frequency_mhz=500), cut(EIGHT, frequency_mhz=600))
    loss = both.loss_db(90, [400.0, 500, 550, 575, 600, 700], "horizontal")
    assert loss == pytest.approx([0, 0, 10, 15, 20, 20])


def test_cuts_may_come_in_any_order_of_frequency():
    one, two, three = (cut(EIGHT * k, frequency_mhz=500 + 100 * k) for k in (0, 1, 0.5))
    f = np.linspace(450, 650, 9)
    assert pattern(one, two, three).loss_db(60, f, "vertical") == pytest.approx(
        pattern(two, three, one).loss_db(60, f, "vertical")
    )


def test_batch_equals_one_by_one():
    both = pattern(cut(EIGHT, frequency_mhz=500), cut(0.5 * EIGHT, frequency_mhz=600))
    angles, f = np.arange(-170, 170, 17)[:, np.newaxis] + np.array([0.0, 3, 90]), np.array([480.0, 560, 620])
    batch = both.loss_db(angles, f, "horizontal")
    singly = [[float(both.loss_db(a, f[i], "horizontal")) for i, a in enumerate(row)] for row in angles]
    assert batch == pytest.approx(np.array(singly))


def test_cut_for_how_the_aerial_is_mounted_is_taken():
    both = pattern(cut(EIGHT, polarisation="horizontal"), cut(0 * EIGHT, polarisation="vertical"))
    assert both.polarisations == ("horizontal", "vertical")
    assert both.loss_db(90, [600.0], "horizontal") == 20
    assert both.loss_db(90, [600.0], "vertical") == 0


def test_pattern_measured_the_other_way_is_not_used():
    with pytest.raises(ChainError, match="own: has no cut for the rods vertical: mount the aerial as it was measured"):
        pattern(cut(polarisation="horizontal")).loss_db(0, [600.0], "vertical")


def test_cross_polar_cut_is_kept_apart():
    both = pattern(cut(polarisation="horizontal"), cut(25, polarisation="horizontal", emission="vertical"))
    assert both.has_cross("horizontal")
    assert not both.has_cross("vertical")
    assert both.loss_db(0, [600.0], "horizontal") == 0
    assert both.cross_loss_db(0, [600.0], "horizontal") == 25


def test_pattern_can_be_a_key():
    assert len({pattern(cut()), pattern(cut())}) == 1


@pytest.mark.parametrize(
    ("angles", "losses", "message"),
    [
        (ROUND[:30], EIGHT[:30], r"own: has a gap from 290° to 0°: measure every 15° or closer, all round"),
        (np.delete(ROUND, 9), np.delete(EIGHT, 9), "has a gap from 80° to 100°"),
        ([0, 90, 180, 270], [0, 10, 20, 10], "has 4 bearings"),
        ([0], [0], "has 1 bearings"),
        ([], [], "has 0 bearings"),
        (ROUND, EIGHT - 1, "has a loss of -1 dB: use 0 to 100 dB"),
        (ROUND, EIGHT + 100, "has a loss of .* dB: use 0 to 100 dB against the strongest direction"),
        (ROUND * 2.0, EIGHT, "has an angle of 380°: use -180 to 180 or 0 to 360 degrees"),
        ([*ROUND, -90], [*EIGHT, 3], "says both 20 and 3 dB at 270°: keep one of them"),
        (ROUND, np.where(ROUND == 0, np.nan, EIGHT), "holds values that are no numbers"),
    ],
)
def test_no_round_is_refused_with_the_mend(angles, losses, message):
    with pytest.raises(ChainError, match=message):
        checked_cut("own", angles, losses)


@pytest.mark.parametrize(
    ("cuts", "message"),
    [
        ((), "has no cut round the horizon of its own polarisation"),
        ((cut(polarisation="horizontal", emission="vertical"),), "has no cut round the horizon of its own"),
        ((cut(), cut()), "has two cuts for the same frequency and polarisation: keep one"),
        ((cut(), cut(frequency_mhz=500)), "has cuts with and without a frequency: state the frequency"),
        (
            (cut(np.roll(np.abs(180 - ROUND) / 9, 11)),),
            "is strongest at 290°: count the angles from the",
        ),
    ],
)
def test_cuts_that_do_not_go_together_are_refused(cuts, message):
    with pytest.raises(ChainError, match=message):
        pattern(*cuts)
