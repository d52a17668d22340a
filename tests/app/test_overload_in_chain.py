"""Strong signals in a chain: what amplifiers and sets make of all that reaches them, through the tree."""

import dataclasses

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.assumptions import Assumptions
from app.chain.flow import flow, settings
from app.chain.parts import (
    Aerial,
    Chain,
    Combiner,
    Feeder,
    Filter,
    FlyLead,
    MastheadAmplifier,
    Outlet,
    Receiver,
    Splitter,
    Switch,
)
from app.link_budget import Signals, is_overload, receive
from app.outlet_ledger import book_of, ledger_steps
from propagation.units import db_from_ratio

DEFAULTS = Assumptions()
ROUND = Aerial(id="a", name="round", gain_dbd=((400, 0), (800, 0)), beamwidth_deg=360, front_to_back_db=0)
YAGI = dataclasses.replace(ROUND, id="y", name="Yagi", beamwidth_deg=40, front_to_back_db=25)
OUTLET = Outlet(id="o", name="Kitchen")
SET = Receiver(id="r", name="set")
F = np.array([482.0, 498.0, 514.0, 530.0, 546.0, 562.0, 690.0])
WEAK = 6  # the last row: another mast


def signals(bearing_of_the_weak=0.0):
    count = len(F)
    return Signals(
        F,
        np.full(count, 7.61),
        np.full(count, 20.0),
        np.full(count, 7.0),
        np.array([0.0] * 6 + [bearing_of_the_weak]),
        ("horizontal",) * count,
    )


def amplifier(gain_db=20, rated_output_dbuv=104.0, **more):
    return MastheadAmplifier(
        id="m", name="amp", gain_db=gain_db, noise_figure_db=2, rated_output_dbuv=rated_output_dbuv, **more
    )


def chain(*parts, aerial=ROUND):
    return Chain("c", (aerial, *parts, OUTLET, SET))


SIGNALS = signals()


def got(one, field, pointing=0.0, assumptions=DEFAULTS, signals=SIGNALS, **more):
    return receive(one, signals, field, pointing, "horizontal", assumptions, **more)


def field_for_output(level_dbuv, gain_db=20):
    """Field of each of six strong ones that gives that level behind the amplifier; the weak one 30 dB below."""
    field = level_dbuv - gain_db + 20 * np.log10(F) - 33.68
    field[WEAK] -= 30
    return field


def test_six_carriers_of_94_at_a_rated_104_leave_62_7_db():
    """IMD law of the trade (MH): 2 · (134 − 101.78) − 1.76 = 62.7 dB; by hand 94 + 10 log 6 = 101.78 dB(µV)."""
    reception = got(chain(amplifier()), field_for_output(94.0))
    over_products = reception.level_dbuv - reception.intermodulation_dbuv
    assert over_products[:6] == pytest.approx([62.68] * 6, abs=0.05)
    assert over_products[WEAK] == pytest.approx(62.68 - 30, abs=0.05)
    tough = Chain("c", (ROUND, amplifier(), OUTLET, dataclasses.replace(SET, most_total_dbuv=130)))
    assert got(tough, field_for_output(94.0)).headroom_db == pytest.approx([134 - 12 - 101.78] * 7, abs=0.02)


def test_amplifier_without_a_rating_has_no_products():
    reception = got(chain(amplifier(rated_output_dbuv=None)), field_for_output(94.0))
    assert np.isneginf(reception.intermodulation_dbuv).all()


def test_a_filter_saves_an_amplifier_from_a_mobile_network():
    """140 dB(µV/m) at 758 to 788 MHz on the axis; a filter of 25 dB there and 1 dB in the band."""
    field = field_for_output(70.0)
    near = Assumptions({"mobile_700_dbuv_m": 125})
    guard = Filter(id="x", name="filter", loss_db=((470, 1), (694, 1.5), (740, 30), (900, 30)))
    bare, saved = (got(chain(*parts, amplifier()), field, assumptions=near) for parts in ((), (guard,)))
    calm = got(chain(amplifier()), field)
    assert bare.headroom_db[0] < 0 < saved.headroom_db[0]
    assert is_overload(bare).all()
    assert calm.margin_db[0] > saved.margin_db[0] > bare.margin_db[0]


