"""The invented island and its masts: what the demo needs to be interesting, whatever its exact shape."""

import math

import numpy as np
import pytest
import rasterio
from pyproj import Geod
from scipy import ndimage

from app.channels import centre_mhz
from app.demo import relief, scenario
from app.demo.relief import COLUMNS, ROWS, ensure_demo_relief, island_heights_m
from app.demo.scenario import DEMO_ROOFS, MULTIPLEXES, RASTER, emissions, ensure_demo, transmitters
from app.systems import mode_of
from app.transmitters.model import Emission, Multiplex, Transmitter
from app.transmitters.rows import Source
from app.transmitters.store import Store
from terrain.errors import CacheError
from terrain.mosaic import Ground

PIXEL_KM2 = (111.11 / 3600) * (79.78 / 3600)  # at 44.3° N
GEOD = Geod(ellps="WGS84")


@pytest.fixture(scope="module")
def heights():
    return island_heights_m()


@pytest.fixture(scope="module")
def lands(heights):
    """Labels of connected land and their areas in km², largest first."""
    labels, count = ndimage.label(heights > 0)
    areas = np.bincount(labels.ravel())[1:] * PIXEL_KM2
    assert count == len(areas)
    return labels, np.argsort(-areas) + 1, np.sort(areas)[::-1]


def height_at(heights, latitude_deg, longitude_deg):
    row = int((relief.NORTH_DEG - latitude_deg) * 3600)
    return heights[row, int((longitude_deg - relief.WEST_DEG) * 3600)]


# The relief


def test_the_island_is_the_same_every_time(heights):
    assert (island_heights_m() == heights).all()


def test_it_is_one_arc_second_of_whole_metres(heights):
    assert (heights.shape, heights.dtype) == ((ROWS, COLUMNS), np.int16)
    assert math.isclose((relief.NORTH_DEG - relief.SOUTH_DEG) * 3600, ROWS)
    assert math.isclose((relief.EAST_DEG - relief.WEST_DEG) * 3600, COLUMNS)


def test_the_sea_is_exactly_zero_and_reaches_every_edge(heights):
    assert heights.min() == 0
    edges = np.concatenate([heights[0], heights[-1], heights[:, 0], heights[:, -1]])
    assert (edges == 0).all()
    assert 0.12 < (heights > 0).mean() < 0.35


def test_there_are_two_lands_of_very_different_size(lands):
    _, _, areas = lands
    assert 1_000 < areas[0] < 2_500
    assert 200 < areas[1] < 600
    assert areas[2:].sum() < 30  # skerries


def test_a_strait_of_open_sea_lies_between_them(heights, lands):
    """Distance from the second land to the first, over the raster thinned eightfold."""
    labels, order, _ = lands
    thin = labels[::8, ::8]
    away_km = ndimage.distance_transform_edt(thin != order[0], sampling=[8 * 111.11 / 3600, 8 * 79.78 / 3600])
    assert 25 < away_km[thin == order[1]].min() < 60


def test_it_has_hills_plains_and_valleys(heights):
    land = heights[heights > 0]
    assert 500 < land.max() < 1_000
    assert 20 < np.median(land) < 120
    assert 0.03 < (land > 250).mean() < 0.25
    # Along the backbone's crest the ground goes up and down by more than a hundred metres.
    start, end = relief.LANDS[0].ridges[1].start, relief.LANDS[0].ridges[1].end
    share = np.linspace(0.1, 0.9, 200)
    crest = [
        height_at(heights, *relief.position_deg(a, b))
        for a, b in zip(start[0] + share * (end[0] - start[0]), start[1] + share * (end[1] - start[1]), strict=True)
    ]
    assert np.ptp(crest) > 100
    assert min(crest) > 200


def test_slopes_are_those_of_hills_not_of_noise_or_walls(heights):
    north, east = np.gradient(heights[1800:3400, 200:1800].astype(float), 111.11e3 / 3600, 79.78e3 / 3600)
    slope_deg = np.degrees(np.arctan(np.hypot(north, east)))[heights[1800:3400, 200:1800] > 0]
    assert 1 < np.median(slope_deg) < 12
    assert 8 < np.percentile(slope_deg, 95) < 35
    assert slope_deg.max() < 65
    assert np.abs(np.diff(heights.astype(int), axis=0)).max() < 60


def test_the_file_is_placed_whole_and_made_once(tmp_path, heights):
    path = ensure_demo_relief(tmp_path / "deep" / "folder")
    with rasterio.open(path) as raster:
        assert raster.crs.to_epsg() == 4326
        assert tuple(round(edge, 9) for edge in raster.bounds) == (-37.8, 43.8, -36.6, 44.8)
        assert (raster.read(1) == heights).all()
    assert path.stat().st_size < 6e6
    made = path.stat().st_mtime_ns
    assert ensure_demo_relief(tmp_path / "deep" / "folder") == path
    assert path.stat().st_mtime_ns == made
    assert sorted(file.name for file in path.parent.iterdir()) == [path.name, f"{path.name}.gainworth.toml"]
    assert Ground.open([path], tmp_path).rasters[0].kind == "bare"


