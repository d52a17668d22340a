"""Chains as trees: who feeds whom, what is refused, how signal and supply run."""

import dataclasses

import pytest

from app.chain.document import chain_from_document, chain_to_document
from app.chain.parts import (
    Aerial,
    Attenuator,
    Chain,
    Combiner,
    Feeder,
    Filter,
    FlyLead,
    LaunchAmplifier,
    MastheadAmplifier,
    Outlet,
    PowerInserter,
    Receiver,
    Splitter,
    Switch,
    Tap,
)
from app.chain.pattern import Cut
from app.chain.powering import as_powered, powering
from app.errors import ChainError

AERIAL = Aerial(id="a", name="Yagi", gain_dbd=((470, 6), (694, 10)), beamwidth_deg=50, front_to_back_db=18)
SECOND = dataclasses.replace(AERIAL, id="b", name="Other", pointing_deg=200)
SET = Receiver(id="r", name="set")


def outlet(number, **more):
    return Outlet(id=f"o{number}", name=f"Room {number}", **more)


def feeder(ident="f", length_m=10, **more):
    return Feeder(id=ident, name=f"lead {ident}", cable="copper-7mm", length_m=length_m, **more)


def tap(ident, **more):
    return Tap(id=ident, name=ident, tap_loss_db=12, through_loss_db=1.5, **more)


def masthead(**more):
    return MastheadAmplifier(id="m", name="mast amp", gain_db=16, noise_figure_db=2, **more)


def inserter(supply_v=12, most_ma=100, **more):
    return PowerInserter(id="p", name="inserter", supply_v=supply_v, most_ma=most_ma, **more)


def test_list_after_a_full_splitter_goes_back_to_the_one_before():
    two = Splitter(id="s", name="s", ports=2)
    chain = Chain("c", (AERIAL, two, dataclasses.replace(two, id="t", name="t"), outlet(1), outlet(2), outlet(3), SET))
    assert [[part.id for part in chain.run_to(name)] for name in chain.outlet_names] == [
        ["s", "t", "o1"],
        ["s", "t", "o2"],
        ["s", "o3"],
    ]


def test_riser_of_taps_goes_on_through():
    chain = Chain(
        "riser",
        (
            AERIAL,
            feeder(),
            tap("t1"),
            outlet(1, after=("t1",)),
            feeder("g", after=("t1",), port="through"),
            tap("t2"),
            outlet(2, after=("t2",)),
            outlet(3, after=("t2",), port="through"),
            SET,
        ),
    )
    assert [part.id for part in chain.run_to("Room 3")] == ["f", "t1", "g", "t2", "o3"]
    assert chain_from_document(chain_to_document(chain)) == chain


def test_two_aerials_meet_in_a_combiner_by_their_place_in_the_list():
    chain = Chain("two", (AERIAL, feeder(), SECOND, Combiner(id="k", name="combiner"), outlet(1), SET))
    assert chain.tree.fed_by["k"] == ("f", "b")
    assert [part.id for part in chain.run_to("Room 1", "b")] == ["k", "o1"]
    assert [aerial.id for aerial in chain.aerials] == ["a", "b"]
    assert chain_from_document(chain_to_document(chain)) == chain


def test_set_may_stand_behind_one_outlet_and_fly_leads_before_it():
    own = Receiver(id="own", name="quiet set", noise_figure_db=4, after=("l",))
    lead = FlyLead(id="l", name="lead", cable="copper-mini", length_m=3)
    chain = Chain("c", (AERIAL, Splitter(id="s", name="s", ports=2), outlet(1), lead, own, outlet(2), SET))
    assert chain.tree.sets == {"Room 1": own, "Room 2": SET}
    assert chain.tree.leads["Room 1"] == (lead,)


