"""The whole way of a request on the demo: document, decisions, refusals."""

import json
import math
from dataclasses import replace

import numpy as np
import pytest

from app import planner
from app.cautions import CAUTIONS
from app.chance import DRAWS
from app.demo.scenario import DEMO_ROOFS
from app.errors import ChainError, NotStoredError, RequestError, RoofError
from app.planner import assess, stored_chain
from app.request import AssessRequest
from app.roof import Roof
from terrain.errors import CoverageError

PLACES = {roof.name: Roof(roof.latitude_deg, roof.longitude_deg) for roof in DEMO_ROOFS}
NORTH, WEST, BAY, SHORE, FOOT = PLACES.values()


@pytest.fixture(scope="module")
def ask(demo_world):
    def asked(roof=NORTH, **wishes):
        return assess(AssessRequest(roof, **wishes), demo_world.store, demo_world.ground)

    return asked


def cell(answer, multiplex, chain):
    return next(one for one in answer["multiplexes"] if one["id"] == multiplex)["chains"][chain]


def test_document_has_the_shape_of_the_interface(ask):
    answer = ask(now="roof-yagi")
    assert set(answer) == {
        "roof", "multiplexes", "emissions", "chains", "verdicts", "readings", "assumptions", "cautions", "sources",
        "credits",
    }  # fmt: skip
    emission = answer["emissions"][0]
    assert {"id", "transmitter", "multiplex", "channel", "frequency_mhz", "system", "mode", "erp_kw", "polarisation",
            "bearing_deg", "distance_km", "path", "field", "chains"} <= set(emission)  # fmt: skip
    assert {"sentence", "line_of_sight", "clearance_ratio", "terrain_clearance_angle_deg", "effective_height_m",
            "diffraction_loss_db", "zones", "kind"} <= set(emission["path"])  # fmt: skip
    assert {"free_space_dbuv_m", "p1546_dbuv_m", "p1812_dbuv_m", "difference_db", "apart", "used_dbuv_m", "method",
            "method_reason", "sigma_db", "fade_db", "enhancement_db"} == set(emission["field"])  # fmt: skip
    outlet = emission["chains"]["roof-yagi"]["outlets"][0]
    assert {"name", "level_dbuv", "level_median_dbuv", "cn_db", "required_cn_db", "margin_db", "headroom_db", "chance",
            "held_back_by",
            "ledger"} == set(outlet)  # fmt: skip
    assert {"baseline", "candidate", "answer", "expected_worth", "chance_of_gain", "expected_extra", "price_difference",
            "price_per_extra", "break_even_price", "gained", "lost", "now_secure", "cheapest_equal", "measure_next",
            "reason"} <= set(answer["verdicts"][0])  # fmt: skip
    json.dumps(answer, allow_nan=False)


@pytest.mark.parametrize("roof", [BAY, FOOT])
@pytest.mark.parametrize("availability_percent", [50, 90, 99])
def test_a_multiplex_is_as_likely_as_its_best_channel_or_more(ask, roof, availability_percent):
    """Fréchet's bounds of a union: no less than the greatest, no more than the sum (which 4096 draws blur)."""
    answer = ask(roof, availability_percent=availability_percent)
    emissions = {one["id"]: one["chains"] for one in answer["emissions"]}
    for multiplex in answer["multiplexes"]:
        for name, found in multiplex["chains"].items():
            each = [emissions[one][name]["chance"] for one in multiplex["emissions"]]
            assert max(each) <= found["chance"] <= sum(each) + 0.003


def test_what_is_written_as_secure_is_counted_as_secure(demo_world, monkeypatch):
    """A chance of 0.94996 is written 0.95: its grade, the verdict and the count by grade go by what is written."""
    draws = np.ones((DRAWS, 8), dtype=bool)
    written = {"loft-dipole": 0.94994, "roof-yagi": 0.94996}
    monkeypatch.setattr(
        planner, "multiplex_chances", lambda turned, air, names: (draws, np.full(8, written[turned.chain.name]))
    )
    request = AssessRequest(NORTH, chains=tuple(written), now="loft-dipole")
    answer = assess(request, demo_world.store, demo_world.ground)
    names = [one["id"] for one in answer["multiplexes"]]
    assert {cell(answer, name, "roof-yagi")["grade"] for name in names} == {"secure"}
    assert answer["chains"]["roof-yagi"]["secure"] == 8
    assert answer["verdicts"][0]["now_secure"] == names


