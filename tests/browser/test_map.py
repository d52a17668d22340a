"""The map: places the roof, follows it, and says what it shows."""

from __future__ import annotations

import io
import re

import numpy as np
import pytest
from PIL import Image
from playwright.sync_api import expect

from tests.browser.steps import EAST, NORTH, WEST, answered, settled, show, start, still

pytestmark = pytest.mark.browser


def test_a_click_on_the_map_places_the_roof(page):
    answered(page, WEST)
    settled(page)
    before = page.get_by_label("Roof at").input_value()
    roof = page.locator(".overlay .roof-point").bounding_box()
    page.mouse.click(roof["x"] + 8, roof["y"] + 2)
    expect(page.get_by_label("Roof at")).not_to_have_value(before)
    expect(page.locator("html")).to_have_attribute("data-asking", "no")
    latitude, longitude = map(float, page.get_by_label("Roof at").input_value().split(","))
    assert abs(latitude - WEST.latitude_deg) < 0.02
    assert 0 < longitude - WEST.longitude_deg < 0.1


def test_the_roof_is_dragged_on_the_map_and_the_chances_follow(page):
    show(page, "skyline", roof=WEST)
    page.wait_for_selector("#map[data-idle]")
    box = page.locator(".overlay .roof-point").bounding_box()
    before = page.get_by_label("Roof at").input_value()
    page.mouse.move(box["x"] + 2, box["y"] + 2)
    page.mouse.down()
    with page.expect_response("**/api/assess"):
        page.mouse.move(box["x"] + 14, box["y"] - 3, steps=4)
    page.mouse.up()
    still(page)
    latitude, longitude = map(float, page.get_by_label("Roof at").input_value().split(","))
    assert page.get_by_label("Roof at").input_value() != before
    assert latitude > WEST.latitude_deg
    assert longitude > WEST.longitude_deg


@pytest.mark.parametrize("webgl", [True, False])
def test_the_map_shows_relief_with_and_without_webgl(watched, browser, browser_without_webgl, webgl):
    page = watched.open(browser if webgl else browser_without_webgl)
    start(page)
    settled(page)
    assert page.locator("html").get_attribute("data-map") == ("maplibre" if webgl else "leaflet")
    shot = Image.open(io.BytesIO(page.locator("#map-view").screenshot())).convert("L")
    grey = np.asarray(shot, dtype=float)
    # Marks leave most neighbours equal everywhere; relief leaves few equal where there is land.
    unequal = (np.diff(grey, axis=1) != 0).astype(float)
    blocks = [unequal[y : y + 40, x : x + 40].mean() for y in range(0, 360, 40) for x in range(0, 300, 40)]
    assert max(blocks) > 0.6


def test_bearings_stand_on_the_frame_and_in_words(page, address):
    answered(page)
    settled(page)
    words = page.locator(".masts li").all_inner_texts()
    assert len(words) == len(page.request.get(f"{address}/api/transmitters").json()["transmitters"])
    assert all(re.match(r"^\d{3}° .+, [\d.]+\skm$", text) for text in words)
    expect(page.locator(".masts .chosen")).to_have_count(1)
    expect(page.locator(".overlay .label.chosen")).to_have_text(words_of(page.locator(".masts .chosen b")))
    expect(page.locator(".overlay .way.line")).to_have_count(1)


def words_of(locator) -> str:
    return locator.inner_text()


def points(page):
    """Where the roof and the far end of its path are drawn, and the frame of the map. [px]"""
    frame = page.locator("#map-view").bounding_box()
    roof, mast = (page.locator(one).bounding_box() for one in (".overlay .roof-point", ".overlay .mast"))
    return frame, roof, mast


def test_the_view_follows_a_roof_set_far_away_and_one_seen_from_afar(page):
    answered(page, WEST)
    settled(page)
    for button, roof in (("Zoom in", NORTH), ("Zoom out", EAST)):
        for _ in range(4):
            page.get_by_role("button", name=button).click()
        page.get_by_label("Roof at").fill(f"{roof.latitude_deg}, {roof.longitude_deg}")
        with page.expect_response("**/api/assess"):
            page.get_by_label("Roof at").press("Enter")
        still(page)
        frame, place, mast = points(page)
        for end in (place, mast):
            assert frame["x"] <= end["x"] <= frame["x"] + frame["width"]
            assert frame["y"] <= end["y"] <= frame["y"] + frame["height"]
        apart = np.hypot(place["x"] - mast["x"], place["y"] - mast["y"])
        assert apart > frame["width"] / 8


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_where_no_ground_is_stored_the_map_is_hatched_and_the_sea_is_not(watched, browser, scheme):
    page = watched.open(browser, color_scheme=scheme)
    start(page)
    settled(page)
    expect(page.locator(".map .key")).to_contain_text("hatched: no ground is stored there")
    for _ in range(2):
        page.get_by_role("button", name="Zoom out").click()
    page.wait_for_timeout(300)  # the map draws its next frame
    grey = np.asarray(Image.open(io.BytesIO(page.locator("#map-view").screenshot())).convert("L"), dtype=float)
    height, width = grey.shape
    corner = grey[8:60, 8:60]  # of the whole view: outside the demo's ground
    sea = grey[height // 2 - 30 : height // 2 - 10, width // 2 + 5 : width // 2 + 25]
    assert np.ptp(corner) > 40
    assert np.ptp(sea) < 12
