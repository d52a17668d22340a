"""Sweeps, the cheapest chain, blocks and notes on the demo, through functions, command line and API."""

import json

import pytest
from fastapi.testclient import TestClient
from typer.testing import CliRunner

from app.chain.document import chain_from_document, chain_to_document
from app.chain.parts import Combiner, MastheadAmplifier, PowerInserter
from app.chain_file import import_text
from app.chain_tellings import told_cheapest
from app.cheapest import Wish, cheapest_document, pareto, parts_for_sale
from app.cli import main
from app.demo.scenario import DEMO_ROOFS
from app.errors import ChainError, RequestError
from app.planner import assess, stored_chain
from app.request import AssessRequest
from app.roof import Roof
from app.sweeps import doubled, sweep_document
from app.transmitters.store import Store
from app.web.main import create_app

NORTH = Roof(DEMO_ROOFS[0].latitude_deg, DEMO_ROOFS[0].longitude_deg)
AT = f"{NORTH.latitude_deg},{NORTH.longitude_deg}"

PARTS = """
[[parts]]
kind = "aerial"
id = "short"
name = "Short Yagi"
price = 22
gain_dbd = [[470, 5.9], [694, 9.9]]
beamwidth_deg = 50
front_to_back_db = 18
[[parts]]
kind = "aerial"
id = "long"
name = "Long Yagi"
price = 39
gain_dbd = [[470, 8.9], [694, 14.4]]
beamwidth_deg = 30
front_to_back_db = 25
[[parts]]
kind = "masthead-amplifier"
id = "amp"
name = "Masthead amplifier"
price = 29
gain_db = 18
noise_figure_db = 2
rated_output_dbuv = 103
[[parts]]
kind = "feeder"
id = "f15"
name = "15 m"
price = 12
cable = "copper-7mm"
length_m = 15
[[parts]]
kind = "splitter"
id = "two"
name = "Two-way"
price = 5
ports = 2
[[parts]]
kind = "filter"
id = "unpriced"
name = "Filter without a price"
loss_db = [[470, 1], [694, 1], [703, 15]]
"""


@pytest.fixture(scope="module")
def shop(demo_world, tmp_path_factory):
    """Return a store with the demo's masts and parts for sale."""
    from app.demo.scenario import ensure_demo

    store = Store.open(tmp_path_factory.mktemp("shop"))
    ensure_demo(store)
    import_text("parts.toml", PARTS, store)
    return store


@pytest.fixture(scope="module")
def page(shop, demo_world):
    with TestClient(create_app(shop, demo_world.ground), base_url="http://127.0.0.1") as client:
        yield client


def test_front_rises_in_price_and_count_and_says_why(shop, demo_world):
    got = cheapest_document(AssessRequest(NORTH), Wish(outlets=2, labour_price=20), shop, demo_world.ground)
    front = got["front"]
    assert got["tried"] == 4
    assert got["left_out"] == ["Filter without a price"]
    assert len(front) >= 2
    assert [row["price"] for row in front] == sorted(row["price"] for row in front)
    assert [row["expected_count"] for row in front] == sorted(row["expected_count"] for row in front)
    assert front[0]["price"] == 22 + 12 + 5 + 20
    assert front[0]["reason"].startswith("The cheapest that can be built")
    assert "held back by noise" in front[-1]["reason"]
    assert "Strait" in front[-1]["reason"]  # names, not ids
    assert got["worth_per_multiplex"] == 50
    for before, row in zip([{"price": 0, "expected_count": 0}, *front], front, strict=False):
        assert chain_from_document(row["chain"]).price == row["price"]
        each = (row["price"] - before["price"]) / (row["expected_count"] - before["expected_count"])
        assert row["price_per_extra"] == pytest.approx(each, rel=0.01)  # counts are written to 0.001
        assert row["pays"] == (each < 50)
    assert told_cheapest(got).splitlines()[0].endswith("bought whole, with labour and visit")
    for row in front:
        row["chain"] |= {"labour_price": 0, "visit_price": 0}
    assert "without labour and visit" in told_cheapest(got).splitlines()[0]


