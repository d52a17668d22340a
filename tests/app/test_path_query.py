"""One path as a document: which method and why, which ground, which refractivity."""

import numpy as np
import pytest

from app.path_query import path_document, told_path
from app.settings import load_settings
from app.world import open_world
from propagation.errors import MapError

MAST, ROOF = (44.2257, -37.4946), (44.3, -37.4507)  # of the demo's island


@pytest.fixture
def maps(tmp_path):
    """Both maps of Rec. ITU-R P.453 with one figure each."""
    folder = tmp_path / "maps"
    folder.mkdir()
    np.savetxt(folder / "DN50.TXT", np.full((121, 241), 60.0))
    np.savetxt(folder / "N050.TXT", np.full((121, 241), 350.0))
    return folder


def test_document_says_ground_method_and_difference(demo_world):
    document = path_document(demo_world.ground, *MAST, *ROOF, 600.0)
    assert document["ground"]["kinds"] == ["bare"]
    assert document["method"] == "p1812"
    assert document["method_reason"] == "P.1812 holds here and follows the ground of this path"
    difference = document["p1812"]["field_dbuv_m"][0] - document["p1546"]["field_dbuv_m"][0]
    assert document["difference_db"] == pytest.approx(difference, abs=1e-9)
    assert document["apart"].startswith(f"P.1546 shows {difference:.0f} dB less: ")
    told = told_path(document)
    for words in ("method: P.1812 holds here", "ground: bare", "refractivity: lapse", document["apart"]):
        assert words in told


def test_below_a_quarter_of_a_kilometre_p1546_answers_and_says_why(demo_world):
    document = path_document(demo_world.ground, *ROOF, ROOF[0] + 0.0015, ROOF[1], 600.0)
    assert document["p1812"] is None
    assert document["difference_db"] is document["apart"] is None
    assert document["method"] == "p1546"
    assert "P.1546 answers alone: path length 0.16" in document["method_reason"]
    assert "use 0.25 to 3000 km" in document["method_reason"]


def test_full_maps_replace_the_table(demo_world, maps):
    """A lapse of 60 N/km makes 6371 * 157 / 97 = 10312 km of effective radius (Rec. ITU-R P.1812-7, eq. 6)."""
    own = path_document(demo_world.ground, *MAST, *ROOF, 600.0)
    full = path_document(demo_world.ground, *MAST, *ROOF, 600.0, refractivity_maps=maps)
    assert full["refractivity"] == {"delta_n_per_km": 60.0, "n0": 350.0, "source": f"maps in {maps}"}
    assert full["terms"]["effective_earth_radius_km"] == pytest.approx(6371 * 157 / 97)
    assert own["refractivity"]["source"] == "table of the package, every 3 degrees"
    assert 30 < own["refractivity"]["delta_n_per_km"] < 60


def test_a_setting_points_to_the_full_maps(tmp_path, monkeypatch, maps):
    monkeypatch.setenv("GAINWORTH_REFRACTIVITY_MAPS", str(maps))
    assert load_settings(tmp_path).refractivity_maps == maps


def test_maps_that_are_not_there_are_refused_at_the_start(tmp_path, monkeypatch):
    for name in ("DATA", "CACHE"):
        monkeypatch.setenv(f"GAINWORTH_{name}_DIR", str(tmp_path / name.lower()))
    monkeypatch.setenv("GAINWORTH_REFRACTIVITY_MAPS", str(tmp_path / "nowhere"))
    with pytest.raises(MapError, match=r"no map .*DN50\.TXT: the folder must hold DN50\.TXT and N050\.TXT"):
        open_world()