def test_all_three_answers_occur(ask):
    assert ask(NORTH, now="loft-dipole")["verdicts"][0]["answer"] == "worth it"
    assert ask(SHORE, now="roof-yagi")["verdicts"][0]["answer"] == "measure first"
    assert {verdict["answer"] for verdict in ask(WEST, now="roof-yagi")["verdicts"]} == {"not worth it"}


def test_every_ledger_runs_from_the_radiated_power_to_the_margin(ask):
    ledgers = 0
    for emission in ask(now="roof-yagi")["emissions"]:
        for chain in emission["chains"].values():
            for outlet in chain["outlets"]:
                steps = outlet["ledger"]
                assert steps[0]["step"].startswith("radiated power")
                assert steps[-1]["total"] == pytest.approx(outlet["margin_db"], abs=0.02)
                assert all(step["source"] for step in steps)
                assert steps[-1]["state"] == outlet["held_back_by"]["state"]
                for state in "ab":
                    one = [step for step in steps if step["state"] == state]
                    assert sum(step["value_db"] for step in one) == pytest.approx(one[-1]["total"], abs=0.2)
                    assert one[-1]["total"] >= outlet["margin_db"] - 0.02
                ledgers += 1
    assert ledgers >= 40


def test_chance_of_one_emission_is_the_normal_of_its_margin_less_too_much_level(ask):
    """Enough by its own margin; too much by the headroom, which the error of the loudest level eats up."""
    emissions = ask(now="roof-yagi")["emissions"]
    for name in ("loft-dipole", "roof-yagi", "high-gain", "high-gain-masthead"):
        cells = [emission["chains"][name] for emission in emissions if emission["chains"]]
        loudest = max(cells, key=lambda cell: cell["outlets"][0]["level_median_dbuv"])
        for cell in cells:
            enough = 0.5 * math.erfc(-cell["margin_db"] / cell["sigma_db"] / math.sqrt(2))
            headroom_db = min(outlet["headroom_db"] for outlet in cell["outlets"])
            too_much = 0.5 * math.erfc(headroom_db / loudest["level_sigma_db"] / math.sqrt(2))
            assert cell["chance"] == pytest.approx(max(enough - too_much, 0), abs=2e-3)


def test_a_level_has_the_errors_of_its_own_signal_whatever_disturbs_it(ask):
    answer = ask(FOOT, now="roof-yagi", chains=("roof-yagi",))
    own = 2.0**2 + 2.0**2 + 2.5**2 + 1.5**2 + 1.0**2  # roof, band, emission, aerial, feeder: the stated error model
    disturbed = False
    for emission in answer["emissions"]:
        through = emission["chains"]["roof-yagi"]
        squares = own + emission["field"]["sigma_db"] ** 2
        expected = [math.sqrt(squares + away**2) for away in (0.0, 3.0, 4.0)]  # on the axis, off it, cross-polar
        assert min(abs(through["level_sigma_db"] - one) for one in expected) < 0.02
        disturbed |= abs(through["sigma_db"] - through["level_sigma_db"]) > 1
    assert disturbed


def test_multiplex_on_two_masts_has_at_least_the_better_ones_chance(ask):
    answer = ask(BAY)
    for multiplex in answer["multiplexes"]:
        for name, one in multiplex["chains"].items():
            alone = [e["chains"][name]["chance"] for e in answer["emissions"] if e["multiplex"] == multiplex["id"]]
            assert one["chance"] >= max(alone) - 0.02


def test_the_same_chain_twice_differs_by_exactly_nothing(ask, demo_world):
    chain = stored_chain(demo_world.store, "high-gain")
    twin = replace(chain, name="twin")
    verdict = ask(chains=(chain, twin))["verdicts"][0]
    assert (verdict["expected_extra"], verdict["chance_of_gain"], verdict["price_difference"]) == (0, 0, 0)