def test_where_no_part_is_stored_those_of_the_stored_chains_are_for_sale(demo_world):
    sold = {part.id for part in parts_for_sale(demo_world.store)}
    assert {"short-yagi", "long-yagi", "loft-dipole", "masthead-amplifier", "roof-feeder"} <= sold
    got = cheapest_document(AssessRequest(NORTH), Wish(feeder_m=10), demo_world.store, demo_world.ground)
    assert got["front"][0]["price"] == 9 + 8 + 4  # aerial, feeder and outlet of the loft


def test_front_leaves_out_what_a_cheaper_chain_equals(shop, demo_world):
    class One:
        def __init__(self, price, expected_count):
            self.price, self.expected_count = price, expected_count

    assert [one.price for one in pareto([One(9, 3), One(5, 3), One(20, 2.9), One(30, 4), One(31, 4.01)])] == [5, 30]


@pytest.mark.parametrize(
    ("wish", "message"),
    [
        ({"feeder_m": 40}, "no feeder of 40 m or more is for sale"),
        ({"outlets": 5}, "no splitter with 5 ports or more is for sale"),
    ],
)
def test_missing_parts_are_named(shop, demo_world, wish, message):
    with pytest.raises(ChainError, match=message):
        cheapest_document(AssessRequest(NORTH), Wish(**wish), shop, demo_world.ground)


def test_no_part_for_sale_says_how_to_store_some(demo_world, tmp_path):
    with pytest.raises(ChainError, match="for sale"):
        cheapest_document(AssessRequest(NORTH), Wish(), Store.open(tmp_path), demo_world.ground)
    with pytest.raises(RequestError, match="0 outlets: use 1 to 64"):
        Wish(outlets=0)


@pytest.fixture(scope="module")
def sweeps(demo_world):
    request = AssessRequest(NORTH, chains=("roof-yagi", "high-gain"))
    return sweep_document(request, demo_world.store, demo_world.ground, (2.0, 10.0, 25.0))


def test_chance_is_there_for_each_whole_degree_and_meets_the_answer(sweeps, demo_world):
    answer = assess(AssessRequest(NORTH, chains=("roof-yagi", "high-gain")), demo_world.store, demo_world.ground)
    for multiplex in answer["multiplexes"]:
        for name, cell in multiplex["chains"].items():
            by_degree = sweeps["pointing"][name]["chance_by_degree"][multiplex["id"]]
            assert len(by_degree) == 360
            alone = len(multiplex["emissions"]) == 1
            if alone:
                assert by_degree[round(cell["pointing_deg"]) % 360] == pytest.approx(cell["chance"], abs=0.01)


def test_sweep_tells_what_turning_does_to_interference(demo_world):
    """Below the backbone a mast on the channel of a multiplex holds it back: what it costs meets the ledger's C/N."""
    roof = Roof(44.102, -37.3254)
    request = AssessRequest(roof, chains=["roof-yagi"])
    sweep = sweep_document(request, demo_world.store, demo_world.ground, ())["pointing"]["roof-yagi"]
    answer = assess(request, demo_world.store, demo_world.ground)
    lost = sweep["interference_db_by_degree"]
    assert all(len(one) == 360 and min(one) >= 0 for one in lost.values())
    held = [
        (row["id"], row["chains"]["roof-yagi"])
        for row in answer["multiplexes"]
        if row["chains"]["roof-yagi"]["held_back_by"]["limit"] == "interference"
    ]
    assert held
    for name, cell in held:
        emission = next(row for row in answer["emissions"] if row["id"] == cell["emission"])
        ledger = emission["chains"]["roof-yagi"]["outlets"][0]["ledger"]
        decides = ledger[-1]["state"]
        taken = sum(step["value_db"] for step in ledger if step["state"] == decides and ("interfer" in step["step"]))
        assert lost[name][round(cell["pointing_deg"]) % 360] == pytest.approx(-taken, abs=0.03)
        assert max(lost[name]) - min(lost[name]) > 3


def test_higher_aerials_receive_more_here(sweeps):
    assert [row["aerial_agl_m"] for row in sweeps["height"]] == [2, 10, 25]
    counts = [row["chains"]["roof-yagi"]["expected_count"] for row in sweeps["height"]]
    assert counts[2] > counts[0]


def test_second_aerial_is_told_in_a_sentence(sweeps):
    both = sweeps["two_aerials"]["high-gain"]
    assert {"one", "combiner", "switch", "best", "sentence"} == set(both)
    assert len(both["switch"]["pointings_deg"]) == 2
    assert both["switch"]["expected_count"] >= both["one"]["expected_count"] - 0.6


