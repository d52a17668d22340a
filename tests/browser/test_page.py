"""The first screen as a person uses it, in Chromium on the demo."""

from __future__ import annotations

import json
import re

import pytest
from playwright.sync_api import expect

from tests.browser.steps import EAST, NORTH, SENTENCE, WEST, answered, sentence, settled, show, start, still

pytestmark = pytest.mark.browser


def test_a_typed_position_gives_the_sentence(fresh):
    start(fresh)
    fresh.get_by_label("Roof at").fill(f"{NORTH.latitude_deg}, {NORTH.longitude_deg}")
    fresh.get_by_role("button", name="Work it out").click()
    expect(fresh.locator(".sentence")).to_have_text(SENTENCE)
    expect(fresh.get_by_role("heading", name="What changes")).to_be_visible()
    expect(fresh.get_by_role("heading", name="On the roof")).to_be_visible()
    expect(fresh.locator(".roofline")).to_contain_text("from true north")
    expect(fresh.locator(".cautions li").first).to_be_visible()


def test_a_roof_of_the_demo_is_one_press_away(fresh):
    start(fresh)
    fresh.get_by_role("button", name=EAST.name).click()
    expect(fresh.locator(".sentence")).to_have_text(SENTENCE)
    assert fresh.get_by_label("Roof at").input_value().startswith(f"{EAST.latitude_deg}")
    expect(fresh.get_by_label("Up now")).to_have_value(EAST.now)


def test_the_page_and_the_answer_agree(page, address):
    answered(page)
    question = {
        "roof": {"latitude_deg": NORTH.latitude_deg, "longitude_deg": NORTH.longitude_deg},
        "now": "loft-dipole",
    }
    answer = page.request.post(f"{address}/api/assess", data=question).json()
    verdict = answer["verdicts"][0]
    assert answer["chains"][verdict["candidate"]]["title"] in sentence(page)
    assert verdict["answer"] in sentence(page)
    rows = page.locator(".changes tbody tr")
    assert 0 < rows.count() < len(answer["multiplexes"])
    assert f"{len(answer['multiplexes']) - rows.count()} unchanged" in page.locator(".changes summary").inner_text()
    expect(page.locator(".roofline li b").first).to_have_text(re.compile(r"^\d{3}°$"))


def test_another_chain_changes_the_sentence_at_once(page):
    answered(page)
    before = sentence(page)
    page.get_by_label("Idea 1").select_option("roof-yagi")
    expect(page.locator(".sentence")).not_to_have_text(before)
    expect(page.locator(".changes thead .chain").nth(1)).to_have_text("Short roof Yagi")


def test_another_chain_up_now_asks_again(page):
    answered(page)
    with page.expect_response("**/api/assess"):
        page.get_by_label("Up now", exact=True).select_option("nothing")
    expect(page.locator(".sentence")).to_contain_text("Nothing is up today.")
    expect(page.locator(".changes tbody")).to_contain_text("no aerial")


def test_a_second_idea_has_a_column_of_its_own(page):
    show(page, "skyline")
    page.get_by_label("Idea 2").select_option("loft-dipole")
    expect(page.locator(".changes thead .role")).to_have_text(["up now", "idea 1", "idea 2"])
    assert page.locator(".changes tbody tr").first.locator("td").count() == 3


def test_ticks_of_what_works_today_move_the_answer_and_can_be_taken_back(page):
    show(page, "skyline")
    told = page.locator(".sentence").inner_text()
    page.locator(".seen summary").click()
    row = page.locator(".seen fieldset", has_text="Strait Four")
    with page.expect_response("**/api/assess") as asked:
        row.get_by_label("perfect").check()
    sent = json.loads(asked.value.request.post_data)["readings"]
    assert sent == [{"kind": "seen", "multiplex": "strait-4", "state": "perfect", "chain": "roof-yagi"}]
    expect(page.locator(".sentence")).not_to_have_text(told)
    expect(page.locator(".seen .count")).to_have_text("1 said")
    with page.expect_response("**/api/assess"):
        page.get_by_role("button", name="Take the last step back").click()
    expect(page.locator(".sentence")).to_have_text(told)


def test_the_roof_line_has_compass_bearing_date_error_and_landmark(page, address):
    show(page, "skyline")
    assert page.locator(".roofline").inner_text().count("°") >= 3
    expect(page.locator(".roofline")).to_contain_text("by compass")
    expect(page.locator(".roofline .compass")).to_have_text(
        re.compile(r"11\.5° west of true north here on .*give or take 0\.\d° \(19 in 20; WMM")
    )
    page.get_by_label("Landmark along the line").fill("left of the chapel")
    assert "left+of+the+chapel" in page.evaluate("() => location.hash")


def test_a_position_in_degrees_and_minutes_is_read(page):
    show(page, "path")
    told = page.locator(".sentence").inner_text()
    page.get_by_label("Roof at").fill("44° 07' 12\" N, 37° 30' 48\" W")
    with page.expect_response("**/api/assess") as asked:
        page.get_by_role("button", name="Work it out").click()
    roof = json.loads(asked.value.request.post_data)["roof"]
    assert (roof["latitude_deg"], roof["longitude_deg"]) == pytest.approx((44.12, -37.51333), abs=1e-4)
    expect(page.locator(".sentence")).not_to_have_text(told)