def test_an_aerial_turned_away_is_worse(ask, demo_world):
    chain = stored_chain(demo_world.store, "high-gain")
    toward = cell(ask(chains=(chain,), wanted=("strait-1",)), "strait-1", "high-gain")
    pointing = (toward["pointing_deg"] + 120) % 360
    away = cell(ask(chains=(replace(chain, pointing_deg=pointing),)), "strait-1", "high-gain")
    assert away["chance"] < toward["chance"] - 0.2


def test_verdicts_are_empty_with_one_chain(ask):
    assert ask(chains=("high-gain",))["verdicts"] == []


def test_nothing_up_today_compares_with_a_bare_roof(ask):
    verdict = ask(chains=("high-gain",), now="nothing")["verdicts"][0]
    assert verdict["baseline"] == "nothing"
    assert verdict["price_difference"] == 39 + 12 + 5 + 4 + 4 + 20 + 15  # parts, labour, visit of the catalogue


def test_what_is_up_now_joins_the_chains_in_question(ask):
    assert set(ask(chains=("high-gain",), now="loft-dipole")["chains"]) == {"loft-dipole", "high-gain"}


def test_wanted_multiplexes_may_be_given_by_name(ask):
    assert ask(now="roof-yagi", wanted=("Strait One",))["verdicts"][0]["wanted"] == ["strait-1"]


def test_higher_availability_never_raises_a_chance(ask):
    chances = [
        [e["chains"]["high-gain"]["margin_db"] for e in ask(chains=("high-gain",), availability_percent=t)["emissions"]]
        for t in (50, 90, 99)
    ]
    assert all(a >= b >= c for a, b, c in zip(*chances, strict=True))


def test_p1546_alone_leaves_the_other_figure_out_and_widens_the_spread(ask):
    alone, both = ask(method="p1546")["emissions"][0], ask()["emissions"][0]
    assert alone["field"]["p1812_dbuv_m"] is None
    assert alone["field"]["method"] == "p1546"
    assert both["field"]["method"] == "p1812"
    assert both["path"]["kind"] == "clear"
    assert alone["field"]["sigma_db"] == pytest.approx(1.4 * 3.0)
    apart_db = abs(both["field"]["p1812_dbuv_m"] - both["field"]["p1546_dbuv_m"])
    beyond_6_db = min(6.0, max(0.0, (apart_db - 6) / 2))
    assert both["field"]["sigma_db"] == pytest.approx(math.hypot(3.0, beyond_6_db), abs=0.01)


def test_nothing_in_reach_is_an_answer_that_names_the_nearest(ask):
    answer = ask(reach_km=1)
    assert answer["emissions"] == []
    assert answer["multiplexes"] == []
    assert any("the nearest transmitter is" in caution for caution in answer["cautions"])


def test_shared_channel_is_said_and_counted(ask):
    answer = ask(NORTH)
    disturbed = next(one for one in answer["emissions"] if one["id"] == "far-island-45")
    assert any("Southern Spur" in caution for caution in disturbed["cautions"])
    clear = next(one for one in answer["emissions"] if one["id"] == "far-island-42")
    assert disturbed["chains"]["roof-yagi"]["margin_db"] < clear["chains"]["roof-yagi"]["margin_db"]
    assert not any("not counted" in caution and "nterference" in caution for caution in answer["cautions"])


def test_usual_cautions_are_always_there(ask):
    assert set(CAUTIONS) <= set(ask()["cautions"])


def test_an_assumption_can_be_changed(ask):
    usual, strict = (
        ask(assumptions=changes)["emissions"][0]["chains"]["high-gain"]["margin_db"]
        for changes in ({}, {"reserve_db": 8.0})
    )
    assert strict == pytest.approx(usual - 5, abs=0.011)


