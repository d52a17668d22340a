"""What lies behind the answer, as a person uses it: every sheet once, in Chromium on the demo."""

from __future__ import annotations

import json
import re

import pytest
from playwright.sync_api import expect

from app.telling import chance_words
from tests.browser.steps import NORTH, SHEETS, WEST, answered, open_sheet, sentence, settled, show, still

pytestmark = pytest.mark.browser


def test_the_skyline_shows_horizon_masts_and_the_aerials_curtain(page):
    show(page, "skyline")
    expect(page.locator(".skyline .ground-line")).to_have_attribute("d", re.compile(r"^M.{200}"))
    masts = page.locator(".masts li").count()
    expect(page.locator(".skyline .name text, .skyline text.name")).to_have_count(masts)
    assert page.locator(".skyline .tip.behind").count() > 0
    assert page.locator(".skyline .curtain").get_attribute("d").startswith("M")


def test_sliding_the_aerial_changes_the_chances_at_once_and_without_the_server(page, address):
    show(page, "skyline")
    slider = page.get_by_role("slider", name="Where the aerial is turned")
    expect(slider).to_be_visible()
    before = page.locator(".skyline .chances").inner_text()
    start = int(slider.get_attribute("aria-valuenow"))
    asked = []
    page.on("request", lambda request: asked.append(request.url) if "/api/" in request.url else None)
    slider.focus()
    page.keyboard.press("ArrowRight")
    assert int(slider.get_attribute("aria-valuenow")) == start + 1
    page.keyboard.press("Shift+ArrowRight")
    page.keyboard.press("PageUp")
    assert int(slider.get_attribute("aria-valuenow")) == start + 21
    box = slider.bounding_box()
    page.mouse.move(box["x"] + box["width"] * 0.5, box["y"] + 120)
    page.mouse.down()
    page.mouse.move(box["x"] + box["width"] * 0.6, box["y"] + 120, steps=5)
    page.mouse.up()
    turned = int(slider.get_attribute("aria-valuenow"))
    assert 212 <= turned <= 220
    assert page.locator(".skyline .chances").inner_text() != before
    assert asked == []
    question = {"roof": {"latitude_deg": NORTH.latitude_deg, "longitude_deg": NORTH.longitude_deg}, "now": "roof-yagi"}
    answer = page.request.post(f"{address}/api/assess", data=question).json()
    pointing = answer["chains"][answer["verdicts"][0]["candidate"]]["pointings"][0]
    name = next(one for one in answer["multiplexes"] if one["id"] == "range-1")["name"]
    percent = pointing["chance_percent_by_degree"]["range-1"][turned]
    expect(page.locator(".skyline .chances li", has_text=name).locator("b")).to_have_text(chance_words(percent / 100))


def test_a_slid_aerial_can_be_fixed_and_freed_again(page):
    show(page, "skyline")
    expect(page.locator(".roofline li b").first).not_to_have_text("200°")
    page.get_by_role("slider").focus()
    page.keyboard.press("Home")
    page.keyboard.press("Shift+ArrowRight")
    with page.expect_response("**/api/assess"):
        page.locator(".skyline .turn").click()
    still(page)
    turned = page.get_by_role("slider").get_attribute("aria-valuenow")
    expect(page.locator(".roofline li b").first).to_have_text(f"{int(turned):03d}°")
    with page.expect_response("**/api/assess"):
        page.get_by_role("button", name="Let the best direction").click()
    expect(page.locator(".roofline li b").first).not_to_have_text(f"{int(turned):03d}°")


def test_a_cell_opens_its_path_and_ledger(page):
    answered(page, sheet="path")
    expect(page.locator(".drawing .ground-line")).to_have_count(1)
    page.locator(".changes summary").click()
    page.locator(".changes details .cell").first.click()
    expect(page.locator(".changes details .cell").first).to_have_attribute("aria-pressed", "true")
    name = page.locator(".changes details .name").first.inner_text()
    expect(page.locator(".path h3")).to_contain_text(name)
    expect(page.locator(".path .told")).to_have_text(re.compile(r"km.*\.$"))
    open_sheet(page, "Step by step")
    expect(page.locator("#ledger-title")).to_contain_text(name)
    assert page.locator(".ledger tbody tr").count() > 8
    assert all(source.strip() for source in page.locator(".ledger tbody tr .source").all_inner_texts())


