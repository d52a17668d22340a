"""The main question over HTTP, on the demo, through the real application."""

import math
from concurrent.futures import ThreadPoolExecutor

import pytest
from starlette.testclient import TestClient

from app.demo.scenario import DEMO_ROOFS
from app.planner import assess
from app.request import AssessRequest
from app.roof import Roof
from app.web.main import create_app

NORTH = DEMO_ROOFS[0]
ROOF = {"latitude_deg": NORTH.latitude_deg, "longitude_deg": NORTH.longitude_deg}
PARTS = {
    "roof",
    "multiplexes",
    "emissions",
    "chains",
    "verdicts",
    "readings",
    "assumptions",
    "cautions",
    "sources",
    "credits",
}


@pytest.fixture(scope="module")
def client(demo_world):
    return TestClient(create_app(demo_world.store, demo_world.ground), base_url="http://127.0.0.1")


def ask(client, **change):
    return client.post("/api/assess", json={"roof": ROOF, "now": "nothing"} | change)


def refused(response, status=422):
    assert response.status_code == status, response.text
    error = response.json()["error"]
    assert set(error) == {"code", "message", "field", "allowed"}
    assert "Traceback" not in response.text
    return error


def test_the_answer_is_the_planners_document(client, demo_world):
    answer = ask(client)
    assert answer.status_code == 200
    assert set(answer.json()) == PARTS
    request = AssessRequest(Roof(NORTH.latitude_deg, NORTH.longitude_deg), now="nothing")
    assert answer.json() == assess(request, demo_world.store, demo_world.ground)


def test_only_the_position_is_needed(client):
    response = client.post("/api/assess", json={"roof": ROOF})
    assert response.status_code == 200
    assert response.json()["roof"]["aerial_agl_m"] == 10


def test_what_was_said_reaches_the_planner(client):
    roof = ROOF | {"aerial_agl_m": 6.5}
    answer = ask(client, roof=roof, worth_per_multiplex=80, assumptions={"reserve_db": 5}).json()
    in_force = {one["id"]: one["value"] for one in answer["assumptions"]}
    assert answer["roof"]["aerial_agl_m"] == 6.5
    assert in_force["reserve_db"] == 5


def test_a_setting_stands_in_for_a_worth_that_was_not_said(demo_world):
    from app.settings import Settings

    rich = TestClient(
        create_app(demo_world.store, demo_world.ground, Settings(worth_per_multiplex=100)), base_url="http://127.0.0.1"
    )
    of = {one["candidate"]: one for one in ask(rich).json()["verdicts"]}
    half = {one["candidate"]: one for one in ask(rich, worth_per_multiplex=50).json()["verdicts"]}
    for name, verdict in of.items():
        assert verdict["break_even_price"] == pytest.approx(2 * half[name]["break_even_price"], abs=0.02)


def test_four_questions_at_once_get_the_same_answers_as_alone(client):
    heights = [6.0, 8.0, 10.0, 12.0]
    roofs = [ROOF | {"aerial_agl_m": height} for height in heights]
    alone = [ask(client, roof=roof).json() for roof in roofs]
    with ThreadPoolExecutor(4) as pool:
        together = [response.json() for response in pool.map(lambda roof: ask(client, roof=roof), roofs)]
    assert together == alone


def test_nothing_in_reach_is_an_answer_with_the_nearest_transmitter(client):
    answer = ask(client, reach_km=1)
    assert answer.status_code == 200
    assert answer.json()["emissions"] == []
    assert any("nearest transmitter" in caution for caution in answer.json()["cautions"])


@pytest.mark.parametrize(
    ("change", "field", "words"),
    [
        ({"latitude_deg": 91}, "roof.latitude_deg", "-90 to 90"),
        ({"longitude_deg": -181}, "roof.longitude_deg", "-180 to 180"),
        ({"aerial_agl_m": -5}, "roof.aerial_agl_m", "1 to 200"),
        ({"aerial_agl_m": 5000}, "roof.aerial_agl_m", "1 to 200"),
        ({"latitude_deg": "44"}, "roof.latitude_deg", "a number, not in quotes"),
        ({"latitude_deg": True}, "roof.latitude_deg", "a number, not in quotes"),
        ({"latitude_deg": None}, "roof.latitude_deg", "a number"),
        ({"latitude_deg": [44]}, "roof.latitude_deg", "a number"),
        ({"surroundings": "forest"}, "roof.surroundings", "open, suburban, urban or trees"),
        ({"height": 10}, "roof.height", "aerial_agl_m"),
        ({"obstacles": [{"bearing_deg": 1}]}, "roof.obstacles.0.distance_m", "missing"),
    ],
)
def test_a_wrong_roof_is_refused_at_its_field(client, change, field, words):
    error = refused(ask(client, roof=ROOF | change))
    assert error["field"] == field
    assert words in error["message"]


