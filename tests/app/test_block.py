"""A block of flats from four answers."""

import numpy as np
import pytest

from app.chain.block import Answers, Arriving, propose
from app.chain.document import chain_from_document, chain_to_document
from app.chain.parts import Aerial, LaunchAmplifier
from app.chain.windows import ADJACENT_DB, SPREAD_DB, adjacent_step_db, level_window, spread_db
from app.errors import ChainError

AERIAL = Aerial(id="a", name="Yagi", gain_dbd=((470, 8), (694, 12)), beamwidth_deg=40, front_to_back_db=20)
F = np.array([482.0, 530.0, 578.0, 626.0, 674.0])
WINDOW = level_window("DVB-T", "64-QAM 2/3")


def arriving(level_dbuv=60.0):
    return Arriving(
        F,
        np.full(5, 8.0),
        np.full(5, level_dbuv),
        np.full(5, WINDOW.lowest_dbuv),
        np.full(5, WINDOW.highest_dbuv),
    )


@pytest.mark.parametrize("layout", ["star", "riser"])
@pytest.mark.parametrize(("outlets", "longest_m", "shortest_m"), [(1, 20, 20), (6, 30, 5), (16, 45, 10), (24, 60, 15)])
@pytest.mark.parametrize("level_dbuv", [50.0, 60.0, 70.0])
def test_every_channel_lies_inside_the_window_of_en_60728_1_at_every_outlet(
    layout, outlets, longest_m, shortest_m, level_dbuv
):
    """EN 60728-1: DVB-T 64-QAM 2/3 from 45 to 74 dB(µV) (S2); spread 12, adjacent 6 dB (common practice)."""
    made = propose(Answers(outlets, layout, longest_m, shortest_m, AERIAL), arriving(level_dbuv))
    assert made.level_dbuv.shape == (outlets, 5)
    assert made.level_dbuv.min() >= 45
    assert made.level_dbuv.max() <= 74
    assert max(spread_db(row) for row in made.level_dbuv) <= SPREAD_DB
    assert max(adjacent_step_db(row, F, 8.0) for row in made.level_dbuv) <= ADJACENT_DB
    assert made.findings == ()
    assert len(made.chain.outlet_names) == outlets
    assert chain_from_document(chain_to_document(made.chain)) == made.chain


def test_taps_of_a_riser_fall_with_the_level():
    made = propose(Answers(8, "riser", 60, 5, AERIAL), arriving())
    losses = [part.tap_loss_db for part in made.chain.parts if part.kind == "tap"]
    assert losses == sorted(losses, reverse=True)
    assert losses[0] > losses[-1]
    assert np.ptp(made.level_dbuv[:, 2]) <= 6


def test_strong_signals_need_no_amplifier():
    made = propose(Answers(1, "star", 10, 10, AERIAL), arriving(78.0))
    assert not any(isinstance(part, LaunchAmplifier) for part in made.chain.parts)
    assert made.findings == ()


def test_hopelessly_uneven_channels_are_told():
    uneven = Arriving(F, np.full(5, 8.0), np.array([40.0, 45, 60, 75, 90]), np.full(5, 45.0), np.full(5, 74.0))
    made = propose(Answers(4, "star", 20, 10, AERIAL), uneven)
    assert any("channels differ by" in one for one in made.findings)
    assert any("above its window: an attenuator or filter" in one for one in made.findings)


@pytest.mark.parametrize(
    ("answers", "message"),
    [
        ((0, "star", 10, 5), "0 outlets: use 1 to 64"),
        ((4, "ring", 10, 5), 'layout "ring": use star or riser'),
        ((4, "star", -3, 0), "a longest run of -3 m: use more than 0 to 500 m"),
        ((4, "star", 10, 12), "a shortest run of 12 m: use 0 to the longest run"),
    ],
)
def test_wrong_answers_say_what_is_allowed(answers, message):
    with pytest.raises(ChainError, match=message):
        Answers(*answers, AERIAL)


def test_no_channel_says_so():
    none = np.zeros(0)
    with pytest.raises(ChainError, match="no channel arrives at the aerial: choose another"):
        propose(Answers(4, "star", 10, 5, AERIAL), Arriving(none, none, none, none, none))
