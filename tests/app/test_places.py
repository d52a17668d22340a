"""Positions, compass and open tiles over the API and the command line."""

import sys
from pathlib import Path

import pytest
from starlette.testclient import TestClient

sys.path.insert(0, str(Path(__file__).parents[1] / "terrain"))
from tile_server import OWN_SOURCE, TileServer, hgt_tile

from app import open_tiles
from app.mapped import credits_of, with_surroundings
from app.roof import Roof
from app.web.main import create_app
from terrain.cover import Cover
from terrain.mosaic import Ground
from terrain.overlay import Overlay


@pytest.fixture
def client(demo_world):
    with TestClient(create_app(demo_world.store, demo_world.ground), base_url="http://localhost") as client:
        yield client


@pytest.fixture
def tiles(tmp_path, monkeypatch):
    monkeypatch.setenv("GAINWORTH_DATA_DIR", str(tmp_path / "data"))
    monkeypatch.setenv("GAINWORTH_CACHE_DIR", str(tmp_path / "cache"))
    for name in ("http_proxy", "HTTP_PROXY", "https_proxy", "HTTPS_PROXY"):
        monkeypatch.delenv(name, raising=False)
    (tmp_path / "data").mkdir()
    with TileServer() as server:
        (tmp_path / "data" / "sources.toml").write_text(OWN_SOURCE.format(url=server.url))
        server.files["/N49E011.hgt.gz"] = hgt_tile(1)
        yield server


def test_a_position_is_read_and_a_doubt_is_asked(client):
    found = client.get("/api/position", params={"text": "44°30'N 37°12'W"}).json()
    assert (found["latitude_deg"], found["longitude_deg"]) == pytest.approx((44.5, -37.2))
    assert found["question"] is None
    assert "swapped" in client.get("/api/position", params={"text": "5.4,52.3"}).json()["question"]
    refused = client.get("/api/position", params={"text": "somewhere"})
    assert refused.status_code == 422
    assert "cannot be read" in refused.json()["error"]["message"]


def test_the_compass_is_told_with_day_and_error(client):
    found = client.get("/api/declination", params={"latitude_deg": 0, "longitude_deg": 120, "day": "2025-01-01"}).json()
    assert found["declination_deg"] == pytest.approx(-0.16, abs=0.01)
    assert found["error_deg"] > 0.2
    assert "2025-01-01" in found["text"]


def test_nothing_is_fetched_before_the_user_agrees(client, tiles):
    circle = {"latitude_deg": 49.5, "longitude_deg": 11.5, "reach_km": 5, "source": "hills"}
    plan = client.get("/api/download-plan", params=circle).json()
    assert (plan["tiles"], plan["to_fetch"], plan["attribution"]) == (1, 1, "© nobody")
    assert client.post("/api/download", json=circle).status_code == 422
    assert client.post("/api/download", json=circle | {"agreed_to_go_online": False}).status_code == 422
    assert tiles.requests == []


def test_the_page_fetches_tiles_and_the_ground_is_opened_anew(client, tiles):
    before = client.app.state.context.ground
    circle = {"latitude_deg": 49.5, "longitude_deg": 11.5, "reach_km": 5, "source": "hills"}
    assert client.post("/api/download", json=circle | {"agreed_to_go_online": True}).status_code == 202
    client.app.state.context.downloads.wait(10)
    state = client.get("/api/download").json()
    assert state["state"] == "ended"
    assert state["summary"] == "1 fetched."
    assert client.app.state.context.ground is not before
    rasters = client.get("/api/health").json()["ground"]["rasters"]
    assert [one["attribution"] for one in rasters if one["name"] == "N49E011.hgt.gz"] == ["© nobody"]
    assert client.delete("/api/download").status_code == 200


def test_sources_are_listed_with_their_licence(client, tiles):
    listed = {one["id"]: one for one in client.get("/api/tile-sources").json()["sources"]}
    assert {"glo-30", "glo-90", "srtm-gz", "worldcover", "hills"} <= set(listed)
    assert all(one["licence"] and one["attribution"] for one in listed.values())


def test_an_unknown_source_or_reach_names_what_is_allowed(client, tiles):
    place = {"latitude_deg": 0, "longitude_deg": 0}
    wrong = client.get("/api/download-plan", params=place | {"source": "moon"}).json()["error"]
    assert "use glo-30, glo-90, srtm-gz, hills" in wrong["message"]
    assert (
        "1 to 500 km" in client.get("/api/download-plan", params=place | {"reach_km": 900}).json()["error"]["message"]
    )
    with pytest.raises(ValueError, match="no source of cover"):
        open_tiles.plan("cover", 0, 0, 10, "glo-30")


def test_mapped_surroundings_follow_the_cover_and_say_so(tmp_path):
    import numpy as np
    import rasterio
    from affine import Affine

    path = tmp_path / "WorldCover.tif"
    with rasterio.open(
        path, "w", driver="GTiff", width=200, height=200, count=1, dtype="uint8", crs="EPSG:4326",
        transform=Affine(1e-4, 0, 8, 0, -1e-4, 47),
    ) as file:  # fmt: skip
        codes = np.full((200, 200), 30, dtype="uint8")
        codes[:, 100:] = 10
        file.write(codes, 1)
    Path(f"{path}.gainworth.toml").write_text('classes = "worldcover"\nattribution = "© somebody"\n')
    ground = Ground.open([], tmp_path / "c", Overlay(Cover.open([path], tmp_path / "c")))
    wood, told = with_surroundings(Roof(46.99, 8.015, surroundings="mapped"), ground)
    assert wood.surroundings == "trees"
    assert told.startswith("Surroundings by land cover: trees")
    assert with_surroundings(Roof(46.99, 8.005, surroundings="mapped"), ground)[0].surroundings == "open"
    assert with_surroundings(Roof(46.99, 8.015, surroundings="urban"), ground) == (
        Roof(46.99, 8.015, surroundings="urban"),
        "",
    )
    assert "No land cover is known" in with_surroundings(Roof(40, 8.0, surroundings="mapped"), ground)[1]
    assert credits_of(ground) == ["Coastline: Natural Earth 1:10m, public domain", "© somebody"]