@pytest.mark.parametrize(
    ("change", "field", "words"),
    [
        ({"chains": ["no such chain"]}, None, "no such chain"),
        ({"now": "no such chain"}, None, "no such chain"),
        ({"chains": [7]}, "chains.0", "text in quotes or an object"),
        ({"chains": "all"}, "chains", "a list"),
        ({"chains": [{"name": "x", "parts": []}]}, None, "x"),
        ({"reach_km": 5000}, "reach_km", "1 to 500"),
        ({"availability_percent": 95}, "availability_percent", "50, 90 or 99"),
        ({"method": "guess"}, "method", "p1812, p1546 or both"),
        ({"assumptions": {"luck_db": 3}}, "assumptions.luck_db", "not known"),
        ({"assumptions": {"reserve_db": 300}}, "assumptions.reserve_db", "0 to"),
        ({"assumptions": {"reserve_db": "3"}}, "assumptions.reserve_db", "a number, not in quotes"),
        ({"wanted": ["no such multiplex"]}, "wanted", "no such multiplex"),
        ({"wanted": []}, "wanted", "at least one"),
        ({"readings": [{"level_dbuv": 50}]}, "readings.0.level_dbuv", "is not known of a reading"),
        ({"readings": [{"kind": "level", "emission": "48", "value_db": 300}]}, "readings.0.value_db", "-20 to 130"),
        ({"readings": [{"kind": "scan list", "text": ""}]}, "readings.0.text", "is empty"),
        ({"readings": {}}, "readings", "a list"),
        ({"roof": None}, "roof", "an object"),
        ({"roofs": []}, "roofs", "roof, chains, now"),
    ],
)
def test_a_wrong_question_is_refused_at_its_field(client, change, field, words):
    response = ask(client, **change)
    error = refused(response, response.status_code)
    assert response.status_code in (404, 422)
    assert words in error["message"]
    if field:
        assert error["field"] == field


@pytest.mark.parametrize("word", ["NaN", "Infinity", "-Infinity", "1e999"])
def test_numbers_that_are_none_are_refused(client, word):
    body = f'{{"roof": {{"latitude_deg": {word}, "longitude_deg": 0}}}}'
    error = refused(client.post("/api/assess", content=body, headers={"Content-Type": "application/json"}))
    assert "finite number" in error["message"]


@pytest.mark.parametrize("body", [b"", b"{", b"[]", b"null", b'"roof"', b"\xff\xfe", b"[" * 5000, b'{"roof": 1}'])
def test_a_body_that_is_no_question_is_refused_in_plain_words(client, body):
    response = client.post("/api/assess", content=body, headers={"Content-Type": "application/json"})
    error = refused(response, response.status_code)
    assert response.status_code in (400, 422)
    assert "pydantic" not in error["message"]


def test_half_a_letter_is_refused_not_stored(client):
    body = b'{"roof": {"latitude_deg": 1, "longitude_deg": 1, "\\ud800": 1}, "chains": [{"name": "\\udfff"}]}'
    refused(client.post("/api/assess", content=body, headers={"Content-Type": "application/json"}))


@pytest.mark.parametrize(("latitude", "longitude", "words"), [(0.0, 0.0, "no elevation"), (44.65, -37.0, "sea|water")])
def test_a_place_that_is_no_roof_says_what_to_do(client, latitude, longitude, words):
    import re

    error = refused(ask(client, roof={"latitude_deg": latitude, "longitude_deg": longitude}))
    assert re.search(words, error["message"])


def test_an_emission_without_ground_has_a_reason(client):
    answer = ask(client).json()
    for emission in answer["emissions"]:
        assert (emission["path"] is None) == (emission["reason"] is not None)


