import dataclasses
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.assumptions import Assumptions
from app.chain.catalogue import demo_chains
from app.chain.parts import Aerial, Chain, Feeder, MastheadAmplifier, Outlet, Receiver, Splitter
from app.errors import RequestError
from app.link_budget import Signals, receive
from app.outlet_ledger import ledger_steps
from propagation.noise import man_made_fam_db

DEFAULTS = Assumptions()
AERIAL = Aerial(id="a", name="Yagi", gain_dbd=((170, 6), (470, 8), (690, 12)), beamwidth_deg=50, front_to_back_db=20)
OUTLET = Outlet(id="o", name="Kitchen")
SET = Receiver(id="r", name="set")
SIGNALS = Signals(
    np.array([474.0, 600.0, 690.0, 200.0]),
    np.array([7.61, 7.77, 7.61, 6.66]),
    np.array([20.1, 20.1, 16.0, 18.0]),
    np.array([7.0, 6.0, 7.0, 7.0]),
    np.array([100.0, 100.0, 240.0, 350.0]),
    ("horizontal", "vertical", "vertical", "mixed"),
    ("DVB-T", "DVB-T2", "DVB-T", "DVB-T"),
)
FIELD = np.array([50.0, 55.0, 60.0, 45.0])


def feeder(length_m, ident="f"):
    return Feeder(id=ident, name="downlead", cable="copper-7mm", length_m=length_m)


def amplifier(gain_db=20, noise_figure_db=2.0):
    return MastheadAmplifier(id="m", name="amp", gain_db=gain_db, noise_figure_db=noise_figure_db)


def chain(*parts, aerial=AERIAL, outlet=OUTLET, receiver=SET):
    return Chain("c", (aerial, *parts, outlet, receiver))


def got(one, field=FIELD, pointing=100.0, polarisation="horizontal", assumptions=DEFAULTS, surroundings="open"):
    return receive(one, SIGNALS, field, pointing, polarisation, assumptions, surroundings)


def ledger(one, index, **changes):
    frame = {"pointing_deg": 100.0, "polarisation": "horizontal", "assumptions": DEFAULTS, **changes}
    return ledger_steps(one, SIGNALS, index, FIELD, **frame)


def test_level_adds_up_by_hand():
    """474 MHz, on the axis, right polarisation, a direct lead: U = E + G − 20 log f + 33.68."""
    gain = 8 + 4 * (474 - 470) / (690 - 470)
    by_hand = 50 + gain - 20 * math.log10(474) + 33.68
    assert got(chain()).level_dbuv[0] == pytest.approx(by_hand, abs=0.01)


def test_lossless_chain_has_the_noise_figure_of_the_set():
    """Noise at a UHF outlet behind nothing: k T0 B + 7 dB; −105.16 + 7 + 108.75 = 10.59 dB(µV)."""
    assert got(chain()).noise_dbuv[0] == pytest.approx(-105.16 + 7 + 108.75, abs=0.01)


def test_stated_noise_figure_of_the_set_wins_over_the_systems():
    quiet = got(chain(receiver=Receiver(id="r", name="set", noise_figure_db=4)))
    assert got(chain()).noise_dbuv[:2] - quiet.noise_dbuv[:2] == pytest.approx([3, 2])


def test_passive_loss_costs_its_decibels_at_uhf():
    loss = Outlet(id="o", name="Kitchen", loss_db=4)
    assert got(chain()).cn_db[:3] - got(chain(outlet=loss)).cn_db[:3] == pytest.approx([4, 4, 4])


def test_masthead_amplifier_wins_back_what_the_downlead_loses():
    """8 dB loss and a 7 dB set behind a 2 dB amplifier of 20 dB: 15.0 − 2.77 = 12.23 dB of C/N (by hand)."""
    loss = Outlet(id="o", name="Kitchen", loss_db=8)
    gained = got(chain(amplifier(), outlet=loss)).cn_db[0] - got(chain(outlet=loss)).cn_db[0]
    assert gained == pytest.approx(15.0 - 2.77, abs=0.01)


@given(st.floats(0, 200), st.floats(0, 100), st.booleans())
def test_more_feeder_never_raises_cn(length_m, more_m, amplified):
    head = (amplifier(),) if amplified else ()
    short, long = (got(chain(*head, feeder(metres))).cn_db for metres in (length_m, length_m + more_m))
    assert (long <= short + 1e-9).all()


