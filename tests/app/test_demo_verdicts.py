"""What the demo is there to show: aerials that are worth it on one roof and not on another."""

from dataclasses import replace

import pytest

from app.demo.relief import ensure_demo_relief
from app.demo.scenario import DEMO_ROOFS, ensure_demo
from app.planner import assess, stored_chain
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
        (shared,) = (one for one in answer["emissions"] if one["id"] == "far-island-45")
        assert any("Southern Spur" in caution for caution in shared["cautions"])


def test_at_the_backbone_foot_directivity_brings_back_what_the_channel_s_other_mast_takes(answers):
    """Southern Spur stands nearly behind an aerial turned to the far island, and 20 times as strong.

    On the free channels the small aerial's margins are above 0; on the shared one they are below, and the
    aerial that rejects more to the back lifts it by more than its gain lifts the others.
    """
    emissions = {one["id"]: one["chains"] for one in answers["Backbone foot"]["emissions"]}
    shared, free = emissions["far-island-45"], emissions["far-island-42"]
    held = shared["roof-yagi"]["held_back_by"]
    assert (held["limit"], held["emission"], held["state"]) == ("interference", "southern-spur-45", "b")
    assert held["bearing_deg"] == pytest.approx(233.7, abs=1.0)  # from the map: 15.3 km west, 11.4 km south
    assert shared["roof-yagi"]["margin_db"] < 0 < free["roof-yagi"]["margin_db"]
    gain_alone = free["high-gain"]["margin_db"] - free["roof-yagi"]["margin_db"]
    directivity = shared["high-gain"]["margin_db"] - shared["roof-yagi"]["margin_db"]
    assert shared["high-gain"]["margin_db"] > 3
    assert directivity > gain_alone + 1
    # The amplifier lifts the free channels by far more than the shared one.
    amplified = shared["high-gain-masthead"]["margin_db"] - shared["high-gain"]["margin_db"]
    assert amplified < 3 < free["high-gain-masthead"]["margin_db"] - free["high-gain"]["margin_db"]


def test_verdict_says_that_directivity_cures_interference_and_an_amplifier_does_little(tmp_path):
    store = Store.open(tmp_path / "data")
    ensure_demo(store)
    ground = Ground.open([ensure_demo_relief(tmp_path / "relief")], tmp_path / "cache")
    place = next(one for one in DEMO_ROOFS if one.name == "Backbone foot")
    small = stored_chain(store, "roof-yagi")
    amplifier = next(part for part in stored_chain(store, "high-gain-masthead").parts if part.kind.startswith("masth"))
    amplified = replace(small, name="amplified", parts=(small.parts[0], amplifier, *small.parts[1:]))
    answer = assess(
        AssessRequest(
            Roof(place.latitude_deg, place.longitude_deg),
            chains=(small, amplified, "high-gain"),
            now="roof-yagi",
            wanted=("strait-3",),
        ),
        store,
        ground,
    )
    reason = verdict(answer, "high-gain")["reason"]
    assert "1 held back by interference (directivity cures it, gain or an amplifier alone does little)" in reason
    shared = next(one for one in answer["emissions"] if one["id"] == "far-island-45")["chains"]
    assert shared["amplified"]["margin_db"] < 1.5 < 3 < shared["high-gain"]["margin_db"]
