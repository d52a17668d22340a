"""What holds for every address: policy, hosts, sizes, errors, libraries, lists, what is kept."""

import hashlib
import logging

import pytest
from starlette.testclient import TestClient

from app.demo.scenario import DEMO_ROOFS
from app.settings import Settings
from app.transmitters.store import Store
from app.web.assets import ASSETS
from app.web.main import create_app

HERE = "http://127.0.0.1"
SAVED = {"name": "Mill Lane 3", "roof": {"latitude_deg": 44.4, "longitude_deg": -37.3}}


@pytest.fixture(scope="module")
def client(demo_world):
    return TestClient(create_app(demo_world.store, demo_world.ground), base_url=HERE)


@pytest.fixture
def own(demo_world, tmp_path):
    """Return a server over an empty store of its own."""
    settings = Settings(host_names=["roof.example"], largest_body_kb=16)
    return TestClient(create_app(Store.open(tmp_path), demo_world.ground, settings), base_url=HERE)


def error_of(response, status):
    assert response.status_code == status, response.text
    error = response.json()["error"]
    assert set(error) == {"code", "message", "field", "allowed"}
    return error


@pytest.mark.parametrize(
    "path", ["/", "/docs", "/api/health", "/static/scripts/main.js", "/vendor/leaflet.js", "/nowhere"]
)
def test_every_answer_carries_the_policy(client, path):
    headers = client.get(path).headers
    policy = headers["content-security-policy"]
    assert "default-src 'self'" in policy
    assert "unsafe" not in policy
    assert "http" not in policy
    assert headers["x-content-type-options"] == "nosniff"
    assert headers["cross-origin-resource-policy"] == "same-origin"


@pytest.mark.parametrize("name", sorted(ASSETS))
def test_library_files_are_the_ones_we_looked_at(client, name):
    response = client.get(f"/vendor/{name}")
    assert hashlib.sha256(response.content).hexdigest() == ASSETS[name].sha256


@pytest.mark.parametrize("name", ["nothing.js", "..%2F..%2Fpyproject.toml", "leaflet-src.js", "maplibre-gl.js.map"])
def test_no_other_file_of_a_package_can_be_asked_for(client, name):
    error_of(client.get(f"/vendor/{name}"), 404)


@pytest.mark.parametrize(
    "path", ["/nowhere", "/api/nowhere", "/static/nowhere.js", "/static/../app/cli.py", "/tiles/relief/1/9/0"]
)
def test_nothing_there_has_the_shape_of_every_error(client, path):
    assert error_of(client.get(path), 404)["code"] == "not_found"


def test_a_method_that_is_not_answered_has_the_same_shape(client):
    response = client.delete("/api/health")
    assert "does not answer DELETE" in error_of(response, 405)["message"]
    assert "GET" in response.headers["allow"]


@pytest.mark.parametrize("host", ["evil.example", "evil.example:8790", "127.0.0.1.evil.example", "", "a b"])
def test_a_foreign_name_for_this_machine_is_refused(own, host):
    assert error_of(own.get("/api/health", headers={"Host": host}), 403)["code"] == "host"


@pytest.mark.parametrize("host", ["localhost:8790", "192.168.1.7:8790", "[::1]:8790", "roof.example", "ROOF.example:1"])
def test_addresses_and_listed_names_are_answered(own, host):
    assert own.get("/api/health", headers={"Host": host}).status_code == 200


@pytest.mark.parametrize(
    "headers", [{"Origin": "http://evil.example"}, {"Origin": "null"}, {"Sec-Fetch-Site": "cross-site"}]
)
def test_another_sites_page_cannot_change_anything(own, headers):
    assert error_of(own.post("/api/roofs", json=SAVED, headers=headers), 403)["code"] == "origin"
    assert own.get("/api/roofs").json() == {"roofs": []}


def test_our_own_page_can(own):
    headers = {"Origin": HERE, "Sec-Fetch-Site": "same-origin"}
    assert own.post("/api/roofs", json=SAVED, headers=headers).status_code == 201