@given(st.floats(0, 40), st.floats(0, 200), st.floats(0, 20))
def test_noiseless_gain_ahead_of_loss_never_hurts(gain_db, length_m, figure_db):
    receiver = Receiver(id="r", name="set", noise_figure_db=figure_db)
    without = got(chain(feeder(length_m), receiver=receiver)).cn_db
    helped = got(chain(amplifier(gain_db, 0.0), feeder(length_m), receiver=receiver)).cn_db
    assert (helped >= without - 1e-9).all()


def test_an_amplifier_cannot_mend_the_noise_from_outside():
    """At 200 MHz in a city Fam is 13.06 dB (P.372 Table 1): it alone sets the ceiling of C/N."""
    assert man_made_fam_db(200, "city") == pytest.approx(13.06, abs=0.01)
    ceiling = got(chain()).level_dbuv[3] - (-105.74 + 108.75 + 13.06)
    perfect = chain(amplifier(40, 0.0))
    assert got(perfect, surroundings="urban").cn_db[3] == pytest.approx(ceiling, abs=0.02)


def test_noise_from_outside_rises_with_the_surroundings_and_ends_in_upper_uhf():
    """Fam of a city falls below 0 dB at 590 MHz: 76.8 − 27.7 log f (P.372 Table 1)."""
    cn = {where: got(chain(), surroundings=where).cn_db for where in ("open", "trees", "suburban", "urban")}
    assert cn["open"][3] == cn["trees"][3] > cn["suburban"][3] > cn["urban"][3]
    assert cn["open"][0] > cn["urban"][0]
    assert cn["open"][1:3].tolist() == cn["urban"][1:3].tolist()


def test_margin_is_cn_less_need_and_reserve():
    reception = got(chain(feeder(10)))
    assert reception.margin_db == pytest.approx(reception.cn_db - SIGNALS.required_cn_db - 3)
    none = got(chain(feeder(10)), assumptions=Assumptions({"reserve_db": 0}))
    assert none.margin_db - reception.margin_db == pytest.approx([3] * 4)


def test_loft_costs_the_covering():
    inside = dataclasses.replace(AERIAL, place="loft")
    assert got(chain()).cn_db - got(chain(aerial=inside)).cn_db == pytest.approx([5] * 4)


def test_cross_polar_loss_and_pattern_do_not_add_up():
    """Rec. ITU-R BT.419-3, Note 3, from memory: the larger holds. Mixed ones lose 3 dB anywhere."""
    round_aerial = dataclasses.replace(AERIAL, beamwidth_deg=360, front_to_back_db=0)
    lost = got(chain(aerial=round_aerial)).level_dbuv - got(chain()).level_dbuv
    pattern = got(chain()).pattern_loss_db
    assert pattern[1] == 0
    assert 16 < pattern[2] < 20
    assert lost == pytest.approx([0, 0, pattern[2] - 16, pattern[3]])
    upright = got(chain(), polarisation="vertical")
    assert (upright.level_dbuv - got(chain()).level_dbuv)[[0, 1, 3]] == pytest.approx([-16, 16, 0])


def test_worst_outlet_decides():
    drops = [feeder(5, "f1"), feeder(40, "f2")]
    rooms = [Outlet(id="o1", name="near"), Outlet(id="o2", name="far")]
    star = Chain("star", (AERIAL, Splitter(id="s", name="s", ports=2), drops[0], rooms[0], drops[1], rooms[1], SET))
    reception = got(star)
    assert reception.deciding_outlet.tolist() == [1, 1, 1, 1]
    assert [outlet.name for outlet in reception.outlets] == ["near", "far"]
    assert reception.margin_db.tolist() == reception.outlets[1].margin_db.tolist()
    assert (reception.outlets[0].margin_db > reception.margin_db).all()
    # 2-way splitter 4 dB (table) and 40 m of cable, by hand at 600 MHz: 0.4 (0.585 √600 + 0.0006 · 600)
    lost = 4 + 0.4 * (0.585 * math.sqrt(600) + 0.0006 * 600)
    assert got(chain()).level_dbuv[1] - reception.level_dbuv[1] == pytest.approx(lost, abs=1e-6)


