"""Both methods for every emission at a roof: what is used, why, and what sets them apart."""

import pytest

from app.assumptions import Assumptions
from app.demo.scenario import DEMO_ROOFS
from app.fields import fields_at
from app.roof import Obstacle, Roof

NORTH = Roof(DEMO_ROOFS[0].latitude_deg, DEMO_ROOFS[0].longitude_deg)


@pytest.fixture(scope="module")
def at(demo_world):
    def fields(roof=NORTH, method="both", availability_percent=99):
        found = demo_world.store.emissions_within(roof.latitude_deg, roof.longitude_deg, 150)
        return fields_at(roof, found, demo_world.ground, Assumptions(), availability_percent, method)

    return fields


def test_both_figures_their_difference_and_the_reason_are_kept(at):
    for field in at():
        assert field.difference_db == pytest.approx(field.p1812_dbuv_m - field.p1546_dbuv_m)
        assert (field.apart is not None) == (abs(field.difference_db) > 15)
        assert field.method == "p1812"
        assert field.path.ground_kinds == ("bare",)


def test_p1546_alone_says_so_and_doubts_more(at):
    for alone, both in zip(at(method="p1546"), at(), strict=True):
        assert alone.method == "p1546"
        assert alone.method_reason == "P.1546 was asked for"
        assert alone.difference_db is alone.p1812_dbuv_m is None
        assert alone.p1546_dbuv_m == pytest.approx(both.p1546_dbuv_m)
        assert alone.used_dbuv_m == pytest.approx(alone.p1546_dbuv_m + alone.doubt_db)


def test_too_near_for_p1812_p1546_answers_with_the_reason(at, demo_world):
    mast = demo_world.store.transmitters()[0]
    near = at(Roof(mast.latitude_deg + 0.0015, mast.longitude_deg))
    mine = [field for field in near if field.transmitter.id == mast.id]
    assert {field.method for field in mine} == {"p1546"}
    assert all("P.1546 answers alone: path length" in field.method_reason for field in mine)
    assert {field.method for field in near if field.transmitter.id != mast.id} == {"p1812"}


def test_an_obstacle_entered_weakens_only_what_comes_from_behind_it(at):
    open_roof = at()
    towards = next(field for field in open_roof if field.path.kind == "clear").bearing_deg
    house = Obstacle(bearing_deg=towards, distance_m=20.0, height_agl_m=16.0, width_m=12.0)
    for free, behind in zip(
        open_roof, at(Roof(NORTH.latitude_deg, NORTH.longitude_deg, obstacles=(house,))), strict=True
    ):
        if house.stands_towards(free.bearing_deg):
            assert behind.used_dbuv_m < free.used_dbuv_m - 10
            assert behind.p1546_dbuv_m < free.p1546_dbuv_m - 10
            assert behind.path.kind == "obstructed"
            assert "the obstacle 20 m from the aerial" in behind.path.sentence
            assert behind.path.sd_db >= free.path.sd_db
        else:
            assert behind.used_dbuv_m == free.used_dbuv_m
            assert behind.path.sentence == free.path.sentence