def test_a_body_beyond_the_limit_is_refused_with_the_limit(own):
    error = error_of(own.post("/api/roofs", json=SAVED | {"note": "x" * 20_000}), 413)
    assert "16 kB" in error["message"]


def test_a_body_of_unstated_length_is_counted(own):
    pieces = (b"x" * 4096 for _ in range(100))
    error_of(own.post("/api/roofs", content=pieces, headers={"Content-Type": "application/json"}), 413)


def test_a_fault_of_ours_is_told_plainly_and_logged(own, caplog, monkeypatch):
    def broken(self):
        raise RuntimeError("secret detail")

    monkeypatch.setattr(Store, "list_roofs", broken)
    with caplog.at_level(logging.ERROR):
        response = own.get("/api/roofs")
    assert "secret" not in response.text
    assert error_of(response, 500)["code"] == "fault"
    assert "nosniff" in response.headers["x-content-type-options"]
    assert "secret detail" in caplog.text


def test_the_page_and_the_list_of_addresses_are_there(client):
    assert "<title>Gainworth</title>" in client.get("/").text
    assert client.get("/favicon.ico").headers["content-type"] == "image/svg+xml"
    documented = client.get("/openapi.json").json()["paths"]
    answers = {"assess", "path", "emissions", "transmitters", "multiplexes", "assumptions", "health"}
    kept = {"roofs", "roofs/{id}", "chains", "chains/{id}"}
    for path in (*(f"/api/{name}" for name in answers | kept), "/tiles/relief/{z}/{x}/{y}"):
        assert path in documented


def test_health_tells_ground_sources_and_the_demos_roofs(client, demo_world):
    health = client.get("/api/health").json()
    assert health["status"] == "ok"
    assert len(health["ground"]["rasters"]) == len(demo_world.ground.rasters) > 0
    assert [source["id"] for source in health["sources"]] == ["demo"]
    assert len(health["demo_roofs"]) == len(DEMO_ROOFS)
    kept = {one["name"] for one in client.get("/api/chains").json()["chains"]}
    assert {one["now"] for one in health["demo_roofs"]} <= kept


def test_lists_are_those_of_the_store(client, demo_world):
    store = demo_world.store
    assert [one["id"] for one in client.get("/api/emissions").json()["emissions"]] == [
        one.id for one in store.emissions()
    ]
    assert len(client.get("/api/transmitters").json()["transmitters"]) == len(store.transmitters())
    assert len(client.get("/api/multiplexes").json()["multiplexes"]) == len(store.multiplexes())
    assert any(one["id"] == "reserve_db" for one in client.get("/api/assumptions").json()["assumptions"])


def test_emissions_near_a_place_come_with_distance_nearest_first(client, demo_world):
    roof = client.get("/api/health").json()["demo_roofs"][0]
    query = {"latitude_deg": roof["latitude_deg"], "longitude_deg": roof["longitude_deg"]}
    near = client.get("/api/emissions", params=query).json()["emissions"]
    distances = [one["distance_km"] for one in near]
    assert distances == sorted(distances)
    assert len(distances) > 0


@pytest.mark.parametrize(
    ("query", "field"),
    [
        ({"latitude_deg": 4}, "longitude_deg"),
        ({"latitude_deg": "nan", "longitude_deg": 1}, "latitude_deg"),
        ({"latitude_deg": 1, "longitude_deg": 400}, "longitude_deg"),
        ({"reach_km": 0}, "reach_km"),
    ],
)
def test_a_wrong_place_is_refused_at_its_field(client, query, field):
    assert error_of(client.get("/api/emissions", params=query), 422)["field"] == field