def test_the_keyboard_alone_does_everything(fresh):
    start(fresh)
    settled(fresh)
    fresh.keyboard.press("Tab")
    expect(fresh.get_by_role("link", name="Skip to the answer")).to_be_focused()
    fresh.keyboard.press("Tab")
    expect(fresh.get_by_label("Roof at")).to_be_focused()
    fresh.keyboard.type(f"{NORTH.latitude_deg}, {NORTH.longitude_deg}")
    fresh.keyboard.press("Enter")
    expect(fresh.locator(".sentence")).to_have_text(SENTENCE)
    fresh.keyboard.press("Tab")
    expect(fresh.get_by_role("button", name="Take this device’s place")).to_be_focused()
    fresh.keyboard.press("Tab")
    expect(fresh.locator("#height")).to_be_focused()
    for _ in range(2):
        fresh.keyboard.press("Tab")
    expect(fresh.get_by_label("Up now", exact=True)).to_be_focused()
    with fresh.expect_response("**/api/assess"):
        fresh.keyboard.press("ArrowDown")
    while fresh.evaluate("() => document.activeElement.id") != "map-view":
        fresh.keyboard.press("Tab")
    expect(fresh.locator("#map-view")).to_be_focused()
    before = fresh.get_by_label("Roof at").input_value()
    for _ in range(3):
        fresh.keyboard.press("ArrowDown")
    expect(fresh.locator(".overlay .crosshair")).to_have_count(1)
    with fresh.expect_response("**/api/assess"):
        fresh.keyboard.press("Enter")
    expect(fresh.get_by_label("Roof at")).not_to_have_value(before)
    expect(fresh.locator(".sentence")).to_have_text(SENTENCE)
    for _ in range(3):
        fresh.keyboard.press("Tab")
    assert fresh.evaluate("() => document.activeElement.className") == "cell"
    fresh.keyboard.press("Enter")
    assert fresh.evaluate("() => document.activeElement.getAttribute('aria-pressed')") == "true"


def test_the_focus_is_seen(page):
    answered(page)
    for name in ("Roof at", "Up now"):
        page.get_by_label(name).focus()
        page.keyboard.press("Shift+Tab")
        page.keyboard.press("Tab")
        assert page.evaluate("() => getComputedStyle(document.activeElement).outlineStyle") == "solid"


def test_on_a_phone_the_map_comes_after_the_sentence(watched, browser):
    page = watched.open(browser, viewport={"width": 360, "height": 740})
    answered(page)
    tops = [
        page.locator(part).bounding_box()["y"]
        for part in (".sentence", "#map", ".changes", ".roofline", ".cautions", ".sheets")
    ]
    assert tops == sorted(tops)


def test_the_sentence_is_announced_and_the_trouble_alerts(fresh):
    start(fresh)
    assert fresh.locator(".sentence").get_attribute("aria-live") == "polite"
    assert fresh.locator(".trouble").get_attribute("role") == "alert"


def test_where_no_idea_pays_that_is_the_headline_and_the_rigger_is_told_what_is_up(page):
    answered(page, WEST, now="roof-yagi")
    expect(page.locator(".sentence .answer")).to_have_text("None of the 3 ideas is worth it")
    expect(page.locator(".changes .empty")).to_have_text("Nothing changes: they bring the same.")
    expect(page.locator(".roofline .chain")).to_have_text("Short roof Yagi, which is up now")
    page.get_by_label("Idea 1").select_option("high-gain")
    expect(page.locator(".sentence .answer")).to_have_text("not worth it")
    expect(page.locator(".roofline .chain")).to_have_text("High-gain roof aerial")


def test_before_there_is_a_roof_it_is_said_what_to_do(fresh):
    start(fresh)
    expect(fresh.locator(".sentence")).to_contain_text("Type its position above, or click it on the map")
    expect(fresh.locator(".reason")).to_contain_text("which of them is worth its price")
    fresh.locator(".seen summary").click()
    expect(fresh.locator(".seen .words")).to_contain_text("Nothing is up")
    fresh.get_by_label("Up now", exact=True).select_option("roof-yagi")
    expect(fresh.locator(".seen .words")).to_contain_text("Place the roof first")


def test_nothing_jumps_while_a_new_answer_is_looked_for(page):
    answered(page)
    tops = """() => ['.sentence', '.map', '.changes', '.sheets'].map(
        one => document.querySelector(one).getBoundingClientRect().top)"""
    before = page.evaluate(tops)
    held = []
    page.route("**/api/assess", lambda route: held.append(route))
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator("html")).to_have_attribute("data-asking", "yes")
    assert page.evaluate(tops) == before
    held[0].continue_()
    still(page)
    assert page.evaluate(tops) == before


def test_numbers_are_written_and_read_as_the_locale_has_them(watched, browser):
    page = watched.open(browser, locale="de-DE")
    answered(page)
    expect(page.locator(".roofline .compass")).to_contain_text("11,5° west")
    for typed in ("12,5", "12.5"):
        page.locator("#height").fill(typed)
        with page.expect_request("**/api/assess") as asked:
            page.locator("#height").press("Enter")
        assert json.loads(asked.value.post_data)["roof"]["aerial_agl_m"] == 12.5
        still(page)
    page.locator("#height").fill("1.250")
    page.locator("#height").press("Enter")
    expect(page.locator("#height-problem")).to_contain_text("“1.250” is not a height")
