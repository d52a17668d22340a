"""The drawing of a path in the report: hand geometry, words for those who cannot see it, and no markup from outside."""

from __future__ import annotations

import re
from xml.etree import ElementTree

import pytest

from app.report.drawing import BOTTOM, HEADROOM, LEFT, RIGHT, TOP, path_svg, round_steps
from app.report.masts import bearing_words
from app.roof import Obstacle

SVG = "{http://www.w3.org/2000/svg}"


def path(ground_m, distance_km=(0.0, 4.0, 5.0, 6.0, 10.0), bulge_m=None, radius_m=5.0, bare_m=None, water=None):
    """A line 50 m up over a ground; the first zone has one radius but at its ends."""
    count = len(distance_km)
    return {
        "drawing": {
            "distance_km": list(distance_km),
            "ground_amsl_m": list(ground_m),
            "bare_amsl_m": list(bare_m or ground_m),
            "bulge_m": list(bulge_m or [0.0] * count),
            "line_amsl_m": [50.0] * count,
            "first_fresnel_m": [0.0, *[radius_m] * (count - 2), 0.0],
            "water": list(water or [False] * count),
        },
        "terms": {"worst_point_km": 4.0, "obstacle_into_line_m": -2.0},
    }


def shapes(document, kind, mast="Mast", obstacles=()):
    drawn = ElementTree.fromstring(path_svg(document, mast, obstacles, "told"))
    return [one.get("d") or one.text for one in drawn.iter() if one.get("class") == kind]


def heights(line):
    """Heights in metres that a line passes, by the scale of this drawing: 0 m at the bottom."""
    high = 50 + HEADROOM * 5
    return [(BOTTOM - float(y)) * high / (BOTTOM - TOP) for y in re.findall(r"[ML][\d.]+ ([\d.]+)", line)]


def test_the_roof_stands_left_and_the_mast_right():
    mast, roof = shapes(path([0, 0, 0, 0, 0]), "end")
    assert mast.startswith(f"M{RIGHT:.1f} ")
    assert roof.startswith(f"M{LEFT:.1f} ")


def test_where_the_ground_stays_under_the_zone_nothing_is_filled():
    assert shapes(path([0, 44, 44, 44, 0]), "taken") == []


def test_only_what_the_ground_enters_of_the_zone_is_filled():
    """Line at 50 m, radius 5 m, ground at 48 m: the zone is taken from 45 to 48 m and no farther."""
    (taken,) = shapes(path([0, 48, 48, 48, 0]), "taken")
    assert [min(heights(taken)), max(heights(taken))] == pytest.approx([45, 48], abs=0.05)  # a tenth of a unit


def test_a_ridge_through_the_whole_zone_fills_it_to_its_upper_edge():
    drawn = path([0, 51, 51, 51, 0], radius_m=0.5)
    (taken,) = shapes(drawn, "taken")
    tops = [float(y) for y in re.findall(r"[ML][\d.]+ ([\d.]+)", taken)]
    line = float(re.findall(r" ([\d.]+)L", shapes(drawn, "line")[0])[0])
    ground = min(float(y) for y in re.findall(r"[ML][\d.]+ ([\d.]+)", shapes(drawn, "surface")[0]))
    # Half a metre either side of the line, and the ground a whole metre above it.
    assert line - min(tops) == pytest.approx((line - ground) / 2, abs=0.15)
    assert max(tops) - line == pytest.approx((line - ground) / 2, abs=0.15)


def test_the_earths_curve_lifts_the_ground():
    (surface,) = shapes(path([0, 10, 10, 10, 0], bulge_m=[0, 7, 8, 7, 0]), "surface")
    assert heights(surface)[1:4] == pytest.approx([17, 18, 17], abs=0.05)


def test_bare_ground_is_dotted_only_where_houses_or_trees_are_taken_off():
    assert shapes(path([0, 10, 10, 10, 0]), "bare") == []
    assert len(shapes(path([0, 10, 10, 10, 0], bare_m=[0, 4, 4, 4, 0]), "bare")) == 1


def test_an_obstacle_stands_at_its_distance_from_the_roof():
    (line,) = shapes(path([0, 0, 0, 0, 0]), "obstacle", obstacles=[Obstacle(0, 1000, 20, 10)])
    assert float(line[1:].split()[0]) == pytest.approx(LEFT + (RIGHT - LEFT) / 10, abs=0.05)  # 1 of 10 km


def test_sea_is_marked_and_a_single_point_of_it_is_not():
    assert len(shapes(path([0] * 5, water=[False, True, True, False, False]), "water")) == 2  # a double wave
    assert shapes(path([0] * 5, water=[False, True, False, False, False]), "water") == []


def test_names_stay_words_and_long_ones_are_shortened():
    svg = path_svg(path([0] * 5), "<script>&\"'" + "x" * 300, (), 'a "quoted" <b>')
    drawn = ElementTree.fromstring(svg)
    assert drawn.get("aria-label") == 'a "quoted" <b>'
    assert not list(drawn.iter(f"{SVG}script"))
    assert max(len(one.text) for one in drawn.iter(f"{SVG}text")) == 60


@pytest.mark.parametrize(
    ("low", "high", "count", "steps"),
    [(0, 52, 7, [0, 10, 20, 30, 40, 50]), (-3, 4, 4, [-2, 0, 2, 4]), (5, 5, 4, [5])],
)
def test_axis_steps_are_round_and_inside(low, high, count, steps):
    assert round_steps(low, high, count) == steps


def test_a_bearing_just_west_of_north_is_not_told_as_360():
    assert [bearing_words(one) for one in (359.7, -0.2, 5.4, 359.4)] == ["000°", "000°", "005°", "359°"]
