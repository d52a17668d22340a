"""Surroundings as land cover shows them, in every question that a roof is asked."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
import rasterio
from affine import Affine

from app.block_query import BlockQuestion, block_document
from app.chain_file import import_text
from app.cheapest import Wish, cheapest_document
from app.demo.scenario import ensure_demo
from app.planner import assess
from app.report.content import report_content
from app.request import AssessRequest
from app.roof import Roof
from app.sweeps import sweep_document
from app.transmitters.store import Store
from terrain.cover import Cover
from terrain.mosaic import Ground
from terrain.overlay import Overlay

ROOF = Roof(44.12, -37.5134, 8.0, "mapped")
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
kind = "feeder"
id = "f15"
name = "15 m"
price = 12
cable = "copper-7mm"
length_m = 15
"""


@pytest.fixture(scope="module")
def store(tmp_path_factory):
    """The demo's masts, and parts for sale."""
    one = Store.open(tmp_path_factory.mktemp("shop"))
    ensure_demo(one)
    import_text("parts.toml", PARTS, one)
    return one


@pytest.fixture(scope="module")
def town(demo_world, tmp_path_factory):
    """The demo's relief with a map on which houses stand all round the roof."""
    folder = tmp_path_factory.mktemp("town")
    path = folder / "WorldCover.tif"
    profile = {"driver": "GTiff", "width": 100, "height": 100, "count": 1, "dtype": "uint8", "crs": "EPSG:4326"}
    with rasterio.open(path, "w", **profile, transform=Affine(1e-4, 0, -37.5184, 0, -1e-4, 44.125)) as file:
        file.write(np.full((100, 100), 50, dtype="uint8"), 1)
    Path(f"{path}.gainworth.toml").write_text('classes = "worldcover"\nattribution = "© somebody"\n')
    rasters = [one.path for one in demo_world.ground.rasters]
    return Ground.open(rasters, folder / "cache", Overlay(Cover.open([path], folder / "cache")))


def answers(ask, ground):
    """The same question with the map's surroundings, with the same ones stated, and with none."""
    request = AssessRequest(ROOF, chains=("roof-yagi",), reach_km=60.0)
    roofs = [replace(ROOF, surroundings=word) for word in ("mapped", "suburban", "open")]
    return [ask(replace(request, roof=roof), ground) for roof in roofs]


@pytest.mark.parametrize("what", ["assess", "sweep", "cheapest", "block"])
def test_mapped_surroundings_count_as_if_they_had_been_stated(store, town, what):
    question = BlockQuestion(4, "star", 20.0, 5.0, "short", "en-60728-1", "block")
    asks = {
        "assess": lambda request, ground: assess(request, store, ground)["emissions"],
        "sweep": lambda request, ground: sweep_document(request, store, ground, heights_m=()),
        "cheapest": lambda request, ground: cheapest_document(request, Wish(1, 15.0, 0.0, 0.0, "EUR"), store, ground),
        "block": lambda request, ground: block_document(request, question, store, ground),
    }
    mapped, stated, bare = answers(asks[what], town)
    assert mapped == stated
    assert mapped != bare


def test_credits_of_ground_cover_and_coastline_stand_in_answer_and_report(store, town):
    request = AssessRequest(ROOF, chains=("roof-yagi", "loft-dipole"), reach_km=60.0)
    needed = {"© somebody", "Coastline: Natural Earth 1:10m, public domain"}
    assert needed <= set(assess(request, store, town)["credits"])
    assert needed <= set(report_content({"name": "roof"}, request, store, town)["sources"])
