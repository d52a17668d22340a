"""What is kept and handed on: roofs, links, the next visit, one file, paper."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from playwright.sync_api import expect

from tests.browser.steps import NORTH, WEST, answered, sentence, show, start, still, violations

pytestmark = pytest.mark.browser


def test_a_roof_is_kept_reported_on_and_forgotten(fresh, address, watched):
    show(fresh, "roofs")
    fresh.get_by_label("Name of this roof").fill("12 Field Lane <b>")
    fresh.get_by_role("button", name="Keep this roof").click()
    kept = fresh.locator(".roofs .list li", has_text="12 Field Lane <b>")
    expect(kept).to_be_visible()
    report = kept.get_by_role("link", name=re.compile("^Report on .*>$")).get_attribute("href")
    paper = fresh.request.get(f"{address}{report}.pdf")
    assert paper.headers["content-type"] == "application/pdf"
    assert paper.body().startswith(b"%PDF-")
    assert b"/StructTreeRoot" in paper.body()  # tagged
    fresh.goto(report)
    expect(fresh.locator("h1")).to_have_text("12 Field Lane <b>")
    expect(fresh.locator(".decision")).to_contain_text("Today")
    expect(fresh.get_by_role("heading", name="Commissioning sheet")).to_be_visible()
    for width in (360, 1280):
        fresh.set_viewport_size({"width": width, "height": 800})
        assert fresh.evaluate("() => document.documentElement.scrollWidth") <= width
    assert violations(fresh) == []
    assert fresh.get_by_role("img").count() == fresh.locator(".path h3").count() > 0  # a drawing for each path
    fresh.emulate_media(media="print", color_scheme="dark")
    assert fresh.evaluate("() => getComputedStyle(document.querySelector('h1')).color") == "rgb(0, 0, 0)"
    assert fresh.evaluate("() => getComputedStyle(document.querySelector('.said')).fill") == "rgb(0, 0, 0)"
    fresh.emulate_media(media="screen", color_scheme="light")
    show(fresh, "roofs", roof=WEST)
    fresh.locator(".roofs .list li", has_text="12 Field Lane").get_by_role("button", name="Open").click()
    still(fresh)
    assert fresh.get_by_label("Roof at").input_value().startswith(f"{NORTH.latitude_deg}")
    fresh.get_by_role("button", name="Forget 12 Field Lane").click()
    expect(fresh.locator(".roofs .list li")).to_have_count(0)


def test_a_roof_changed_in_another_window_is_not_overwritten_unasked(watched, browser):
    first, second = watched.open(browser), watched.open(browser)
    show(first, "roofs")
    first.get_by_label("Name of this roof").fill("Shared")
    first.get_by_role("button", name="Keep this roof").click()
    show(second, "roofs")
    second.locator(".roofs .list").get_by_role("button", name="Open").click()
    still(second)
    first.wait_for_timeout(1100)  # the store's clock has whole seconds
    second.get_by_role("button", name="Keep this roof").click()
    expect(second.locator(".roofs .said")).to_contain_text("Kept")
    first.get_by_role("button", name="Keep this roof").click()
    expect(first.locator(".roofs .problem")).to_contain_text("changed in another window")
    first.get_by_role("button", name="Keep mine").click()
    expect(first.locator(".roofs .said")).to_contain_text("Kept")
    first.get_by_role("button", name="Forget Shared").click()
    expect(first.locator(".roofs .list li")).to_have_count(0)


def test_the_saved_file_opens_alone(page, watched, browser, tmp_path):
    show(page, "path")
    expect(page.locator(".drawing .ground-line")).to_have_count(1)
    told = page.locator(".sentence").inner_text()
    letters = page.evaluate("() => getComputedStyle(document.body).fontFamily")
    page.get_by_label("Landmark along the line").fill("left of the chapel")
    open_sheet = page.get_by_role("tab", name="Roofs and report")
    open_sheet.click()
    with page.expect_download() as got:
        page.get_by_role("button", name="Save as one file").click()
    file = tmp_path / "roof.html"
    got.value.save_as(file)
    text = file.read_text()
    assert not re.search(r"<script|<link|src=|@import", text)
    alone = watched.open(browser, offline=True)
    watched.also = file.as_uri()
    alone.goto(Path(file).as_uri())
    expect(alone.locator(".sentence")).to_have_text(told)
    expect(alone.locator(".roofline")).to_be_visible()
    expect(alone.locator(".masthead")).to_contain_text(
        re.compile(r"Roof at 44\.3, ?-37\.\d+, aerial 10 m above ground")
    )
    expect(alone.locator(".landmark")).to_contain_text("left of the chapel")
    expect(alone.locator(".roofs")).to_have_count(0)  # other roofs, and links that lead nowhere from a file
    size = "() => getComputedStyle(document.querySelector('.sentence')).fontSize"
    on_screen = alone.evaluate(size)
    alone.emulate_media(media="print")
    assert alone.evaluate(size) != on_screen != "16px"  # the rules for paper hold on paper only
    assert alone.evaluate("() => getComputedStyle(document.body).fontFamily") == letters


def test_on_paper_only_the_answer_stands(fresh):
    show(fresh, "path")
    fresh.emulate_media(media="print")
    for gone in (".field-go", "#now", ".map", ".tabs", ".seen", ".landmark"):
        expect(fresh.locator(gone)).to_be_hidden()
    for there in ("#place", "#height", ".sentence", ".roofline", ".cautions", ".path .drawing"):
        expect(fresh.locator(there).first).to_be_visible()


def test_the_next_visit_and_a_link_bring_everything_back(fresh, watched, browser):
    answered(fresh, idea="roof-yagi")
    told = sentence(fresh)
    link = fresh.evaluate("() => location.hash")
    fresh.goto("about:blank")
    start(fresh)
    expect(fresh.locator(".sentence")).to_have_text(told)
    other = watched.open(browser)
    start(other, link)
    expect(other.locator(".sentence")).to_have_text(told)


def test_what_was_only_typed_is_there_after_a_reload(fresh, watched):
    watched.expected = "status of 422"  # half a position
    start(fresh)
    fresh.get_by_label("Roof at").fill("44.3, ")
    fresh.locator("#height").fill("7")
    fresh.reload()
    expect(fresh.get_by_label("Roof at")).to_have_value("44.3, ")
    expect(fresh.locator("#height")).to_have_value("7")


def test_two_pages_keep_their_own_roofs(watched, browser):
    first, second = watched.open(browser), watched.open(browser)
    answered(first, NORTH)
    answered(second, WEST)
    assert sentence(first) != sentence(second)
    assert first.get_by_label("Roof at").input_value() != second.get_by_label("Roof at").input_value()


def test_a_link_of_another_version_fills_in_what_it_holds_and_says_so(page):
    answered(page, WEST, v="1", colour="red", idea="none-such", multiplex="gone", chain="roof-yagi")
    notes = page.locator(".notes")
    expect(notes).to_contain_text("older version of Gainworth")
    expect(notes).to_contain_text("Left out, as it means nothing here: “colour”.")
    expect(notes).to_contain_text("No chain “none-such” is kept here")
    expect(notes).to_contain_text("No multiplex “gone” is in reach")
    page.get_by_role("button", name="Work it out").click()
    expect(notes).to_be_hidden()


def test_two_roofs_stand_side_by_side(page):
    show(page, "roofs", roof=WEST)
    page.get_by_label("Name of this roof").fill("Neighbour")
    page.get_by_role("button", name="Keep this roof").click()
    expect(page.locator(".roofs .said")).to_contain_text("Kept")
    show(page, "roofs")
    page.get_by_role("button", name="Compare Neighbour with this roof").click()
    expect(page.locator(".places thead th b")).to_have_text(["here", "Neighbour"])
    expect(page.locator(".places")).to_contain_text("Is it worth it?")
    page.get_by_role("tab", name="Roofs and report").click()
    page.get_by_role("button", name="Forget Neighbour").click()
    expect(page.locator(".roofs .list li")).to_have_count(0)
