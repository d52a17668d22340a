"""Readings through store, API and command line; the logbook; roofs side by side."""

import json
import sqlite3

import pytest
from starlette.testclient import TestClient
from typer.testing import CliRunner

from app.cli import main
from app.compare import side_by_side
from app.demo.scenario import DEMO_ROOFS, MULTIPLEXES, emissions, ensure_demo, transmitters
from app.errors import NotStoredError
from app.kept_readings import keep
from app.logbook import learnt_scale, logbook
from app.planner import assess
from app.request import AssessRequest
from app.roof import Roof
from app.transmitters.model import Emission, Multiplex, Transmitter
from app.transmitters.rows import Source
from app.transmitters.schema import MIGRATIONS
from app.transmitters.store import DEMO_SOURCE, Store
from app.web.main import create_app

NORTH, SHORE = DEMO_ROOFS[0], DEMO_ROOFS[3]
PLACE = {"latitude_deg": NORTH.latitude_deg, "longitude_deg": NORTH.longitude_deg}
LEVEL = {"kind": "level", "emission": "48", "value_db": 41.0, "chain": "roof-yagi", "day": "2026-10-31"}
SCAN = "30 Range One good\n48 no signal\nhello"


@pytest.fixture
def store(tmp_path):
    store = Store.open(tmp_path)
    ensure_demo(store)
    return store


@pytest.fixture
def client(store, demo_world):
    return TestClient(create_app(store, demo_world.ground), base_url="http://127.0.0.1")


def test_the_store_keeps_lists_and_forgets_readings(store):
    first = store.put_reading({**PLACE, "reading": LEVEL})
    assert store.get_reading(first["id"])["reading"] == LEVEL
    store.put_reading({**first, "reading": LEVEL | {"confirmed": True}})
    assert [one["reading"]["confirmed"] for one in store.list_readings()] == [True]
    store.delete_reading(first["id"])
    assert store.list_readings() == []
    with pytest.raises(NotStoredError, match="gainworth readings list"):
        store.delete_reading(first["id"])


def test_readings_within_30_m_belong_to_a_roof(store):
    store.put_reading({**PLACE, "reading": LEVEL})
    latitude, longitude = PLACE["latitude_deg"], PLACE["longitude_deg"]
    assert len(store.readings_near(latitude + 0.0002, longitude)) == 1  # 22 m
    assert store.readings_near(latitude + 0.0004, longitude) == []  # 44 m


def test_an_older_store_is_migrated_and_keeps_what_it_held(tmp_path):
    store = Store.open(tmp_path)
    store.put_roof({"name": "Home", "roof": {}})
    with sqlite3.connect(store.path) as connection:
        connection.execute("DROP TABLE reading")
        connection.execute(f"PRAGMA user_version = {len(MIGRATIONS) - 1}")
    again = Store.open(tmp_path)
    assert [one["name"] for one in again.list_roofs()] == ["Home"]
    assert again.list_readings() == []
    with sqlite3.connect(store.path) as connection:
        assert connection.execute("PRAGMA user_version").fetchone()[0] == len(MIGRATIONS)


def test_the_api_keeps_a_reading_and_the_next_answer_counts_it(client):
    question = {"roof": PLACE, "now": "roof-yagi"}
    before = client.post("/api/assess", json=question).json()
    kept = client.post("/api/readings", json={**PLACE, "reading": LEVEL})
    assert kept.status_code == 201, kept.text
    (one,) = kept.json()["readings"]
    assert client.get("/api/readings").json()["readings"] == [one]
    after = client.post("/api/assess", json=question).json()
    assert after["readings"]["used"] == 1
    assert after["verdicts"][0]["expected_worth"] != before["verdicts"][0]["expected_worth"]
    without = client.post("/api/assess", json=question | {"stored_readings": False}).json()
    assert without["verdicts"] == before["verdicts"]
    changed = client.put(f"/api/readings/{one['id']}", json={**PLACE, "reading": LEVEL | {"value_db": 20.0}})
    assert changed.json()["reading"]["value_db"] == 20.0
    assert client.delete(f"/api/readings/{one['id']}").status_code == 204
    assert client.get(f"/api/readings/{one['id']}").status_code == 404


