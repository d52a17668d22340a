"""What lies behind the answer, as a person uses it: every sheet once, in Chromium on the demo."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Page, expect

from app.demo.scenario import DEMO_ROOFS
from app.telling import chance_words

pytestmark = pytest.mark.browser

NORTH, WEST, *_ = DEMO_ROOFS
SHEETS = ("skyline", "path", "ledger", "elsewhere", "readings", "chains", "roofs", "transmitters", "assumptions")
RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"]


def link_to(roof, now: str = "roof-yagi", **more: str) -> str:
    pairs = {"v": "2", "at": f"{roof.latitude_deg},{roof.longitude_deg}", "height": "10", "now": now} | more
    return "/#" + "&".join(f"{key}={value}" for key, value in pairs.items())


def show(page: Page, sheet: str, roof=NORTH, **more: str) -> None:
    page.goto(link_to(roof, sheet=sheet, **more))
    page.wait_for_selector("html[data-ready]")
    page.wait_for_selector(".changes:not([hidden])")


def still(page: Page) -> None:
    expect(page.locator("html")).to_have_attribute("data-asking", "no")


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


def test_a_second_idea_has_a_column_of_its_own(page):
    show(page, "skyline")
    page.get_by_label("Idea 2").select_option("loft-dipole")
    expect(page.locator(".changes thead .role")).to_have_text(["up now", "idea 1", "idea 2"])
    assert page.locator(".changes tbody tr").first.locator("td").count() == 3


def test_the_roof_line_has_compass_bearing_date_error_and_landmark(page, address):
    show(page, "skyline")
    assert page.locator(".roofline").inner_text().count("°") >= 3
    expect(page.locator(".roofline")).to_contain_text("by compass")
    expect(page.locator(".roofline .compass")).to_have_text(
        re.compile(r"11\.5° west of true north here on .*give or take 0\.\d° \(19 in 20; WMM")
    )
    page.get_by_label("Landmark along the line").fill("left of the chapel")
    assert "left+of+the+chapel" in page.evaluate("() => location.hash")


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


def test_a_scan_list_is_pasted_and_what_was_not_recognised_is_said(page):
    show(page, "readings", roof=WEST)
    page.get_by_label("Or paste the set’s list of channels").fill("Range One 30 quality 90%\nnonsense line")
    page.get_by_role("button", name="Keep the list").click()
    expect(page.locator(".readings .recognised")).to_contain_text("not recognised: nonsense line")
    while page.locator(".readings .items li button", has_text="Forget").count():
        with page.expect_response("**/api/assess"):
            page.locator(".readings .items li button", has_text="Forget").first.click()
        still(page)


def test_a_roof_is_kept_reported_on_and_forgotten(page, address, watched):
    show(page, "roofs")
    page.get_by_label("Name of this roof").fill("12 Field Lane <b>")
    page.get_by_role("button", name="Keep this roof").click()
    kept = page.locator(".roofs .list li", has_text="12 Field Lane <b>")
    expect(kept).to_be_visible()
    report = kept.get_by_role("link", name=re.compile("^Report on .*>$")).get_attribute("href")
    paper = page.request.get(f"{address}{report}.pdf")
    assert paper.headers["content-type"] == "application/pdf"
    assert paper.body().startswith(b"%PDF-")
    assert b"/StructTreeRoot" in paper.body()  # tagged
    page.goto(report)
    expect(page.locator("h1")).to_have_text("12 Field Lane <b>")
    expect(page.locator(".decision")).to_contain_text("Today")
    expect(page.get_by_role("heading", name="Commissioning sheet")).to_be_visible()
    for width in (360, 1280):
        page.set_viewport_size({"width": width, "height": 800})
        assert page.evaluate("() => document.documentElement.scrollWidth") <= width
    assert violations(page) == []
    show(page, "roofs", roof=WEST)
    page.locator(".roofs .list li", has_text="12 Field Lane").get_by_role("button", name="Open").click()
    still(page)
    assert page.get_by_label("Roof at").input_value().startswith(f"{NORTH.latitude_deg}")
    page.get_by_role("button", name="Forget 12 Field Lane").click()
    expect(page.locator(".roofs .list li")).to_have_count(0)


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


def test_on_paper_only_the_answer_stands(page):
    show(page, "path")
    page.emulate_media(media="print")
    for gone in (".field-go", "#now", ".map", ".tabs", ".seen", ".landmark"):
        expect(page.locator(gone)).to_be_hidden()
    for there in ("#place", "#height", ".sentence", ".roofline", ".cautions", ".path .drawing"):
        expect(page.locator(there).first).to_be_visible()


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
    page.get_by_label("Show").select_option("off")
    expect(rows).to_have_count(1)
    with page.expect_response("**/api/assess"):
        rows.locator("input").check()
    page.get_by_label("Search", exact=True).fill("no such mast")
    expect(page.locator(".transmitters .count")).to_contain_text("Nothing fits")


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


def test_feet_and_miles_hold_for_heights_distances_and_sentences(page):
    show(page, "assumptions")
    page.get_by_label("Heights and distances in").select_option("imperial")
    expect(page.locator("#height")).to_have_value("32.8")
    expect(page.locator(".where")).to_contain_text("ft above ground")
    expect(page.locator(".roofline")).to_contain_text("33\u00a0ft")
    expect(page.locator(".masts")).to_contain_text("mi")
    page.get_by_role("tab", name="Path", exact=True).click()
    expect(page.locator(".path .told")).to_have_text(re.compile(r"\d\u00a0mi.*\d\u00a0ft"))


def test_places_stand_side_by_side(page):
    show(page, "elsewhere")
    page.get_by_role("button", name="Keep this place to compare").click()
    expect(page.locator(".places thead th")).to_have_count(2)
    page.get_by_label("Roof at").fill(f"{WEST.latitude_deg}, {WEST.longitude_deg}")
    with page.expect_response("**/api/assess"):
        page.get_by_role("button", name="Work it out").click()
    still(page)
    first, second = page.locator(".places tbody tr").first.locator("td").all_inner_texts()
    assert first != second
    page.get_by_role("button", name="Go to A").click()
    expect(page.get_by_label("Roof at")).to_have_value(re.compile(f"^{NORTH.latitude_deg}"))
    page.get_by_role("button", name="Leave out A").click()
    expect(page.locator(".places")).to_be_hidden()


def test_an_obstacle_near_the_roof_is_asked_for(page):
    show(page, "elsewhere")
    with page.expect_response("**/api/assess"):
        page.get_by_role("button", name="Add what stands there").click()
    with page.expect_response("**/api/assess") as asked:
        page.get_by_label("Direction").fill("57")
        page.get_by_label("Direction").press("Tab")
    assert json.loads(asked.value.request.post_data)["roof"]["obstacles"][0]["bearing_deg"] == 57


def test_a_position_in_degrees_and_minutes_is_read(page):
    show(page, "path")
    told = page.locator(".sentence").inner_text()
    page.get_by_label("Roof at").fill("44° 07' 12\" N, 37° 30' 48\" W")
    with page.expect_response("**/api/assess") as asked:
        page.get_by_role("button", name="Work it out").click()
    roof = json.loads(asked.value.request.post_data)["roof"]
    assert (roof["latitude_deg"], roof["longitude_deg"]) == pytest.approx((44.12, -37.51333), abs=1e-4)
    expect(page.locator(".sentence")).not_to_have_text(told)


def test_chances_stand_against_height(page):
    show(page, "elsewhere")
    expect(page.locator(".elsewhere .rise-line")).to_have_count(2)
    expect(page.locator(".by-height tbody tr")).to_have_count(11)
    assert page.locator(".by-height tbody th").all_inner_texts()[-1] == "25\u00a0m"


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


def test_five_hundred_channels_with_markup_in_their_names_are_shown_as_text(watched, browser):
    page = watched.open(browser, viewport={"width": 320, "height": 480})

    def multiplied(route) -> None:
        answer = route.fetch().json()
        emission, multiplex = answer["emissions"][0], answer["multiplexes"][0]
        answer["emissions"] = [emission | {"id": f"e{k}", "transmitter_name": "<img src=x>"} for k in range(500)]
        cells = {name: cell | {"emission": "e1"} for name, cell in multiplex["chains"].items()}
        answer["multiplexes"] = [
            multiplex | {"id": f"m{k}", "name": f"<b>Name</b> {k}", "chains": cells} for k in range(500)
        ]
        route.fulfill(body=json.dumps(answer), content_type="application/json")

    page.route("**/api/assess", multiplied)
    page.goto(link_to(NORTH))
    page.wait_for_selector(".changes:not([hidden])")
    assert page.locator("main img").count() == 0
    assert "<b>Name</b> 0" in page.locator(".changes details").text_content()
    assert page.evaluate("() => document.documentElement.scrollWidth") <= 320
    page.set_viewport_size({"width": 3440, "height": 1440})
    assert page.evaluate("() => document.querySelector('main').clientWidth") < 1300


def test_sheets_are_opened_by_arrow_keys(page):
    show(page, "skyline")
    page.get_by_role("tab", name="Skyline").focus()
    for _ in range(2):
        page.keyboard.press("ArrowRight")
    expect(page.get_by_role("tab", name="Step by step")).to_be_focused()
    expect(page.locator("#ledger")).to_be_visible()
    page.keyboard.press("End")
    expect(page.locator("#assumptions")).to_be_visible()


@pytest.mark.parametrize(("width", "scheme"), [(360, "light"), (820, "dark"), (1280, "dark"), (640, "light")])
def test_every_sheet_is_without_fault_and_fits(watched, browser, width, scheme):
    """640 is a window of 1280 at 200 % zoom."""
    page = watched.open(browser, viewport={"width": width, "height": 800}, color_scheme=scheme)
    show(page, "skyline", more="%7B%22second%22%3A%22high-gain%22%7D")
    for sheet in SHEETS:
        page.locator(f"#tab-{sheet}").click()
        expect(page.locator(f"#{sheet}")).to_be_visible()
        ready = {"skyline": ".skyline .curtain", "path": ".path .ground-line", "ledger": ".ledger .result"}.get(sheet)
        if ready:
            expect(page.locator(ready)).to_have_count(1)
        assert page.evaluate("() => document.documentElement.scrollWidth") <= width, sheet
        if width in (360, 1280):
            assert violations(page, None if sheet == "skyline" else f"#{sheet}") == [], sheet


def test_empty_sheets_say_what_to_do(page):
    page.goto("/")
    page.wait_for_selector("html[data-ready]")
    for sheet in SHEETS[:5]:
        page.locator(f"#tab-{sheet}").click()
        expect(page.locator(f"#{sheet} .empty")).to_contain_text("Place the roof first")


def violations(page: Page, inside: str | None = None) -> list[tuple[str, str]]:
    found = Axe().run(page, context=inside, options={"runOnly": RULES}).response["violations"]
    return [(fault["id"], fault["nodes"][0]["html"][:150]) for fault in found]
