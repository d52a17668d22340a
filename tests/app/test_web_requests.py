"""Requests as strangers write them: twice the same key, unknown names, a slash too many, HEAD."""

import pytest
from starlette.testclient import TestClient

from app.web.main import create_app

HERE = "http://127.0.0.1"
ROOF = '{"latitude_deg": 44.4, "longitude_deg": -37.3}'


@pytest.fixture(scope="module")
def client(demo_world):
    return TestClient(create_app(demo_world.store, demo_world.ground), base_url=HERE, follow_redirects=False)


def error_of(response, status):
    assert response.status_code == status, response.text
    return response.json()["error"]


@pytest.mark.parametrize(
    ("body", "key"),
    [
        (f'{{"roof": {ROOF}, "reach_km": 20, "reach_km": 300}}', "reach_km"),
        ('{"roof": {"latitude_deg": 44.4, "longitude_deg": -37.3, "latitude_deg": 12}}', "latitude_deg"),
        (f'{{"roof": {ROOF}, "chains": [{{"name": "a", "parts": [], "name": "b"}}]}}', "name"),
        (f'{{"roof": {ROOF}, "a\\u0062": 1, "ab": 2}}', "ab"),
    ],
)
def test_a_key_that_stands_twice_is_refused_by_name(client, body, key):
    error = error_of(client.post("/api/assess", content=body, headers={"content-type": "application/json"}), 422)
    assert error["field"] == key
    assert error["message"] == f'"{key}" stands twice in one object: keep one of them'


def test_a_key_may_stand_in_two_objects(client):
    body = f'{{"roof": {ROOF}, "chains": [], "assumptions": {{}}}}'
    error = error_of(client.post("/api/assess", content=body, headers={"content-type": "application/json"}), 422)
    assert "no chain" in error["message"]


def test_an_unknown_name_in_the_query_is_refused_with_those_that_are_known(client):
    error = error_of(client.get("/api/skyline?latitude=44.4&longitude_deg=-37.3"), 422)
    assert error["field"] == "latitude"
    assert error["allowed"] == "latitude_deg, longitude_deg, aerial_agl_m, reach_km"
    assert error_of(client.get("/api/health?verbose=1"), 422)["allowed"] == "none"
    assert error_of(client.get("/tiles/relief/3/1/1?them=dark"), 422)["field"] == "them"
    assert error_of(client.get(f"/api/health?{'x' * 500}=1"), 422)["message"].count("x") < 70


def test_a_name_given_twice_in_the_query_is_refused(client):
    error = error_of(client.get("/api/emissions?latitude_deg=44&latitude_deg=12&longitude_deg=-37"), 422)
    assert error["message"] == '"latitude_deg" stands twice in this address: keep one of them'


def test_links_to_the_page_may_carry_what_others_added(client):
    assert client.get("/?from=mail").status_code == 200


@pytest.mark.parametrize("path", ["/api/roofs/", "/api/assess/", "/api/health/", "/report/"])
def test_a_slash_too_many_is_told_and_not_sent_elsewhere(client, path):
    for method in ("GET", "POST"):
        error = error_of(client.request(method, path), 404)
        assert "without the slash at its end" in error["message"]


@pytest.mark.parametrize(
    "path", ["/", "/docs", "/api/health", "/api/roofs", "/static/scripts/main.js", "/vendor/leaflet.js"]
)
def test_head_answers_like_get_without_a_body(client, path):
    plain = {"accept-encoding": "identity"}
    got, head = client.get(path, headers=plain), client.head(path, headers=plain)
    assert head.status_code == got.status_code == 200
    assert head.content == b""
    assert head.headers["content-type"] == got.headers["content-type"]
    assert head.headers["content-length"] == got.headers["content-length"]


def test_head_of_what_is_not_there_or_cannot_be_read_says_so_by_its_status(client):
    assert client.head("/nowhere").status_code == 404
    assert client.head("/api/assess").status_code == 405
    assert client.head("/nowhere").content == b""


@pytest.mark.parametrize(
    ("address", "body"),
    [
        ("/api/parts", '{"kind": "feeder", "id": "f", "name": "f", "cable": "copper-7mm", "length_m": 1, "price": %s}'),
        ("/api/readings", '{"latitude_deg": 44, "longitude_deg": -37, "reading": {"kind": "level", "value_db": %s}}'),
        ("/api/assess", '{"roof": {"latitude_deg": %s, "longitude_deg": -37}}'),
    ],
)
@pytest.mark.parametrize("digits", [400, 5000])
def test_a_whole_number_of_hundreds_of_digits_is_refused(client, address, body, digits):
    """Python itself refuses more than 4300 digits, and a number of 400 fits no floating point."""
    sent = (body % ("9" * digits)).encode()
    error = error_of(client.post(address, content=sent, headers={"content-type": "application/json"}), 422)
    assert error["message"] == f"the request holds a number of {digits} digits: use numbers of at most 18"


def test_a_reading_of_kind_null_is_told_the_kinds(client):
    sent = {"latitude_deg": 44, "longitude_deg": -37, "reading": {"kind": None, "count": 3}}
    assert "the reading has no kind: use level" in error_of(client.post("/api/readings", json=sent), 422)["message"]


def test_what_came_is_shown_and_not_thousands_of_letters_of_it(client):
    part = {"kind": "x" * 100_000, "id": "f", "name": "f"}
    message = error_of(client.post("/api/parts", json=part), 422)["message"]
    assert len(message) < 900
    assert message.startswith('part "f" is of kind "xxx')
    assert message.endswith("mast")  # what to use stands at the end


@pytest.mark.parametrize(
    ("identity", "told"), [("../x", "leave out the slash"), ("a\x00b", "printable"), ("x" * 130, "120")]
)
def test_a_part_whose_id_no_address_can_name_is_refused(client, identity, told):
    part = {"kind": "feeder", "id": identity, "name": "f", "cable": "copper-7mm", "length_m": 1}
    assert told in error_of(client.post("/api/parts", json=part), 422)["message"]


def test_a_day_that_is_none_is_told_how_to_write_one(client):
    error = error_of(client.get("/api/declination?latitude_deg=44&longitude_deg=-37&day=tomorrow"), 422)
    assert error["message"] == 'day is "tomorrow": use a date, year first, such as 2026-10-31'


def test_true_is_written_as_in_json(client):
    sent = {"agreed_to_go_online": False, "latitude_deg": 44, "longitude_deg": -37}
    assert error_of(client.post("/api/download", json=sent), 422)["allowed"] == "true"
