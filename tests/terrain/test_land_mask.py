"""Land and sea by the coastline."""

import numpy as np
import pytest

from terrain.land_mask import has_land, is_land, is_sea, near_sea


@pytest.mark.parametrize(
    ("latitude", "longitude", "land"),
    [
        (47.0, 8.0, True), (0.0, 20.0, True), (-89.9, 0.0, True), (-85.0, 179.9, True), (-25.0, 135.0, True),
        (68.0, 179.0, True), (68.0, -179.5, True), (71.2, -179.9, True),
        (45.0, -37.0, False), (0.0, -30.0, False), (89.9, 0.0, False), (30.0, 180.0, False), (30.0, -180.0, False),
        (57.0, 19.5, False), (43.0, 35.0, False),  # Baltic and Black Sea are sea
        (42.0, 51.0, False), (47.7, -87.5, True),  # the Caspian counts as sea, Lake Superior as land
    ],
)  # fmt: skip
def test_open_sea_and_inner_land_are_told_apart(latitude, longitude, land):
    """Natural Earth 1:10m land, looked up on any map."""
    assert bool(is_land(latitude, longitude)) is land
    assert bool(is_sea(latitude, longitude)) is not land


def test_longitudes_beyond_180_are_the_same_places():
    lon = np.linspace(-180, 180, 721)
    assert (is_land(66.0, lon) == is_land(66.0, lon + 360)).all()


def test_what_is_no_place_counts_as_land_so_that_it_stays_missing():
    assert is_land([np.nan, 91.0, 10.0], [0.0, 0.0, np.inf]).all()


def test_land_of_the_earth_has_its_share():
    """29.2 % of the surface is land (148.9 of 510.1 million km²; from memory); 0.6 points for ice shelves."""
    lat, lon = np.meshgrid(np.linspace(-89.95, 89.95, 1800), np.linspace(-179.95, 179.95, 1800), indexing="ij")
    share = np.average(is_land(lat, lon), weights=np.cos(np.deg2rad(lat)))
    assert share == pytest.approx(0.292, abs=0.006)


def test_a_box_has_land_if_any_cell_has():
    rng = np.random.default_rng(3)
    for south, west in zip(rng.integers(-80, 79, 60), rng.integers(-180, 180, 60), strict=True):
        lat, lon = np.meshgrid(south + (np.arange(120) + 0.5) / 120, west + (np.arange(120) + 0.5) / 120)
        assert has_land(south, west, south + 1, west + 1) == bool(is_land(lat, lon).any()) or _at_rim(south, west)


def _at_rim(south, west):
    """Boxes reach one cell over their sides."""
    lat, lon = np.meshgrid(south - 0.01 + (np.arange(123) + 0.5) / 120, west - 0.01 + (np.arange(123) + 0.5) / 120)
    return bool(is_land(lat, lon).any())


def test_near_the_sea_reaches_as_far_as_asked():
    assert bool(near_sea(43.6, 7.2, 10.0))  # a shore of the Mediterranean
    assert not bool(near_sea(47.0, 8.0, 50.0))
