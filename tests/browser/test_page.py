"""The page as a person uses it, in Chromium on the demo."""

from __future__ import annotations

import io
import json
import re

import numpy as np
import pytest
from axe_playwright_python.sync_playwright import Axe
from PIL import Image
from playwright.sync_api import Page, Route, expect

from app.demo.scenario import DEMO_ROOFS

pytestmark = pytest.mark.browser

NORTH, WEST, EAST, *_ = DEMO_ROOFS
RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"]
SENTENCE = re.compile(r"^(Today .+ of \d+\.|Nothing is up today\.) .+(worth it|measure first|at any price).*\.$")


def start(page: Page, link: str = "") -> None:
    page.goto(f"/{link}")
    page.wait_for_selector("html[data-ready]")


def link_to(roof, **more: str) -> str:
    pairs = {"v": "1", "at": f"{roof.latitude_deg},{roof.longitude_deg}", "height": "10"} | more
    return "#" + "&".join(f"{key}={value}" for key, value in pairs.items())


def answered(page: Page, roof=NORTH, **more: str) -> None:
    start(page, link_to(roof, **({"now": "loft-dipole"} | more)))
    page.wait_for_selector(".changes:not([hidden])")


def open_sheet(page: Page, name: str) -> None:
    page.get_by_role("tab", name=name, exact=True).click()


def settled(page: Page) -> None:
    page.wait_for_selector("#map[data-idle]")


def sentence(page: Page) -> str:
    return page.locator(".sentence").inner_text()


def test_a_typed_position_gives_the_sentence(page):
    start(page)
    page.get_by_label("Roof at").fill(f"{NORTH.latitude_deg}, {NORTH.longitude_deg}")
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator(".sentence")).to_have_text(SENTENCE)
    expect(page.get_by_role("heading", name="What changes")).to_be_visible()
    expect(page.get_by_role("heading", name="On the roof")).to_be_visible()
    expect(page.locator(".roofline")).to_contain_text("from true north")
    expect(page.locator(".cautions li").first).to_be_visible()


def test_a_roof_of_the_demo_is_one_press_away(page):
    start(page)
    page.get_by_role("button", name=EAST.name).click()
    expect(page.locator(".sentence")).to_have_text(SENTENCE)
    assert page.get_by_label("Roof at").input_value().startswith(f"{EAST.latitude_deg}")


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
        page.get_by_label("Up now").select_option("nothing")
    expect(page.locator(".sentence")).to_contain_text("Nothing is up today.")
    expect(page.locator(".changes tbody")).to_contain_text("no aerial")


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
    assert page.locator(".drawing .line").get_attribute("d").startswith("M")
    assert page.locator(".drawing .taken").get_attribute("d").startswith("M")
    assert "into the line" in page.locator(".drawing .said.halo").inner_html()


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


def test_the_keyboard_alone_does_everything(page):
    start(page)
    settled(page)
    page.keyboard.press("Tab")
    expect(page.get_by_role("link", name="Skip to the answer")).to_be_focused()
    page.keyboard.press("Tab")
    expect(page.get_by_label("Roof at")).to_be_focused()
    page.keyboard.type(f"{NORTH.latitude_deg}, {NORTH.longitude_deg}")
    page.keyboard.press("Enter")
    expect(page.locator(".sentence")).to_have_text(SENTENCE)
    page.keyboard.press("Tab")
    expect(page.get_by_role("button", name="Take this device’s place")).to_be_focused()
    page.keyboard.press("Tab")
    expect(page.locator("#height")).to_be_focused()
    for _ in range(2):
        page.keyboard.press("Tab")
    expect(page.get_by_label("Up now")).to_be_focused()
    with page.expect_response("**/api/assess"):
        page.keyboard.press("ArrowDown")
    while page.evaluate("() => document.activeElement.id") != "map-view":
        page.keyboard.press("Tab")
    expect(page.locator("#map-view")).to_be_focused()
    before = page.get_by_label("Roof at").input_value()
    for _ in range(3):
        page.keyboard.press("ArrowDown")
    expect(page.locator(".overlay .crosshair")).to_have_count(1)
    with page.expect_response("**/api/assess"):
        page.keyboard.press("Enter")
    expect(page.get_by_label("Roof at")).not_to_have_value(before)
    expect(page.locator(".sentence")).to_have_text(SENTENCE)
    for _ in range(3):
        page.keyboard.press("Tab")
    assert page.evaluate("() => document.activeElement.className") == "cell"
    page.keyboard.press("Enter")
    assert page.evaluate("() => document.activeElement.getAttribute('aria-pressed')") == "true"