def test_answer_says_how_interference_is_reckoned_with_two_aerials(demo_world):
    one = stored_chain(demo_world.store, "roof-yagi")
    two = doubled(one, Combiner(id="joint", name="Combiner"))
    cautions = [
        assess(AssessRequest(NORTH, chains=[chain]), demo_world.store, demo_world.ground)["cautions"]
        for chain in (one, two)
    ]
    assert ["first aerial" in " ".join(words) for words in cautions] == [False, True]


def test_doubled_chain_is_a_chain_that_documents_carry(demo_world):
    from app.chain.parts import Switch

    twice = doubled(stored_chain(demo_world.store, "high-gain-masthead"), Switch(id="w", name="w"))
    assert [aerial.id for aerial in twice.aerials] == ["long-yagi", "long-yagi-second"]
    assert chain_from_document(chain_to_document(twice)) == twice


def test_amplifier_without_supply_is_named_and_shown_both_ways(demo_world):
    whole = chain_to_document(stored_chain(demo_world.store, "high-gain-masthead"))
    amplifier = next(part for part in whole["parts"] if part["kind"] == MastheadAmplifier.kind)
    amplifier |= {"draws_ma": 60, "needs_v": 11}
    whole |= {"name": "unfed", "title": "Without supply"}
    answer = assess(
        AssessRequest(NORTH, chains=("high-gain-masthead", chain_from_document(whole))),
        demo_world.store,
        demo_world.ground,
    )
    note = answer["chains"]["unfed"]
    assert not note["powering"][0]["is_fed"]
    assert "has no supply" in note["powering"][0]["message"]
    assert any("Without supply: masthead-amplifier" in caution for caution in answer["cautions"])
    powered = answer["chains"]["high-gain-masthead"]["expected_count"]
    assert note["expected_count"] < note["if_powered"]["expected_count"] == pytest.approx(powered, abs=0.01)
    inserter = PowerInserter(id="p", name="supply", supply_v=12, most_ma=100)
    place = next(i for i, part in enumerate(whole["parts"]) if part["kind"] == "splitter")
    whole["parts"].insert(place, chain_part(inserter))
    fed = assess(AssessRequest(NORTH, chains=(chain_from_document(whole),)), demo_world.store, demo_world.ground)
    assert fed["chains"]["unfed"]["powering"][0]["voltage_v"] == pytest.approx(12 - 0.015 * 35 * 0.06, abs=0.01)
    assert fed["chains"]["unfed"]["if_powered"] is None


def chain_part(part):
    from app.chain.document import part_to_document

    return part_to_document(part)


def test_mast_in_a_chain_is_answered_with_its_moment_and_the_caution(demo_world):
    whole = chain_to_document(stored_chain(demo_world.store, "roof-yagi"))
    whole["name"] = "on a mast"
    whole["parts"][0] |= {"wind_area_m2": 0.0625, "above_clamp_m": 2.0}
    whole["parts"].append(
        {"kind": "mast", "id": "tube", "name": "Mast", "diameter_mm": 50, "wall_mm": 2, "free_m": 2, "clamped_m": 1}
    )
    answer = assess(AssessRequest(NORTH, chains=(chain_from_document(whole),)), demo_world.store, demo_world.ground)
    wind = answer["chains"]["on a mast"]["wind"]
    # by hand: 1.2 · 800 · 0.0625 = 60 N at 2 m, and the tube 1.2 · 800 · 0.05 · 2 = 96 N at 1 m
    assert wind["moment_n_m"] == pytest.approx(60 * 2 + 96 * 1)
    assert "Local building codes" in wind["caution"]


def test_levels_are_told_at_each_outlet(demo_world):
    answer = assess(AssessRequest(NORTH), demo_world.store, demo_world.ground)
    rows = answer["chains"]["roof-yagi"]["levels"]
    assert [row["outlet"] for row in rows] == ["Living room", "Bedroom"]
    assert all(row["standard"] == "en-60728-1" for row in rows)