def test_the_ledger_adds_up_to_the_margin_in_both_nights(page):
    answered(page, sheet="ledger")
    expect(page.locator(".ledger .body")).to_be_visible()  # what stood there before is hidden until the steps come
    expect(page.locator(".ledger .held-back")).to_contain_text("What limits it is")
    margins = []
    for night in range(2):
        page.locator(".ledger .states input").nth(night).check()
        texts = page.locator(".ledger .value").all_inner_texts()
        values = [float(text.replace("\u2212", "-")) for text in texts if text]
        margins.append(float(page.locator(".ledger .result .total").inner_text().replace("\u2212", "-")))
        assert sum(values) == pytest.approx(margins[-1], abs=0.05 * (len(values) + 1))  # each is rounded to 0.1 dB
    decides = page.locator(".ledger .states label", has_text="which decides").inner_text()
    assert f"{min(margins):.1f}".replace("-", "\u2212") in decides


def test_only_part_of_the_zone_is_filled_and_the_line_is_drawn(page):
    answered(page, sheet="path")
    expect(page.locator(".drawing .said.halo")).to_contain_text("into the line")
    assert page.locator(".drawing .line").get_attribute("d").startswith("M")
    assert page.locator(".drawing .taken").get_attribute("d").startswith("M")
    facts = page.locator(".path .facts").inner_text()
    assert re.search(r"P\.1546\s+\d+\.\d dB", facts)
    assert re.search(r"P\.1812\s+\d+\.\d dB", facts)


def test_readings_are_entered_move_predictions_and_are_forgotten(page):
    show(page, "readings")
    expect(page.locator(".readings .next")).not_to_be_empty()
    page.get_by_label("Channel or multiplex").select_option(label="channel 39, Strait One from Far Island")
    page.get_by_label("Figure", exact=True).fill("x")
    page.get_by_role("button", name="Keep the reading").click()
    expect(page.locator(".readings .problem")).to_contain_text("as a number")
    page.get_by_label("Figure", exact=True).fill("45")
    with page.expect_response("**/api/readings"):
        page.get_by_role("button", name="Keep the reading").click()
    expect(page.locator(".readings .items li")).to_contain_text("45.0 dB(µV)")
    expect(page.locator(".readings .items li")).to_contain_text("was foreseen")
    expect(page.locator(".readings .moved li").first).to_contain_text("→")
    page.get_by_role("button", name="Open the logbook").click()
    expect(page.locator(".readings .logbook tbody tr")).to_have_count(1)
    page.get_by_role("button", name="Forget the reading of").click()
    expect(page.locator(".readings .items li")).to_have_count(0)


def test_a_reading_is_asked_for_through_what_is_up_or_with_a_measuring_aerial(page):
    show(page, "readings")
    through = page.get_by_label("Through", exact=True)
    expect(through).to_have_value("roof-yagi")
    expect(page.locator(".readings .next")).to_contain_text("at the outlet Living room through Short roof Yagi")
    with page.expect_response("**/api/assess"):
        page.get_by_label("Up now").select_option("nothing")
    still(page)
    expect(through).to_have_value("measuring aerial")
    expect(page.locator(".readings form.one").get_by_label("At", exact=True)).to_have_value("aerial")
    with page.expect_response("**/api/assess"):
        page.get_by_label("Up now").select_option("high-gain")
    still(page)
    expect(through).to_have_value("high-gain")


def test_a_scan_list_is_pasted_and_what_was_not_recognised_is_said(page):
    show(page, "readings", roof=WEST)
    page.get_by_label("Or paste the set’s list of channels").fill("Range One 30 quality 90%\nnonsense line\n33")
    page.get_by_role("button", name="Keep the list").click()
    expect(page.locator(".readings .recognised")).to_contain_text("33: Range Two from Northern Range, perfect")
    expect(page.locator(".readings .recognised")).to_contain_text("not recognised: nonsense line")
    while page.locator(".readings .items li button", has_text="Forget").count():
        with page.expect_response("**/api/assess"):
            page.locator(".readings .items li button", has_text="Forget").first.click()
        still(page)