def test_the_focus_is_seen(page):
    answered(page)
    for name in ("Roof at", "Up now"):
        page.get_by_label(name).focus()
        page.keyboard.press("Shift+Tab")
        page.keyboard.press("Tab")
        assert page.evaluate("() => getComputedStyle(document.activeElement).outlineStyle") == "solid"


@pytest.mark.parametrize("width", [360, 640, 820])
def test_no_sideways_scroll(watched, browser, width):
    """640 is a window of 1280 at 200 % zoom."""
    page = watched.open(browser, viewport={"width": width, "height": 740})
    for show in (start, answered):
        show(page)
        settled(page)
        assert page.evaluate("() => document.documentElement.scrollWidth") <= width


def test_on_a_phone_the_map_comes_after_the_sentence(watched, browser):
    page = watched.open(browser, viewport={"width": 360, "height": 740})
    answered(page)
    tops = [
        page.locator(part).bounding_box()["y"]
        for part in (".sentence", "#map", ".changes", ".roofline", ".cautions", ".sheets")
    ]
    assert tops == sorted(tops)


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("webgl", [True, False])
def test_no_fault_of_accessibility(watched, browser, browser_without_webgl, scheme, webgl):
    page = watched.open(browser if webgl else browser_without_webgl, color_scheme=scheme)
    for show in (start, answered):
        show(page)
        settled(page)
        page.locator(".changes details, details.seen").evaluate_all(
            "all => { for (const one of all) one.open = true; }"
        )
        found = Axe().run(page, options={"runOnly": RULES}).response["violations"]
        assert [(fault["id"], fault["nodes"][0]["html"][:150]) for fault in found] == []


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_the_page_for_programs_has_no_fault(watched, browser, scheme):
    page = watched.open(browser, color_scheme=scheme)
    start(page, "docs")
    expect(page.locator("#operations")).to_contain_text("/api/assess")
    expect(page.locator("#operations")).to_contain_text("roof.latitude_deg")
    found = Axe().run(page, options={"runOnly": RULES}).response["violations"]
    assert [(fault["id"], fault["nodes"][0]["html"][:150]) for fault in found] == []


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


def test_the_next_visit_and_a_link_bring_everything_back(page, watched, browser):
    answered(page, idea="roof-yagi")
    told = sentence(page)
    link = page.evaluate("() => location.hash")
    page.goto("about:blank")
    start(page)
    expect(page.locator(".sentence")).to_have_text(told)
    other = watched.open(browser)
    start(other, link)
    expect(other.locator(".sentence")).to_have_text(told)


def test_what_was_only_typed_is_there_after_a_reload(page):
    start(page)
    page.get_by_label("Roof at").fill("44.3, ")
    page.locator("#height").fill("7")
    page.reload()
    expect(page.get_by_label("Roof at")).to_have_value("44.3, ")
    expect(page.locator("#height")).to_have_value("7")


def test_a_link_of_another_version_starts_empty(page):
    start(page, "#v=99&at=1,2")
    expect(page.locator(".sentence")).to_contain_text("Where is the roof?")
    expect(page.locator(".trouble")).to_contain_text("another version")


def test_two_pages_keep_their_own_roofs(watched, browser):
    first, second = watched.open(browser), watched.open(browser)
    answered(first, NORTH)
    answered(second, WEST)
    assert sentence(first) != sentence(second)
    assert first.get_by_label("Roof at").input_value() != second.get_by_label("Roof at").input_value()


@pytest.mark.parametrize(
    ("place", "height", "words"),
    [
        ("somewhere", "10", "“somewhere” is not a position"),
        ("91, 0", "10", "Latitude 91"),
        (f"{NORTH.latitude_deg}, {NORTH.longitude_deg}", "ten", "metres, such as 10"),
    ],
)
def test_what_cannot_be_read_is_said_at_its_field_without_asking(page, place, height, words):
    start(page)
    page.get_by_label("Roof at").fill(place)
    page.locator("#height").fill(height)
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator(".problem", has_text=words)).to_be_visible()
    expect(page.locator("[aria-invalid=true]")).to_have_count(1)
    assert page.get_by_label("Roof at").input_value() == place


