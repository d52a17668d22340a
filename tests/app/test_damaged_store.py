"""A database that another program has spoilt: every address says so in words, none falls over."""

import sqlite3
from contextlib import closing

import pytest
from starlette.testclient import TestClient

from app.demo.scenario import ensure_demo
from app.transmitters.store import Store
from app.web.main import create_app

ROOF = {"latitude_deg": 44.3, "longitude_deg": -37.4507}
LEVEL = {"kind": "level", "emission": "48", "value_db": 41.0, "chain": "roof-yagi"}
DEEP = "[" * 3000 + "]" * 3000


@pytest.fixture
def server(demo_world, tmp_path):
    """A server on a store of its own that keeps one roof and one reading; faults are raised."""
    store = Store.open(tmp_path)
    ensure_demo(store)
    client = TestClient(
        create_app(store, demo_world.ground), base_url="http://127.0.0.1", raise_server_exceptions=False
    )
    kept = client.post("/api/roofs", json={"name": "Mill Lane", "roof": ROOF, "now": "roof-yagi"}).json()
    client.post("/api/readings", json={**ROOF, "reading": LEVEL})

    def change(statement, *values):
        with closing(sqlite3.connect(store.path)) as connection, connection:
            connection.execute(statement, values)

    return client, change, kept["id"]


@pytest.mark.parametrize("body", ["{", "", "3", "null", b"\x00\xff", DEEP])
def test_a_roof_that_cannot_be_read_is_named(server, body):
    client, change, roof = server
    change("UPDATE document SET body = ? WHERE kind = 'roof'", body)
    for address in ("/api/roofs", f"/api/roofs/{roof}", f"/report/{roof}", f"/report/{roof}.pdf"):
        answer = client.get(address)
        assert answer.status_code == 503, address
        assert answer.json()["error"]["message"].startswith('the stored document "Mill Lane" is damaged: restore')
    assert client.post("/api/assess", json={"roof": ROOF, "chains": ["roof-yagi"]}).status_code == 200


@pytest.mark.parametrize("body", ["{}", '{"roof": 3}', '{"roof": {"latitude_deg": "x"}}', '{"roof": {}, "note": [1]}'])
def test_a_roof_that_holds_no_roof_has_no_report_and_says_why(server, body):
    client, change, roof = server
    change("UPDATE document SET body = ? WHERE kind = 'roof'", body)
    answer = client.get(f"/report/{roof}")
    assert answer.status_code == 503
    assert answer.json()["error"]["message"].startswith('the stored roof "Mill Lane" is damaged')


@pytest.mark.parametrize(
    ("column", "value"), [("body", "{"), ("body", "3"), ("body", DEEP), ("latitude_deg", "north"), ("created", b"\xff")]
)
def test_a_reading_that_cannot_be_read_is_named_wherever_it_counts(server, column, value):
    client, change, _ = server
    change(f"UPDATE reading SET {column} = ?", value)
    for answer in (client.get("/api/readings"), client.get("/api/logbook")):
        assert answer.status_code == 503
        assert "is damaged: restore a backup, or remove the row" in answer.json()["error"]["message"]


def test_a_name_that_is_no_text_is_a_damaged_row(server):
    client, change, _ = server
    change("UPDATE document SET name = ? WHERE kind = 'roof'", b"\xff")
    assert client.get("/api/roofs").status_code == 503