def test_every_number_of_the_answer_is_finite(client):
    def walk(node):
        if isinstance(node, dict):
            return [leaf for value in node.values() for leaf in walk(value)]
        if isinstance(node, list):
            return [leaf for value in node for leaf in walk(value)]
        return [node]

    numbers = [leaf for leaf in walk(ask(client).json()) if isinstance(leaf, float)]
    assert len(numbers) > 1000
    assert all(math.isfinite(number) for number in numbers)


def test_a_path_carries_what_its_drawing_needs(client):
    emission = ask(client).json()["emissions"][0]
    query = {
        "from_latitude_deg": emission["latitude_deg"],
        "from_longitude_deg": emission["longitude_deg"],
        "to_latitude_deg": ROOF["latitude_deg"],
        "to_longitude_deg": ROOF["longitude_deg"],
        "frequency_mhz": emission["frequency_mhz"],
        "antenna_agl_m": emission["antenna_agl_m"],
    }
    response = client.get("/api/path", params=query)
    assert response.status_code == 200
    drawing = response.json()["drawing"]
    lengths = {
        len(drawing[key])
        for key in ("distance_km", "ground_amsl_m", "bulge_m", "line_amsl_m", "first_fresnel_m", "water")
    }
    assert len(lengths) == 1
    assert drawing["distance_km"][-1] == pytest.approx(emission["distance_km"], abs=0.01)
    assert response.json()["sentence"] == emission["path"]["sentence"]


@pytest.mark.parametrize(
    ("change", "field"),
    [
        ({"frequency_mhz": "nan"}, "frequency_mhz"),
        ({"frequency_mhz": 5}, "frequency_mhz"),
        ({"to_latitude_deg": "north"}, "to_latitude_deg"),
        ({"aerial_agl_m": -5}, "aerial_agl_m"),
        ({"polarisation": "round"}, "polarisation"),
    ],
)
def test_a_wrong_path_is_refused_at_its_field(client, change, field):
    query = {
        "from_latitude_deg": 44.5,
        "from_longitude_deg": -37.2,
        "to_latitude_deg": ROOF["latitude_deg"],
        "to_longitude_deg": ROOF["longitude_deg"],
        "frequency_mhz": 600,
    }
    assert refused(client.get("/api/path", params=query | change))["field"] == field


def test_a_path_without_its_ends_says_what_is_missing(client):
    error = refused(client.get("/api/path"))
    assert error["message"] == "from_latitude_deg is missing: it is needed here"


def test_skyline_answers_over_http(client):
    answer = client.get("/api/skyline", params={"latitude_deg": 44.3, "longitude_deg": -37.4507, "reach_km": 30})
    assert answer.status_code == 200
    seen = answer.json()
    assert len(seen["angle_deg"]) == 720
    assert {"id", "stands", "above_horizon_deg", "horizon_km"} <= set(seen["transmitters"][0])
    refused = client.get("/api/skyline", params={"latitude_deg": 44.3, "longitude_deg": -37.4507, "reach_km": 0})
    assert refused.status_code == 422
    assert refused.json()["error"]["field"] == "reach_km"


def test_an_impossible_obstacle_names_its_field(client):
    roof = {"latitude_deg": 44.3, "longitude_deg": -37.4507}
    house = {"bearing_deg": 60.0, "distance_m": 30.0, "height_agl_m": 14.0, "width_m": -1.0}
    answer = client.post("/api/assess", json={"roof": roof | {"obstacles": [house]}})
    assert answer.status_code == 422
    assert answer.json()["error"]["field"] == "roof.obstacles.0.width_m"


def test_a_wrong_chain_among_several_is_named_with_its_part_and_place(client):
    chain = next(one for one in client.get("/api/chains").json()["chains"] if one["name"] == "high-gain")
    chain = {key: chain[key] for key in chain if key not in ("id", "created", "updated")}
    chain["parts"][1]["length_m"] = 99999
    error = refused(ask(client, chains=["roof-yagi", "loft-dipole", chain]))
    assert error["field"] == "chains[2].parts[1].length_m"
    assert error["message"].startswith('chain "High-gain roof aerial": feeder "Feeder from the roof": length_m 99999')