def test_transmitters_are_searched_filtered_and_switched_off(page):
    show(page, "transmitters")
    rows = page.locator(".transmitters tbody tr")
    expect(page.locator(".transmitters .count")).to_contain_text("channels")
    page.get_by_label("Search", exact=True).fill("far island 39")
    expect(rows).to_have_count(1)
    with page.expect_response("**/api/assess"):
        rows.locator("input").uncheck()
    still(page)
    page.get_by_label("Search", exact=True).fill("")
    page.get_by_label("Show", exact=True).select_option("off")
    expect(rows).to_have_count(1)
    with page.expect_response("**/api/assess"):
        rows.locator("input").check()
    page.get_by_label("Search", exact=True).fill("no such mast")
    expect(page.locator(".transmitters .count")).to_contain_text("Nothing fits")


def test_a_channel_that_closes_says_when(fresh):
    def closing(route) -> None:
        answer = route.fetch().json()
        for emission in answer["emissions"]:
            emission["valid_to"] = "2031-05-09"
        route.fulfill(body=json.dumps(answer), content_type="application/json")

    fresh.route("**/api/assess", closing)
    fresh.route("**/api/emissions", closing)
    show(fresh, "transmitters")
    expect(fresh.locator(".changes .from").first).to_contain_text("closes on May 9, 2031")
    fresh.get_by_label("Show", exact=True).select_option("dated")
    expect(fresh.locator(".transmitters tbody tr").first).to_contain_text("closes on")


def test_a_value_that_is_no_number_is_said_and_changes_nothing(page):
    show(page, "assumptions")
    told = sentence(page)
    page.get_by_label("One more multiplex is worth").fill("much")
    page.get_by_label("One more multiplex is worth").press("Tab")
    expect(page.locator(".assumptions .problem")).to_contain_text("“much” is not a number")
    page.get_by_label("One more multiplex is worth").fill("")
    page.get_by_label("One more multiplex is worth").press("Tab")
    expect(page.locator(".assumptions .problem")).to_have_text("")
    assert sentence(page) == told


def test_an_assumption_is_changed_counted_and_reset(page):
    show(page, "assumptions")
    told = page.locator(".sentence").inner_text()
    page.get_by_label("Search the values").fill("reserve")
    value = page.get_by_label("reserve_db in dB")
    value.fill("9")
    with page.expect_response("**/api/assess"):
        value.press("Tab")
    expect(page.locator(".sentence")).not_to_have_text(told)
    expect(page.locator(".assumptions .changed")).to_have_count(1)
    with page.expect_response("**/api/assess"):
        page.get_by_role("button", name="Put all 1 back").click()
    expect(page.locator(".sentence")).to_have_text(told)
    expect(page.locator(".assumptions .sources li").first).to_be_attached()


def test_feet_and_miles_hold_for_heights_distances_and_sentences(fresh):
    show(fresh, "assumptions")
    fresh.get_by_label("Heights and distances in").select_option("imperial")
    expect(fresh.locator("#height")).to_have_value("32.8")
    expect(fresh.locator(".where")).to_contain_text("ft above ground")
    expect(fresh.locator(".roofline")).to_contain_text("33\u00a0ft")
    expect(fresh.locator(".masts")).to_contain_text("mi")
    expect(fresh.get_by_label("Look for transmitters within")).to_have_value("93.21")  # 150 km of 1.609344 km
    open_sheet(fresh, "Higher or elsewhere")
    with fresh.expect_response("**/api/assess"):
        fresh.get_by_role("button", name="Add what stands there").click()
    away = fresh.get_by_label("Away ft")
    expect(away).to_have_value("98.4")  # 30 m of 0.3048 m
    away.fill("far")
    away.press("Tab")
    expect(fresh.locator(".elsewhere .problem")).to_contain_text("“far” is not a number")
    with fresh.expect_response("**/api/assess") as asked:
        away.fill("100")
        away.press("Tab")
    assert json.loads(asked.value.request.post_data)["roof"]["obstacles"][0]["distance_m"] == 30.48
    open_sheet(fresh, "Chains")
    fresh.locator(".chains .which").select_option("roof-yagi")
    feeder = fresh.locator(".chains .a-part", has_text="Feeder").get_by_label("Length")
    with fresh.expect_response("**/api/assess") as asked:
        feeder.fill("50")
    edited = next(one for one in json.loads(asked.value.request.post_data)["chains"] if not isinstance(one, str))
    assert [one["length_m"] for one in edited["parts"] if one["kind"] == "feeder"] == [15.24]  # 50 ft of 0.3048 m
    expect(fresh.get_by_label("Longest run ft")).to_have_value("114.8")  # 35 m
    fresh.get_by_role("tab", name="Path", exact=True).click()
    expect(fresh.locator(".path .told")).to_have_text(re.compile(r"\d\u00a0mi.*\d\u00a0ft"))