def test_a_folder_that_cannot_be_written_says_what_to_set(tmp_path):
    (tmp_path / "file").write_text("x")
    with pytest.raises(CacheError, match="set GAINWORTH_CACHE_DIR"):
        ensure_demo_relief(tmp_path / "file")


# The scenario


def by_id(key):
    return next(e for e in emissions() if e.id == key)


def test_every_emission_has_a_known_mode_a_channel_and_an_id_of_its_own():
    rows = emissions()
    assert len({e.id for e in rows}) == len(rows) == 11
    for e in rows:
        assert mode_of(e.system, e.mode).noise_bandwidth_mhz(e.bandwidth_mhz) > 7
        assert centre_mhz(RASTER, e.channel) == (e.frequency_mhz, 8)
    assert {e.multiplex_id for e in rows} == {m.id for m in MULTIPLEXES}
    assert {e.transmitter_id for e in rows} == {t.id for t in transmitters()}
    assert {e.system for e in rows} == {"DVB-T", "DVB-T2"}


def test_the_masts_and_roofs_stand_on_land(heights):
    for t in transmitters():
        assert height_at(heights, t.latitude_deg, t.longitude_deg) > 5, t.name
    for roof in DEMO_ROOFS:
        assert height_at(heights, roof.latitude_deg, roof.longitude_deg) > 5, roof.name


def test_the_relay_sends_the_strong_masts_multiplexes_with_the_other_polarisation():
    strong = {e.multiplex_id: e for e in emissions() if e.transmitter_id == "northern-range"}
    relay = {e.multiplex_id: e for e in emissions() if e.transmitter_id == "eastern-hill"}
    assert strong.keys() == relay.keys()
    for key, e in relay.items():
        assert (e.polarisation, strong[key].polarisation) == ("vertical", "horizontal")
        assert e.erp_kw < strong[key].erp_kw / 100
        assert e.channel != strong[key].channel


def test_one_channel_is_used_by_two_masts_for_two_multiplexes():
    pairs = [
        (a.id, b.id)
        for a in emissions()
        for b in emissions()
        if a.id < b.id and a.channel == b.channel and a.multiplex_id != b.multiplex_id
    ]
    assert pairs == [("far-island-45", "southern-spur-45")]


def test_the_far_mast_is_60_to_90_km_away_over_mostly_sea(heights):
    far = next(t for t in transmitters() if t.id == "far-island")
    for roof in DEMO_ROOFS:
        ends = (far.longitude_deg, far.latitude_deg, roof.longitude_deg, roof.latitude_deg)
        km = GEOD.inv(*ends)[2] / 1e3
        sea = [height_at(heights, b, a) == 0 for a, b in GEOD.npts(*ends, 500)]
        assert 60 < km < 90, roof.name
        assert np.mean(sea) > 0.5, roof.name


@pytest.fixture
def store(tmp_path):
    return Store.open(tmp_path)


def test_an_empty_store_starts_with_the_demo_and_four_chains(store):
    ensure_demo(store)
    assert set(store.emissions()) == set(emissions())
    assert [s.id for s in store.sources()] == ["demo"]
    assert store.list_chains()[0]["name"] == "loft-dipole"
    assert len(store.list_chains()) == 4


def test_a_second_start_changes_nothing(store):
    ensure_demo(store)
    store.delete_chain("roof-yagi")
    chains, sources = store.list_chains(), store.sources()
    ensure_demo(store)
    assert (store.list_chains(), store.sources()) == (chains, sources)


def test_a_store_with_real_masts_gets_chains_but_no_demo(store):
    mast = Transmitter("m", "M", 44.0, -37.0, None, "mine")
    row = Emission("e", "m", "x", "47", 682, 8, "DVB-T2", "256-QAM 2/3", 1, "horizontal", 50)
    store.replace_source(Source("mine", "mine"), [mast], [row], [Multiplex("x", "X")])
    ensure_demo(store)
    assert [s.id for s in store.sources()] == ["mine"]
    assert len(store.list_chains()) == 4


def test_the_demo_of_an_older_version_is_renewed(store, monkeypatch):
    monkeypatch.setattr(scenario, "MULTIPLEXES", (*MULTIPLEXES, Multiplex("old", "Old")))
    ensure_demo(store)
    assert "old" in store.multiplexes()
    monkeypatch.undo()
    ensure_demo(store)
    assert "old" not in store.multiplexes()