@pytest.mark.parametrize(
    ("address", "more", "key"),
    [
        ("/api/sweep", {"chains": ["roof-yagi"], "heights_m": [10]}, "pointing"),
        ("/api/cheapest", {"outlets": 2}, "front"),
        ("/api/block", {"outlets": 8, "layout": "riser", "longest_m": 40, "shortest_m": 5, "aerial": "long"}, "chain"),
    ],
)
def test_api_answers_the_same_questions(page, address, more, key):
    roof = {"latitude_deg": NORTH.latitude_deg, "longitude_deg": NORTH.longitude_deg}
    answer = page.post(address, json={"roof": roof, **more})
    assert answer.status_code == 200, answer.text
    assert key in answer.json()


@pytest.mark.parametrize(
    ("address", "more", "field"),
    [
        ("/api/cheapest", {"outlets": 0}, "outlets"),
        (
            "/api/block",
            {"outlets": 8, "layout": "star", "longest_m": -4, "shortest_m": 5, "aerial": "long"},
            "longest_m",
        ),
        ("/api/block", {"outlets": 8, "layout": "star", "longest_m": 4, "shortest_m": 1, "aerial": "none"}, "aerial"),
    ],
)
def test_api_refuses_with_the_field(page, address, more, field):
    roof = {"latitude_deg": NORTH.latitude_deg, "longitude_deg": NORTH.longitude_deg}
    answer = page.post(address, json={"roof": roof, **more})
    assert 400 <= answer.status_code < 500
    assert answer.json()["error"]["field"] == field


def test_api_keeps_parts(page):
    part = {"kind": "attenuator", "id": "pad-6", "name": "6 dB", "loss_db": 6, "price": 3}
    assert page.post("/api/parts", json=part).status_code == 201
    assert page.put("/api/parts/pad-6", json={**part, "price": 4}).json()["price"] == 4
    assert any(one["id"] == "pad-6" for one in page.get("/api/parts").json()["parts"])
    assert page.get("/api/parts/pad-6").json()["loss_db"] == 6
    assert page.post("/api/parts", json={**part, "loss_db": -1}).status_code == 422
    assert page.delete("/api/parts/pad-6").status_code == 204
    assert page.get("/api/parts/pad-6").status_code == 404


@pytest.fixture
def run(shop, demo_world, monkeypatch):
    monkeypatch.setenv("GAINWORTH_DATA_DIR", str(shop.path.parent))

    def ran(*words, code=0):
        result = CliRunner().invoke(main, ["chains", *words])
        assert result.exit_code == code, result.output + repr(result.exception)
        return result

    return ran


def test_command_line_answers_the_same_questions(run, tmp_path):
    assert "Long Yagi" in run("cheapest", "--at", AT).stdout
    assert "best turned to" in run("sweep", "--at", AT, "--chain", "roof-yagi", "--no-heights").stdout
    out = tmp_path / "block.toml"
    assert "Launch" in run("block", "--at", AT, "--outlets", "8", "--aerial", "long", "--out", str(out)).stdout
    assert json.loads(run("import", str(out), "--json", "--dry-run").stdout)["added"] == ["block"]
    exported = tmp_path / "all.toml"
    run("export", "--out", str(exported))
    assert "chains would be changed: loft-dipole" in run("import", str(exported), "--dry-run").stdout
    assert "roof-yagi" in run("list").stdout


def test_command_line_reads_measured_files(run, tmp_path):
    sweep = tmp_path / "aerial.s1p"
    sweep.write_text("# MHz S RI R 75\n" + "".join(f"{f} 0.2 0\n" for f in range(600, 760, 2)))
    told = run("match", str(sweep), "--calibrated", "behind-pad", "--channel", "47").stdout
    assert "1.5" in told
    assert "Match is not gain" in told
    pattern = tmp_path / "pattern.csv"
    rows = "".join(
        f"{angle},{min(20, abs(angle if angle <= 180 else angle - 360) / 9)}\n" for angle in range(0, 360, 10)
    )
    pattern.write_text("angle_deg,loss_db\n" + rows)
    assert 'pattern = "measured"' in run("pattern", str(pattern)).stdout


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("match", "none.s1p", "--calibrated", "behind-pad"), "there is no such file"),
        (("import", "none.toml"), "there is no such file"),
        (("export", "no-such-chain"), 'there is no chain "no-such-chain"'),
        (("block", "--at", AT, "--outlets", "0", "--aerial", "long"), "0 outlets: use 1 to 64"),
        (("sweep", "--at", "here"), "cannot be read"),
    ],
)
def test_command_line_says_the_mend_and_leaves_with_2(run, words, message):
    assert message in run(*words, code=2).stderr