def test_three_places_stand_side_by_side_and_one_is_gone_to(page):
    show(page, "elsewhere")
    page.get_by_role("button", name="Keep this place to compare").click()
    expect(page.locator(".places thead th")).to_have_count(2)
    settled(page)
    roof = page.locator(".overlay .roof-point").bounding_box()
    page.mouse.move(roof["x"] + 2, roof["y"] + 2)
    page.mouse.down()
    page.mouse.move(roof["x"] + 4, roof["y"] + 22, steps=4)
    page.mouse.up()
    still(page)
    page.get_by_role("button", name="Keep this place to compare").click()
    page.get_by_label("Roof at").fill(f"{WEST.latitude_deg}, {WEST.longitude_deg}")
    with page.expect_response("**/api/assess"):
        page.get_by_role("button", name="Work it out").click()
    still(page)
    expect(page.locator(".places thead th b")).to_have_text(["here", "A", "B"])
    expect(page.locator(".places")).not_to_contain_text("working it out")
    here, first, second = page.locator(".places tbody tr").first.locator("td").all_inner_texts()
    assert here != first
    assert re.match(r".+ of 8", second)
    page.get_by_role("button", name="Go to A").click()
    expect(page.get_by_label("Roof at")).to_have_value(re.compile(f"^{NORTH.latitude_deg}"))
    for name in "AB":
        page.get_by_role("button", name=f"Leave out {name}").click()
    expect(page.locator(".places")).to_be_hidden()


def test_an_obstacle_near_the_roof_is_asked_for(page):
    show(page, "elsewhere")
    with page.expect_response("**/api/assess"):
        page.get_by_role("button", name="Add what stands there").click()
    with page.expect_response("**/api/assess") as asked:
        page.get_by_label("Direction").fill("57")
        page.get_by_label("Direction").press("Tab")
    assert json.loads(asked.value.request.post_data)["roof"]["obstacles"][0]["bearing_deg"] == 57


def test_chances_stand_against_height(page):
    show(page, "elsewhere")
    expect(page.locator(".elsewhere .rise-line")).to_have_count(2)
    expect(page.locator(".by-height tbody tr")).to_have_count(11)
    assert page.locator(".by-height tbody th").all_inner_texts()[-1] == "25\u00a0m"


def test_sheets_are_opened_by_arrow_keys(page):
    show(page, "skyline")
    page.get_by_role("tab", name="Skyline").focus()
    for _ in range(2):
        page.keyboard.press("ArrowRight")
    expect(page.get_by_role("tab", name="Step by step")).to_be_focused()
    expect(page.locator("#ledger")).to_be_visible()
    page.keyboard.press("End")
    expect(page.locator("#assumptions")).to_be_visible()


def test_empty_sheets_say_what_to_do(fresh):
    fresh.goto("/")
    fresh.wait_for_selector("html[data-ready]")
    for sheet in SHEETS[:5]:
        fresh.locator(f"#tab-{sheet}").click()
        expect(fresh.locator(f"#{sheet} .empty")).to_contain_text("Place the roof first")