def test_the_api_shows_what_of_a_scan_list_was_recognised(client):
    sent = {**PLACE, "reading": {"kind": "scan list", "text": SCAN, "chain": "roof-yagi"}}
    kept = client.post("/api/readings", json=sent).json()
    assert [one["of"] for one in kept["scan_list"]["recognised"]] == ["range-1", "far-island-48"]
    assert kept["scan_list"]["not_recognised"] == [{"line": 3, "text": "hello"}]
    assert len(kept["readings"]) == 2


@pytest.mark.parametrize(
    ("reading", "field", "words"),
    [
        (LEVEL | {"value_db": 300}, "readings.0.value_db", "use -20 to 130 dB"),
        (LEVEL | {"sd_db": -1}, "readings.0.sd_db", "use 0.1 to 20 dB"),
        ({"kind": "scan list"}, "readings.0.text", "paste what the set shows"),
        ({"kind": "scan list", "text": SCAN, "colour": 1}, "readings.0.colour", "not known of a scan list"),
        ({"kind": "scan list", "text": SCAN, "day": "today"}, "readings.0.day", "write it as"),
        ({}, "readings.0.kind", "has no kind"),
    ],
)
def test_what_cannot_be_kept_is_refused_at_its_field(client, reading, field, words):
    response = client.post("/api/readings", json={**PLACE, "reading": reading})
    assert response.status_code == 422
    assert response.json()["error"]["field"] == field
    assert words in response.json()["error"]["message"]
    assert client.get("/api/readings").json()["readings"] == []


def test_the_command_line_keeps_lists_and_forgets(tmp_path, monkeypatch):
    monkeypatch.setenv("GAINWORTH_DATA_DIR", str(tmp_path / "data"))
    at = f"{NORTH.latitude_deg},{NORTH.longitude_deg}"

    def run(*words, code=0, piped=None):
        result = CliRunner().invoke(main, list(words), input=piped)
        assert result.exit_code == code, result.output + repr(result.exception)
        return result.output

    kept = json.loads(
        run("readings", "add", "--at", at, "--of", "48", "--value", "41", "--chain", "roof-yagi", "--json")
    )
    told = run("readings", "add", "--at", at, "--kind", "scan-list", "--file", "-", piped=SCAN)
    assert "2 readings kept" in told
    assert "line 3 not recognised: hello" in told
    assert "far-island-48" in run("readings", "list")
    said = run("assess", "--at", at, "--now", "roof-yagi")
    assert "of 3 readings of this roof are counted" in said
    assert "3 readings" not in run("assess", "--at", at, "--now", "roof-yagi", "--without-readings")
    assert "forgotten" in run("readings", "delete", kept["readings"][0]["id"])
    assert "there is no reading" in run("readings", "delete", "x", code=2)
    assert "use -20 to 130" in run("readings", "add", "--at", at, "--of", "48", "--value", "300", code=2)
    assert "needs --file" in run("readings", "add", "--at", at, "--kind", "scan-list", code=2)
    assert "cannot be read" in run("readings", "add", "--at", at, "--kind", "scan-list", "--file", "/no", code=2)


def test_the_logbook_sets_read_beside_predicted(store, demo_world):
    for roof in (NORTH, SHORE):
        for channel, value in (("30", 62.0), ("33", 64.0), ("36", 60.0)):
            document = {"kind": "level", "emission": channel, "value_db": value, "chain": "roof-yagi"}
            keep(store, roof.latitude_deg, roof.longitude_deg, document)
    keep(store, NORTH.latitude_deg, NORTH.longitude_deg, LEVEL | {"emission": "60"})
    book = logbook(store, demo_world.ground)
    assert book["summary"]["readings"] == 6
    assert book["summary"]["mean_db"] == pytest.approx(
        sum(one["difference_db"] for one in book["entries"]) / 6, abs=0.01
    )
    assert book["summary"]["scale"] is not None
    assert [one["reason"][:4] for one in book["left_out"]] == ['"60"']