def test_pointing_decides_what_loads_the_amplifier():
    field = field_for_output(112.0)
    field[WEAK] += 10
    aside = signals(bearing_of_the_weak=120.0)
    towards, away = (
        got(chain(amplifier(), aerial=YAGI), field, pointing=where, signals=aside) for where in (0.0, 120.0)
    )
    assert towards.headroom_db[0] < away.headroom_db[0] - 15
    assert away.margin_db[WEAK] > towards.margin_db[WEAK]


@given(st.floats(60, 100))
def test_there_is_a_gain_above_which_more_of_it_lowers_the_margin(input_dbuv):
    """Design of the check: with overload on, the margin over gain rises, then falls."""
    field = field_for_output(input_dbuv, 0)
    margins = [
        float(
            got(chain(amplifier(gain), Feeder(id="f", name="f", cable="copper-7mm", length_m=100)), field).margin_db[
                WEAK
            ]
        )
        for gain in range(0, 61, 3)
    ]
    best = int(np.argmax(margins))
    assert best < len(margins) - 1
    assert margins[-1] < margins[best] - 10
    assert (np.diff(margins[best:]) <= 1e-9).all()


def test_amplifier_can_make_it_worse_than_none():
    field = field_for_output(100.0, 0)
    without, with_it = got(chain(), field), got(chain(amplifier(gain_db=30)), field)
    assert with_it.margin_db[WEAK] < without.margin_db[WEAK]
    assert with_it.headroom_db[WEAK] < 0 <= without.headroom_db[WEAK] + 10


def test_set_gives_up_above_its_ceiling():
    """One channel of 95 dB(µV) and nothing else: headroom 100.75 − 95 (A/74, from memory)."""
    one = Signals([600.0], [7.61], [20.0], [7.0], [0.0], ("horizontal",))
    field = np.array([95 + 20 * np.log10(600.0) - 33.68])
    assert got(chain(), field, signals=one).headroom_db[0] == pytest.approx(5.75, abs=0.01)
    tough = Chain("c", (ROUND, OUTLET, dataclasses.replace(SET, most_total_dbuv=110)))
    assert got(tough, field, signals=one).headroom_db[0] == pytest.approx(15, abs=0.01)


def test_what_fades_still_loads():
    field = field_for_output(110.0)
    faded = got(chain(amplifier()), field - 20, load_dbuv_m=field)
    full = got(chain(amplifier()), field)
    assert faded.headroom_db == pytest.approx(full.headroom_db)
    assert faded.intermodulation_dbuv == pytest.approx(full.intermodulation_dbuv)
    assert full.level_dbuv - faded.level_dbuv == pytest.approx([20] * 7)


def test_named_outlet_decides_alone():
    far = Feeder(id="f", name="f", cable="copper-mini", length_m=60)
    parts = (ROUND, Splitter(id="s", name="s", ports=2), OUTLET, far, Outlet(id="p", name="Attic"), SET)
    both, kitchen = Chain("c", parts), Chain("c", parts, deciding_outlet="Kitchen")
    field = field_for_output(60.0, 0)
    assert (got(kitchen, field).margin_db > got(both, field).margin_db).all()
    assert (got(kitchen, field).deciding_outlet == 0).all()


def two(joint):
    second = dataclasses.replace(YAGI, id="z", name="second", pointing_deg=120.0)
    return Chain("c", (YAGI, second, joint, OUTLET, SET))


def test_powers_of_two_aerials_add_in_a_combiner():
    """Two alike aerials the same way: + 3.01 dB less the combiner's 4 dB (power sum, D)."""
    same = dataclasses.replace(YAGI, id="z", pointing_deg=0.0)
    joined = Chain("c", (YAGI, same, Combiner(id="k", name="k", loss_db=4), OUTLET, SET))
    field = field_for_output(60.0, 0)
    alone = got(chain(aerial=YAGI), field)
    assert got(joined, field).level_dbuv - alone.level_dbuv == pytest.approx([10 * np.log10(2) - 4] * 7)


