"""What the demo is there to show: aerials that are worth it on one roof and not on another."""

import pytest

from app.demo.relief import ensure_demo_relief
from app.demo.scenario import DEMO_ROOFS, ensure_demo
from app.planner import assess
from app.request import AssessRequest
from app.roof import Roof
from app.transmitters.store import Store
from terrain.mosaic import Ground

RANGE = ["range-1", "range-2", "range-3"]
STRAIT = ["strait-1", "strait-2", "strait-3", "strait-4"]


@pytest.fixture(scope="module")
def answers(tmp_path_factory):
    """The whole answer for each demo roof, by its name: loft dipole first, so it is the baseline."""
    folder = tmp_path_factory.mktemp("demo")
    store = Store.open(folder / "data")
    ensure_demo(store)
    ground = Ground.open([ensure_demo_relief(folder / "relief")], folder / "cache")
    return {
        roof.name: assess(AssessRequest(Roof(roof.latitude_deg, roof.longitude_deg)), store, ground)
        for roof in DEMO_ROOFS
    }


def chances(answer, chain):
    return {one["id"]: one["chains"][chain]["chance"] for one in answer["multiplexes"]}


def verdict(answer, candidate):
    return next(one for one in answer["verdicts"] if one["candidate"] == candidate)


def test_in_the_northern_fields_the_high_gain_aerial_with_amplifier_is_worth_it(answers):
    """A small aerial misses the far island's multiplexes, the strong mast's come with any aerial."""
    answer = answers["Northern fields"]
    loft = chances(answer, "loft-dipole")
    assert all(loft[name] > 0.95 for name in RANGE)
    assert all(loft[name] < 0.2 for name in STRAIT)
    best = answer["verdicts"][0]
    assert (best["baseline"], best["candidate"], best["answer"]) == ("loft-dipole", "high-gain-masthead", "worth it")
    assert best["gained"] == STRAIT
    assert best["lost"] == []
    assert best["expected_worth"] > 30  # not on the edge


def test_on_the_western_plain_nothing_is_worth_it(answers):
    """Behind the range all that can be had is secure with the loft dipole."""
    answer = answers["Western plain"]
    assert {one["answer"] for one in answer["verdicts"]} == {"not worth it"}
    loft = chances(answer, "loft-dipole")
    assert [name for name, chance in loft.items() if chance > 0.95] == [*RANGE, "spur-1"]
    assert all(chance < 0.05 for name, chance in chances(answer, "high-gain-masthead").items() if name in STRAIT)


def test_in_the_eastern_bay_the_relay_stands_in_for_the_strong_mast(answers):
    """The range hides the strong mast; the relay's rods stand upright, the far island's lie flat."""
    answer = answers["Eastern bay"]
    emissions = {one["id"]: one for one in answer["emissions"]}
    assert not emissions["northern-range-33"]["path"]["line_of_sight"]
    assert emissions["northern-range-33"]["chains"]["loft-dipole"]["chance"] < 0.05
    received = {one["id"]: one["chains"]["loft-dipole"]["emission"] for one in answer["multiplexes"]}
    assert [received[name] for name in RANGE] == ["eastern-hill-21", "eastern-hill-24", "eastern-hill-27"]
    polarisation = {name: one["pointings"][0]["polarisation"] for name, one in answer["chains"].items()}
    assert (polarisation["loft-dipole"], polarisation["high-gain"]) == ("vertical", "horizontal")
    assert verdict(answer, "high-gain-masthead")["answer"] == "worth it"
    assert verdict(answer, "high-gain-masthead")["expected_worth"] > 30
    # Turned to the far island, an aerial without amplifier puts the relay's multiplexes at risk.
    assert verdict(answer, "high-gain")["lost"] == RANGE


def test_two_masts_on_one_channel_are_told(answers):
    for answer in answers.values():
        assert any("channel 45" in caution for caution in answer["cautions"])
