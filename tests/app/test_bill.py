"""What changing to a chain costs: each amount reckoned by hand from the demo's prices."""

import dataclasses

import pytest

from app.bill import bill, bill_document, is_same_thing, total
from app.chain.catalogue import demo_chains
from app.chain.parts import Feeder, Splitter
from app.planner import assess
from app.request import AssessRequest
from app.roof import Roof

CHAINS = {chain.name: chain for chain in demo_chains()}
LOFT, SMALL, LARGE, AMPLIFIED = (CHAINS[one] for one in ("loft-dipole", "roof-yagi", "high-gain", "high-gain-masthead"))


def changed(chain, ident, **values):
    parts = tuple(dataclasses.replace(one, **values) if one.id == ident else one for one in chain.parts)
    return dataclasses.replace(chain, parts=parts)


def states(lines):
    return {line.part.id: line.state for line in lines if line.part}


def test_what_is_up_already_is_not_bought_again():
    """From the high-gain aerial to the same with an amplifier: amplifier 29, labour 25, visit 15."""
    assert total(bill(AMPLIFIED, LARGE, baseline_is_up=True)) == 29 + 25 + 15
    assert total(bill(LARGE, LARGE, baseline_is_up=True)) == 0
    assert bill(LARGE, LARGE, baseline_is_up=True) == ()


def test_without_word_of_what_is_up_the_baseline_is_set_off_whole():
    lines = bill(AMPLIFIED, LARGE, baseline_is_up=False)
    assert {line.state for line in lines} == {"bought", "set off"}
    assert lines[-1].pays == -LARGE.price
    assert total(lines) == AMPLIFIED.price - LARGE.price


def test_each_part_is_bought_kept_or_taken_down():
    lines = bill(AMPLIFIED, SMALL, baseline_is_up=True)
    assert states(lines) == {
        "long-yagi": "bought", "masthead-amplifier": "bought", "roof-feeder": "kept", "splitter": "kept",
        "outlet-living-room": "kept", "outlet-bedroom": "kept", "set": "kept", "short-yagi": "taken down",
    }  # fmt: skip
    assert total(lines) == 39 + 29 + 25 + 15


def test_with_nothing_up_everything_is_bought():
    assert total(bill(SMALL, None, baseline_is_up=True)) == SMALL.price


def test_what_is_up_already_by_its_own_word_costs_nothing():
    assert total(bill(dataclasses.replace(LARGE, already_up=True), SMALL, baseline_is_up=True)) == 0


@pytest.mark.parametrize(
    ("ident", "values", "note"),
    [
        ("roof-feeder", {"length_m": 30}, "up now are 15 m of copper-7mm"),
        ("splitter", {"ports": 4}, "the one up now differs in ports"),
        ("long-yagi", {"gain_dbd": ((470, 10), (694, 16))}, "the one up now differs in gain"),
    ],
)
def test_another_thing_under_the_same_id_is_bought(ident, values, note):
    """A longer feeder is no longer the one that is up, whatever it is called."""
    price = next(one.price for one in LARGE.parts if one.id == ident)
    lines = bill(changed(LARGE, ident, **values), LARGE, baseline_is_up=True)
    assert total(lines) == price + 20 + 15
    assert next(line.note for line in lines if line.part and line.part.id == ident) == note


def test_the_same_thing_elsewhere_or_better_known_is_kept():
    feeder = next(one for one in SMALL.parts if isinstance(one, Feeder))
    assert is_same_thing(dataclasses.replace(feeder, length_m=9, price=3, name="cut"), feeder)
    assert not is_same_thing(dataclasses.replace(feeder, cable="copper-5mm"), feeder)
    assert not is_same_thing(feeder, Splitter(id=feeder.id, name="s", ports=2))
    moved = changed(LARGE, "long-yagi", place="loft", beamwidth_deg=28, reflection=((470, 0.3), (694, 0.2)))
    assert total(bill(moved, LARGE, baseline_is_up=True)) == 20 + 15


def test_one_missing_price_leaves_the_sum_unknown_unless_it_is_kept():
    assert total(bill(changed(LARGE, "long-yagi", price=None), SMALL, baseline_is_up=True)) is None
    assert total(bill(changed(LARGE, "splitter", price=None), SMALL, baseline_is_up=True)) == 39 + 20 + 15
    assert total(bill(dataclasses.replace(LARGE, visit_price=None), SMALL, baseline_is_up=True)) is None


def test_the_answer_carries_the_bill_and_it_sums_to_the_price(demo_world):
    for now in ("roof-yagi", "nothing", None):
        answer = assess(AssessRequest(Roof(44.3, -37.4507), now=now), demo_world.store, demo_world.ground)
        for verdict in answer["verdicts"]:
            assert sum(line["pays"] for line in verdict["bill"]) == pytest.approx(verdict["price_difference"])


def test_a_line_says_how_much_of_a_feeder():
    rows = bill_document(bill(LARGE, None, baseline_is_up=True))
    assert next(row["detail"] for row in rows if row["part"] == "roof-feeder") == "15 m of copper-7mm"
