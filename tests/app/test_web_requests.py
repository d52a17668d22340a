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