def test_field_not_known_stays_not_known():
    reception = got(chain(feeder(10)), field=np.array([50, np.nan, 60, 45]))
    assert np.isnan(reception.margin_db).tolist() == [False, True, False, False]


def test_no_emission_gives_empty_arrays():
    none = Signals([], [], [], [], [], ())
    assert receive(demo_chains()[1], none, [], 0.0, "horizontal", DEFAULTS).margin_db.shape == (0,)


@pytest.mark.parametrize("one", demo_chains(), ids=lambda one: one.name)
def test_pointings_and_fields_in_a_batch_equal_one_by_one(one):
    pointings = np.arange(0.0, 360.0, 45)[:, None]
    batch = got(one, pointing=pointings)
    assert batch.margin_db.shape == (8, 4)
    for row, pointing in enumerate(pointings[:, 0]):
        single = got(one, pointing=float(pointing))
        for key in ("level_dbuv", "noise_dbuv", "cn_db", "margin_db", "off_axis_deg", "pattern_loss_db"):
            assert getattr(batch, key)[row] == pytest.approx(getattr(single, key), abs=1e-9)
    worlds = FIELD + np.array([[-3.0], [0.0], [6.0]])
    assert got(one, field=worlds).margin_db - got(one).margin_db == pytest.approx(
        np.broadcast_to([[-3.0], [0.0], [6.0]], (3, 4))
    )


@pytest.mark.parametrize("surroundings", ["open", "urban"])
@pytest.mark.parametrize("one", demo_chains(), ids=lambda one: one.name)
def test_ledger_adds_up_to_the_margin(one, surroundings):
    reception = got(one, surroundings=surroundings)
    for index in range(4):
        steps = ledger(one, index, surroundings=surroundings)
        assert steps[0].value_db == FIELD[index]
        assert steps[-1].total == pytest.approx(reception.margin_db[index], abs=1e-9)
        assert math.fsum(step.value_db for step in steps) == pytest.approx(reception.margin_db[index], abs=1e-9)
        totals = np.cumsum([step.value_db for step in steps])
        assert [step.total for step in steps] == pytest.approx(totals.tolist())
        assert all(step.source for step in steps)


def test_ledger_passes_the_level_and_cn_of_each_outlet():
    one = demo_chains()[3]
    reception = got(one)
    for outlet in reception.outlets:
        steps = ledger(one, 2, outlet=outlet.name)
        totals = {step.step: step.total for step in steps}
        assert totals[outlet.name] == pytest.approx(outlet.level_dbuv[2])
        assert totals["noise from outside"] == pytest.approx(outlet.cn_db[2])


def test_ledger_shows_gain_of_an_amplifier_and_the_noise_it_leaves():
    """What stands at the set over its own noise: gain times the chain's factor over that of the set."""
    steps = {step.step: step.value_db for step in ledger(chain(amplifier(20, 2)), 0)}
    assert steps["amp"] == 20
    # by hand: 100 · (1.585 + 4.012 / 100) = 162.5 against 5.012: 15.11 dB
    assert steps["noise the amplifier leaves"] == pytest.approx(-10 * math.log10(162.5 / 5.012), abs=0.01)
    assert "noise the amplifier leaves" not in {step.step for step in ledger(chain(), 0)}


def test_ledger_names_sources():
    loft = {step.step: step.source for step in ledger(demo_chains()[0], 1)}
    assert loft["roof covering"] == "assumption loft_covering_db"
    assert "cross_polar_db" in loft["polarisation"]
    assert loft["reserve"] == "assumption reserve_db"
    assert loft["C/N that the mode needs"] == "DVB-T2"
    far = {step.step: step.source for step in ledger(demo_chains()[1], 3)}
    assert "aerial_out_of_range_db_per_octave" in far["gain of Short UHF Yagi"]


def test_changed_assumptions_reach_the_ledger():
    changed = Assumptions({"loft_covering_db": 12, "cross_polar_db": 20})
    steps = {step.step: step.value_db for step in ledger(demo_chains()[0], 1, assumptions=changed)}
    assert steps["roof covering"] == -12
    assert steps["polarisation"] == -20


def test_rows_of_different_length_are_refused():
    with pytest.raises(RequestError, match="signals: bandwidth_mhz has 1 rows, frequency_mhz has 2"):
        Signals([474, 482], [7.6], [20, 20], [7, 7], [0, 0], ("horizontal", "horizontal"))