@pytest.mark.parametrize(
    ("wishes", "error", "message"),
    [
        ({"chains": ("no-such",)}, NotStoredError, "no-such"),
        ({"now": "no-such"}, NotStoredError, "no-such"),
        ({"wanted": ("no-such",)}, RequestError, "is not known: use one of"),
        ({"wanted": ()}, RequestError, "no multiplex is wanted"),
        ({"chains": ("high-gain", "high-gain")}, RequestError, "give each its own name"),
        ({"chains": ()}, RequestError, "name or describe at least one"),
        ({"reach_km": math.nan}, RequestError, "use 1 to 500 km"),
        ({"method": "guess"}, RequestError, "use p1812, p1546, both"),
        ({"availability_percent": 95}, RequestError, "use 50, 90, 99"),
        ({"worth_per_multiplex": -1.0}, RequestError, "use 0 to 1000000"),
        ({"assumptions": {"reserve": 1.0}}, RequestError, "is not known: use one of"),
        ({"assumptions": {"reserve_db": 99.0}}, RequestError, "use 0 to 20 dB"),
    ],
)
def test_impossible_wishes_are_refused_with_what_is_allowed(ask, wishes, error, message):
    with pytest.raises(error, match=message):
        ask(**wishes)


@pytest.mark.parametrize(
    ("latitude_deg", "longitude_deg", "height_m", "message"),
    [
        (91, 0, 10, "use -90 to 90"),
        (44, 181, 10, "use -180 to 180"),
        (math.nan, 0, 10, "use -90 to 90"),
        (44, -37, -5, "use 1 to 200 m"),
        (44, -37, 5000, "use 1 to 200 m"),
    ],
)
def test_impossible_roofs_are_refused_with_what_is_allowed(latitude_deg, longitude_deg, height_m, message):
    with pytest.raises(RoofError, match=message):
        Roof(latitude_deg, longitude_deg, height_m)


def test_roof_outside_all_rasters_names_the_tile(ask):
    with pytest.raises(CoverageError, match=r"no elevation at 10\.5000 N 20\.5000 W: fetch tiles .* N10W021"):
        ask(Roof(10.5, -20.5))


def test_roof_far_out_at_sea_is_refused(ask):
    with pytest.raises(RoofError, match="more than 500 m out on the water"):
        ask(Roof(44.35, -37.15))


def test_chains_in_two_currencies_are_not_compared(ask, demo_world):
    chain = stored_chain(demo_world.store, "high-gain")
    with pytest.raises(RequestError, match="use one currency"):
        ask(chains=(chain, replace(chain, name="other", currency="XYZ")))


def test_a_chain_that_is_no_chain_is_refused(ask):
    with pytest.raises(ChainError):
        ask(chains=(replace(stored_chain_of_nothing()),))


def stored_chain_of_nothing():
    from app.chain.document import chain_from_document

    return chain_from_document({"name": "empty", "parts": []})


def test_ledger_names_both_methods_their_difference_and_what_time_does(ask):
    for emission in ask(now="roof-yagi")["emissions"]:
        field = emission["field"]
        ledger = emission["chains"]["roof-yagi"]["outlets"][0]["ledger"]
        ground = next(row for row in ledger if row["step"].startswith("ground and atmosphere"))
        fade = next(row for row in ledger if row["step"].startswith("fade"))
        assert f"P.1812 {field['p1812_dbuv_m']:.2f}, P.1546 {field['p1546_dbuv_m']:.2f}" in ground["source"]
        assert f"difference {field['difference_db']:+.2f} dB" in ground["source"]
        assert fade["value_db"] == -field["fade_db"]
        assert f"rises by {field['enhancement_db']:.2f} dB" in fade["source"]


def test_an_aerial_is_turned_to_a_mast_where_that_is_as_good(ask):
    """On a flat maximum a rigger is sent to a mast, not to the middle of nowhere."""
    answer = ask(WEST)
    bearings = {round(one["bearing_deg"]) for one in answer["emissions"]}
    for name, chain in answer["chains"].items():
        (pointing,) = chain["pointings"]
        best = max(pointing["expected_by_degree"])
        at_masts = [pointing["expected_by_degree"][bearing % 360] for bearing in bearings]
        if max(at_masts) >= best - 0.004:
            assert round(pointing["pointing_deg"]) in bearings, name