def test_switch_takes_the_better_aerial_for_each_emission_and_a_combiner_costs_more():
    aside = signals(bearing_of_the_weak=120.0)
    field = field_for_output(50.0, 0)
    alone = got(chain(aerial=YAGI), field, signals=aside)
    switched = got(two(Switch(id="w", name="w", loss_db=1)), field, signals=aside)
    joined = got(two(Combiner(id="k", name="k", loss_db=4)), field, signals=aside)
    assert switched.level_dbuv[:6] - alone.level_dbuv[:6] == pytest.approx([-1] * 6)
    assert switched.level_dbuv[WEAK] - alone.level_dbuv[WEAK] > 15
    assert switched.serving_aerial.tolist() == [0] * 6 + [1]
    assert (switched.margin_db > joined.margin_db).all()


def test_fly_lead_costs_its_loss_at_the_set_but_not_at_the_socket():
    lead = FlyLead(id="l", name="lead", cable="copper-mini", length_m=20)
    field = field_for_output(40.0, 0)
    bare, led = got(chain(), field), got(Chain("c", (ROUND, OUTLET, lead, SET)), field)
    loss_db = 0.2 * (1.02 * np.sqrt(F) + 0.0015 * F)
    assert led.level_dbuv == pytest.approx(bare.level_dbuv)
    assert bare.cn_db - led.cn_db == pytest.approx(loss_db, abs=0.01)


@pytest.mark.parametrize(
    "one",
    [
        chain(amplifier()),
        two(Switch(id="w", name="w")),
        two(Combiner(id="k", name="k", bands_mhz=((470, 600), (600, 800)))),
        Chain("c", (ROUND, amplifier(), OUTLET, FlyLead(id="l", name="lead", cable="series-6", length_m=2), SET)),
        chain(amplifier(powered=False)),
    ],
)
def test_ledger_adds_up_to_the_margin_with_products_leads_and_two_aerials(one):
    field = field_for_output(100.0)
    aside = signals(bearing_of_the_weak=120.0)
    reception = got(one, field, signals=aside)
    book = book_of(one, aside, field, 0.0, "horizontal", DEFAULTS)
    for index in range(len(F)):
        steps = book.steps(index)
        assert steps[-1].total == pytest.approx(reception.margin_db[index], abs=1e-9)
        assert all(step.source for step in steps)
    single = ledger_steps(one, aside, 3, field, 0.0, "horizontal", DEFAULTS)
    assert single == book.steps(3)


def test_flow_of_a_tree_is_the_cascade_rule_of_each_run():
    """Friis 1944 along each run: amplifier 20 dB and 2 dB, 10 dB of loss behind it, by hand 1.585 + 9 / 100."""
    pad = Outlet(id="o", name="Kitchen", loss_db=10)
    one = Chain("c", (ROUND, amplifier(), pad, SET))
    (setting,) = settings(one)
    (at,) = flow(one, np.array([600.0]), setting).outlets
    assert db_from_ratio(at.at.gain["a"]) == pytest.approx([10])
    assert at.at.noise / at.at.gain["a"] == pytest.approx([10**0.2 + 9 / 100])


def test_batch_of_pointings_equals_one_by_one_with_overload():
    aside = signals(bearing_of_the_weak=120.0)
    one = two(Switch(id="w", name="w"))
    loud = chain(amplifier(), aerial=YAGI)
    pointings = np.arange(0.0, 360.0, 45)[:, None]
    for each in (one, loud):
        batch = got(each, field_for_output(105.0), pointing=pointings, signals=aside)
        for row, pointing in enumerate(pointings[:, 0]):
            alone = got(each, field_for_output(105.0), pointing=float(pointing), signals=aside)
            for key in ("level_dbuv", "intermodulation_dbuv", "margin_db", "headroom_db"):
                assert getattr(batch, key)[row] == pytest.approx(getattr(alone, key), abs=1e-9)