def test_a_scale_is_learnt_from_five_readings_on_and_cautiously():
    """Prior weight 10: five readings at 2 spreads give sqrt((10 + 5·4)/15) = sqrt(2)."""
    assert learnt_scale([2.0] * 4) is None
    assert learnt_scale([2.0] * 5) == pytest.approx(2**0.5)
    assert learnt_scale([1.0] * 50) == pytest.approx(1.0)


def test_two_roofs_stand_side_by_side_with_the_same_chains(store, demo_world):
    requests = [
        AssessRequest(Roof(one.latitude_deg, one.longitude_deg), now="roof-yagi") for one in (SHORE, DEMO_ROOFS[1])
    ]
    document = side_by_side(requests, store, demo_world.ground)
    first, second = document["roofs"]
    assert first["chains"].keys() == second["chains"].keys()
    counts = first["chains"]["roof-yagi"]["expected_count"]
    assert counts["50"] >= counts["90"] >= counts["99"]
    assert "high-gain-masthead" in document["differs"]
    answers = first["answers"]["high-gain-masthead"]
    assert set(answers) == {"50", "90", "99"}
    assert first["changes"] == sum(len(set(one.values())) > 1 for one in first["answers"].values())


def test_hopeless_emissions_on_free_channels_change_no_answer(store, demo_world):
    """24 new multiplexes of a mast that hardly radiates: no word changes, and no figure."""
    request = AssessRequest(Roof(SHORE.latitude_deg, SHORE.longitude_deg), now="roof-yagi")
    before = assess(request, store, demo_world.ground)
    mast = Transmitter("whisper", "Whisper", 44.05, -37.40, None, DEMO_SOURCE)
    free = [str(n) for n in range(21, 49) if str(n) not in {one.channel for one in emissions()}][:24]
    template = emissions()[0]
    more = [
        Emission(
            f"whisper-{k}", "whisper", f"whisper-{k}", channel, 474.0 + 8 * (int(channel) - 21), 8, template.system,
            template.mode, 1e-6, "horizontal", 20,
        )
        for k, channel in enumerate((free * 3)[:24])
    ]  # fmt: skip
    multiplexes = [*MULTIPLEXES, *(Multiplex(f"whisper-{k}", f"Whisper {k}") for k in range(24))]
    store.replace_source(
        Source(DEMO_SOURCE, "Invented island"), [*transmitters(), mast], [*emissions(), *more], multiplexes
    )
    after = assess(request, store, demo_world.ground)
    assert len(after["multiplexes"]) == len(before["multiplexes"]) + 24
    worst = [c["chance"] for m in after["multiplexes"] if m["id"].startswith("whisper") for c in m["chains"].values()]
    assert max(worst) < 0.01
    assert after["verdicts"] == before["verdicts"]


def test_a_reading_of_what_is_not_on_the_air_or_through_an_unknown_chain_is_kept_with_a_note(store):
    kept = keep(store, NORTH.latitude_deg, NORTH.longitude_deg, LEVEL | {"emission": "99", "chain": "gone"})
    assert len(store.list_readings()) == 1
    assert kept["notes"][0].startswith('"99" is no channel or multiplex on the air within 150 km: kept, and not used')
    assert kept["notes"][1].startswith(
        'no chain "gone" is stored: kept, and used by answers that bring it; stored: high-'
    )
    for known in ({"emission": "48"}, {"emission": "far-island-48"}, {"emission": None, "multiplex": "Range One"}):
        assert keep(store, NORTH.latitude_deg, NORTH.longitude_deg, LEVEL | known)["notes"] == []


def test_kept_readings_do_not_stop_an_answer_where_nothing_is_in_reach(client):
    client.post("/api/readings", json={**PLACE, "reading": LEVEL})
    question = {"roof": PLACE, "chains": ["roof-yagi"], "reach_km": 1}
    answer = client.post("/api/assess", json=question)
    assert answer.status_code == 200
    assert answer.json()["emissions"] == []
    brought = client.post("/api/assess", json=question | {"readings": [LEVEL]})
    assert brought.status_code == 422
    assert "nothing in reach can be predicted here" in brought.json()["error"]["message"]