@pytest.mark.parametrize(
    ("parts", "message"),
    [
        (
            (AERIAL, feeder(after=("g",)), feeder("g", after=("f",)), outlet(1, after=("a",)), SET),
            r'feeder "lead f": feeds itself in a loop \(f, g\): let the signal run one way, from an aerial',
        ),
        (
            (AERIAL, feeder(after=("nowhere",)), outlet(1), SET),
            r'feeder "lead f": is fed by "nowhere", which is no part of the chain: use one of a, f, o1',
        ),
        (
            (AERIAL, SECOND, feeder(after=("a", "b")), outlet(1), SET),
            r'feeder "lead f": is fed by 2 parts: put a combiner or a switch before it',
        ),
        (
            (AERIAL, Switch(id="w", name="switch", after=("a",)), outlet(1), SET),
            r'switch "switch": is fed by 1 part: name two or more aerials or feeders in after',
        ),
        (
            (AERIAL, feeder(), outlet(1, after=("f",)), outlet(2, after=("f",)), SET),
            r'feeder "lead f": feeds 2 parts: put a splitter after it',
        ),
        (
            (AERIAL, tap("t"), outlet(1, after=("t",)), outlet(2, after=("t",)), SET),
            r'tap "t": has 1 ports and feeds 2 outlets: use a larger one or remove an outlet',
        ),
        (
            (AERIAL, feeder(), outlet(1, port="through"), SET),
            r'outlet "Room 1": is fed by the way through of a part that is no tap: leave out port',
        ),
        (
            (AERIAL, outlet(1), feeder(after=("o1",)), SET),
            r'feeder "lead f": is plugged into outlet "Room 1": only a fly lead or a receiver goes there',
        ),
    ],
)
def test_tree_that_no_signal_can_pass_names_part_and_mend(parts, message):
    with pytest.raises(ChainError, match=message):
        Chain("c", parts)


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: tap("t", ports=4, price=-1), r'tap "t": price -1 is not possible'),
        (
            lambda: Tap(id="t", name="t", ports=4, tap_loss_db=6, through_loss_db=1),
            r"gives out 1.80 of what it gets: use a larger tap_loss_db",
        ),
        (lambda: Filter(id="x", name="x", loss_db=((470, 1),)), r"the loss table has one point: give at least two"),
        (
            lambda: Filter(id="x", name="x", loss_db=((700, 1), (470, 30))),
            r"470 MHz follows 700 MHz: sort it by rising frequency",
        ),
        (lambda: Attenuator(id="x", name="x", loss_db=-3), r'attenuator "x": loss_db -3 is not possible'),
        (lambda: masthead(draws_ma=-1), r"draws_ma -1 is not possible"),
        (lambda: inserter(supply_v=230), r"supply_v 230 is not possible: use 1 to 60 V, safety extra-low voltage"),
        (
            lambda: dataclasses.replace(
                AERIAL, pattern="measured", cuts=(Cut((0, 5, 10, 15, 340, 345, 350, 355), (0,) * 8),)
            ),
            r'aerial "Yagi": has a gap from 15° to 340°: measure every 15° or closer, all round',
        ),
        (
            lambda: dataclasses.replace(AERIAL, pattern="measured"),
            r'aerial "Yagi": pattern and cuts do not go together: give cuts with pattern "measured"',
        ),
        (
            lambda: dataclasses.replace(AERIAL, stacked=2),
            r"is stacked without a spacing: give stack_spacing_m",
        ),
        (
            lambda: dataclasses.replace(AERIAL, gain_includes_mismatch=False),
            r"stated without mismatch, and no match was measured: give reflection",
        ),
    ],
)
def test_impossible_parts_are_refused_with_the_mend(make, message):
    with pytest.raises(ChainError, match=message):
        make()


def powered_chain(*between, supply=None, **amplifier):
    return Chain(
        "c",
        (
            AERIAL,
            masthead(**{"draws_ma": 50, "needs_v": 11.5, **amplifier}),
            feeder(length_m=20),
            *between,
            supply or inserter(),
            outlet(1),
            SET,
        ),
    )


def test_supply_reaches_the_amplifier_less_the_drop_on_the_feeder():
    """20 m of 35 ohms per km at 50 mA: 12 − 0.02 · 35 · 0.05 = 11.965 V (by hand)."""
    (one,) = powering(powered_chain())
    assert one.is_fed
    assert one.voltage_v == pytest.approx(12 - 0.02 * 35 * 0.05)
    assert as_powered(powered_chain()) == powered_chain()


def test_part_that_blocks_the_supply_is_named_and_the_chain_is_shown_without_it():
    blocked = powered_chain(Attenuator(id="x", name="pad", loss_db=3))
    (one,) = powering(blocked)
    assert one.blocked_by.id == "x"
    assert one.message.startswith('attenuator "pad" lets no supply through from "inserter" to "mast amp": use one that')
    assert [part.powered for part in as_powered(blocked).parts if part.id == "m"] == [False]


def test_blocking_splitter_is_named():
    splitter = Splitter(id="s", name="two-way", ports=2)
    parts = (AERIAL, masthead(draws_ma=50), splitter, inserter(), outlet(1), outlet(2), SET)
    (one,) = powering(Chain("c", parts))
    assert one.message.startswith('splitter "two-way" lets no supply through')
    passing = dataclasses.replace(splitter, passes_dc=True)
    assert powering(Chain("c", (*parts[:2], passing, *parts[3:])))[0].is_fed


@pytest.mark.parametrize(
    ("supply", "amplifier", "message"),
    [
        (inserter(most_ma=40), {}, r'power-inserter "inserter" gives 40 mA and 50 mA are drawn: use a stronger'),
        (inserter(), {"needs_v": 12}, r"needs 12 V and gets 12.0 V, 0.0 V are lost on the way: use a thicker"),
    ],
)
def test_weak_supply_says_so(supply, amplifier, message):
    (one,) = powering(powered_chain(supply=supply, **amplifier))
    with pytest.raises(AssertionError, match=message):
        assert not one.message, one.message


def test_no_supply_at_all_says_so_and_own_supply_asks_for_none():
    chain = Chain("c", (AERIAL, masthead(draws_ma=50), outlet(1), SET))
    assert "has no supply: put a power inserter on its feeder" in powering(chain)[0].message
    assert powering(Chain("c", (AERIAL, masthead(), outlet(1), SET))) == ()


def test_current_of_all_adds_up_on_a_shared_feeder():
    launch = LaunchAmplifier(id="l", name="launch", gain_db=10, noise_figure_db=5, draws_ma=100, passes_dc=True)
    chain = Chain(
        "c", (AERIAL, masthead(draws_ma=50), launch, feeder(length_m=100), inserter(most_ma=200), outlet(1), SET)
    )
    by_id = {one.part.id: one for one in powering(chain)}
    assert by_id["l"].voltage_v == pytest.approx(12 - 3.5 * 0.15)
    assert by_id["m"].voltage_v == pytest.approx(12 - 3.5 * 0.15)
