"""Bare ground under a surface model: slopes and crests stay, houses go. Heights are made by the test."""

import numpy as np
import pytest
from affine import Affine

from terrain.ground import bare_ground_m
from terrain.mosaic import Ground
from terrain.profile import sample_profile
from terrain.raster import declare

METRE = 1 / 111_195  # of latitude, in degrees


@pytest.fixture
def opened(write_raster, tmp_path):
    """Ground of heights (r, c) at a spacing in metres, at the equator, where a degree is as long either way."""

    def made(heights, spacing_m=1.0, kind="surface"):
        pixel = spacing_m * METRE
        path = write_raster(heights.astype("float32"), transform=Affine(pixel, 0, 8, 0, -pixel, 0))
        declare(path, kind=kind)
        return Ground.open([path], tmp_path / "cache")

    return made


def middle(ground, rows, columns, spacing_m=1.0):
    return -(rows / 2) * spacing_m * METRE, 8 + (columns / 2) * spacing_m * METRE


def slope_m(size, fall):
    """A plane that rises eastward by `fall` per sample."""
    return np.broadcast_to(200 + fall * np.arange(size), (size, size)).copy()


@pytest.mark.parametrize("fall", [0.0, 0.2, 0.5])
def test_a_house_on_a_slope_leaves_the_slope(opened, fall):
    """12 m of house, 16 by 20 m, on a plane: within 0.3 m of the plane, which a low quantile misses by metres."""
    heights = slope_m(240, fall)
    heights[112:128, 110:130] += 12
    ground = opened(heights)
    assert bare_ground_m(ground, *middle(ground, 240, 240)) == pytest.approx(200 + fall * 119.5, abs=0.3)


def test_bare_ground_never_lies_above_the_surface(opened):
    heights = slope_m(240, 0.1) + np.random.default_rng(1).uniform(0, 6, (240, 240))
    ground = opened(heights)
    lat, lon = (np.repeat(one, 50) for one in middle(ground, 240, 240))
    lon = lon + np.linspace(-40, 40, 50) * METRE
    assert (bare_ground_m(ground, lat, lon) <= ground.elevation_m(lat, lon) + 1e-9).all()


@pytest.mark.parametrize("spacing_m", [10.0, 30.0, 90.0])
def test_a_crest_is_no_house(opened, spacing_m):
    """A ridge of 30 % on both sides: its top must not be taken for cover."""
    rows = np.abs(np.arange(121) - 60)[:, None] * -0.3 * spacing_m + 900
    ground = opened(np.broadcast_to(rows, (121, 121)).copy(), spacing_m)
    lat, lon = middle(ground, 121, 121, spacing_m)
    assert bare_ground_m(ground, lat, lon) == pytest.approx(900, abs=0.01 * spacing_m)


def test_a_raster_of_bare_ground_answers_as_it_is(opened):
    heights = slope_m(240, 0.2)
    heights[112:128, 110:130] += 12
    ground = opened(heights, kind="bare")
    place = middle(ground, 240, 240)
    assert bare_ground_m(ground, *place) == ground.elevation_m(*place)


def test_missing_ground_stays_missing(opened):
    ground = opened(slope_m(60, 0.1))
    assert np.isnan(bare_ground_m(ground, 5.0, 8.0))


def test_a_path_over_houses_keeps_its_surface_and_gets_the_ground(opened):
    """Houses of 8 m, 12 by 12 m in every 40 m, both ends between them: the ground is level at 200 m."""
    heights = np.full((600, 600), 200.0)
    for top in range(10, 590, 40):
        for left in range(10, 590, 40):
            heights[top : top + 12, left : left + 12] += 8
    ground = opened(heights)
    profile = sample_profile(ground, -100 * METRE, 8 + 100 * METRE, -500 * METRE, 8 + 480 * METRE)
    assert profile.ground_amsl_m.max() == pytest.approx(208, abs=0.1)
    assert profile.bare_amsl_m == pytest.approx(200, abs=0.3)
    assert profile.kinds == ("surface",)