@pytest.mark.parametrize(
    ("place", "height", "words"),
    [
        ("0, 0", "10", "no elevation"),
        (f"{NORTH.latitude_deg}, {NORTH.longitude_deg}", "5000", "1 to 200"),
    ],
)
def test_what_the_server_refuses_is_said_in_its_words(page, watched, place, height, words):
    watched.expected = "status of 422"
    answered(page)
    page.get_by_label("Roof at").fill(place)
    page.locator("#height").fill(height)
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator(".trouble")).to_contain_text(words, ignore_case=True)
    expect(page.locator(".changes")).to_be_hidden()
    assert page.get_by_label("Roof at").input_value() == place


def test_a_server_that_is_gone_loses_nothing(page, watched):
    watched.expected = "net::ERR_"
    answered(page)
    told = sentence(page)
    page.route("**/api/**", lambda route: route.abort())
    page.get_by_label("Roof at").fill(f"{WEST.latitude_deg}, {WEST.longitude_deg}")
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator(".trouble")).to_contain_text("does not answer")
    assert page.get_by_label("Roof at").input_value().startswith(f"{WEST.latitude_deg}")
    assert sentence(page) == told
    page.unroute("**/api/**")
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator(".sentence")).not_to_have_text(told)
    expect(page.locator(".trouble")).to_have_text("")


def test_an_overtaken_answer_is_dropped(page, watched):
    watched.expected = "net::ERR_"
    answered(page)
    held: list[Route] = []
    page.route("**/api/assess", lambda route: held.append(route) if not held else route.continue_())
    page.get_by_label("Roof at").fill(f"{EAST.latitude_deg}, {EAST.longitude_deg}")
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator("html")).to_have_attribute("data-asking", "yes")
    page.get_by_label("Roof at").fill(f"{WEST.latitude_deg}, {WEST.longitude_deg}")
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator("html")).to_have_attribute("data-asking", "no")
    told = sentence(page)
    held[0].abort()
    page.wait_for_timeout(200)
    assert sentence(page) == told


def test_names_with_markup_are_text(page):
    name = "<img src=x onerror=alert(1)><b>bold</b>"

    def renamed(route: Route) -> None:
        answer = route.fetch().json()
        for multiplex in answer["multiplexes"]:
            multiplex["name"] = name
        for chain in answer["chains"].values():
            chain["title"] = name
        for emission in answer["emissions"]:
            emission["transmitter_name"] = name
        answer["cautions"] = [name]
        route.fulfill(body=json.dumps(answer), content_type="application/json")

    page.route("**/api/assess", renamed)
    answered(page)
    settled(page)
    assert page.locator("main img, main b:has-text('bold')").count() == 0
    expect(page.locator(".changes .name").first).to_have_text(name)
    assert page.evaluate("() => document.documentElement.scrollWidth") <= 1280


def test_many_multiplexes_with_long_names_fit_a_phone(watched, browser):
    page = watched.open(browser, viewport={"width": 360, "height": 740})

    def multiplied(route: Route) -> None:
        answer = route.fetch().json()
        one = answer["multiplexes"][-1]
        answer["multiplexes"] = [
            one | {"id": f"m{place}", "name": f"Verylongmultiplexnamewithoutanyspace{place}"} for place in range(300)
        ]
        route.fulfill(body=json.dumps(answer), content_type="application/json")

    page.route("**/api/assess", multiplied)
    answered(page)
    assert page.locator(".changes tbody tr, .changes details li").count() == 300
    assert page.evaluate("() => document.documentElement.scrollWidth") <= 360


def test_forced_colours_and_stillness_are_heeded(page):
    page.emulate_media(forced_colors="active", reduced_motion="reduce")
    answered(page)
    pressed = page.locator(".cell[aria-pressed=true]").first
    assert pressed.evaluate("one => getComputedStyle(one).outlineStyle") == "solid"


def test_the_sentence_is_announced_and_the_trouble_alerts(page):
    start(page)
    assert page.locator(".sentence").get_attribute("aria-live") == "polite"
    assert page.locator(".trouble").get_attribute("role") == "alert"