def test_a_roof_is_kept_changed_and_forgotten(own):
    kept = own.post("/api/roofs", json=SAVED).json()
    assert own.get(f"/api/roofs/{kept['id']}").json() == kept
    changed = own.put(f"/api/roofs/{kept['id']}", json=SAVED | {"name": "Mill Lane 5"}).json()
    assert (changed["id"], changed["name"]) == (kept["id"], "Mill Lane 5")
    assert [one["name"] for one in own.get("/api/roofs").json()["roofs"]] == ["Mill Lane 5"]
    assert own.delete(f"/api/roofs/{kept['id']}").status_code == 204
    for method in ("get", "delete"):
        error_of(getattr(own, method)(f"/api/roofs/{kept['id']}"), 404)
    error_of(own.put(f"/api/roofs/{kept['id']}", json=SAVED), 404)


def test_a_name_with_markup_is_kept_as_text(own):
    name = "<img src=x onerror=alert(1)> & “roof”"
    assert own.post("/api/roofs", json=SAVED | {"name": name}).json()["name"] == name


@pytest.mark.parametrize(
    ("change", "field"),
    [
        ({"name": ""}, "name"),
        ({"name": 7}, "name"),
        ({"roof": {"latitude_deg": 99, "longitude_deg": 0}}, "roof.latitude_deg"),
        ({"id": "mine"}, "id"),
    ],
)
def test_a_roof_that_cannot_be_kept_is_refused_at_its_field(own, change, field):
    assert error_of(own.post("/api/roofs", json=SAVED | change), 422)["field"] == field
    assert own.get("/api/roofs").json() == {"roofs": []}


def test_a_chain_is_kept_under_a_new_name_and_used(client, own):
    chain = client.get("/api/chains").json()["chains"][0]
    chain = {key: value for key, value in chain.items() if key not in ("id", "created", "updated")}
    kept = own.post("/api/chains", json=chain | {"name": "mine"}).json()
    assert own.get("/api/chains/mine").json() == kept
    again = own.put(f"/api/chains/{kept['id']}", json=kept | {"title": "My own"})
    assert again.json()["title"] == "My own"
    assert own.delete("/api/chains/mine").status_code == 204
    assert own.get("/api/chains").json() == {"chains": []}


@pytest.mark.parametrize(
    "chain", [{}, {"name": "x"}, {"name": "x", "parts": [{"kind": "wire"}]}, {"name": "x", "parts": [], "colour": 1}]
)
def test_what_is_no_chain_is_refused_and_not_kept(own, chain):
    assert error_of(own.post("/api/chains", json=chain), 422)["code"] == "chain"
    assert own.get("/api/chains").json() == {"chains": []}


def test_a_deep_document_is_refused(own):
    nested: object = 1
    for _ in range(40):
        nested = [nested]
    assert "12 levels" in error_of(own.post("/api/chains", json={"name": "x", "parts": nested}), 422)["message"]


def test_relief_tiles_are_pictures_even_where_there_is_no_ground(client, demo_world):
    west, south, east, north = demo_world.ground.rasters[0].bounds
    import math

    zoom = 9
    x = int(((west + east) / 2 + 180) / 360 * 2**zoom)
    y = int((1 - math.asinh(math.tan(math.radians((south + north) / 2))) / math.pi) / 2 * 2**zoom)
    tile = client.get(f"/tiles/relief/{zoom}/{x}/{y}")
    dark = client.get(f"/tiles/relief/{zoom}/{x}/{y}?theme=dark")
    assert tile.headers["content-type"] == "image/webp"
    assert tile.content[8:12] == b"WEBP"
    assert tile.content != dark.content
    empty = client.get(f"/tiles/relief/{zoom}/0/0")
    assert empty.status_code == 200
    assert empty.content.startswith(b"\x89PNG")


def test_a_tile_named_with_the_grounds_version_may_be_kept(client, demo_world):
    assert (
        "immutable" in client.get(f"/tiles/relief/3/3/3?version={demo_world.ground.version}").headers["cache-control"]
    )
    assert "immutable" not in client.get("/tiles/relief/3/3/3?version=old").headers["cache-control"]


@pytest.mark.parametrize("path", ["/tiles/relief/40/0/0", "/tiles/relief/a/0/0", "/tiles/relief/1/0/0?theme=red"])
def test_a_tile_that_cannot_be_has_the_shape_of_every_error(client, path):
    error_of(client.get(path), 422)
