"""What goes wrong while the page is used: nothing typed is lost, no old answer passes for a new one."""

from __future__ import annotations

import json

import pytest
from playwright.sync_api import Route, expect

from tests.browser.steps import EAST, NORTH, WEST, answered, link_to, sentence, settled, show, start, still, widest

pytestmark = pytest.mark.browser


@pytest.mark.parametrize(
    ("place", "height", "words"),
    [
        ("somewhere", "10", "“somewhere” is not a position"),
        ("91, 0", "10", "Latitude 91"),
        (f"{NORTH.latitude_deg}, {NORTH.longitude_deg}", "ten", "in metres above the ground, 1 to 200"),
    ],
)
def test_what_cannot_be_read_is_said_at_its_field(fresh, watched, place, height, words):
    watched.expected = "status of 422"  # positions in other forms are read by the server
    start(fresh)
    fresh.get_by_label("Roof at").fill(place)
    fresh.locator("#height").fill(height)
    fresh.get_by_role("button", name="Work it out").click()
    expect(fresh.locator(".problem", has_text=words)).to_be_visible()
    expect(fresh.locator("[aria-invalid=true]")).to_have_count(1)
    assert fresh.get_by_label("Roof at").input_value() == place


def test_what_the_server_refuses_is_said_in_its_words(page, watched):
    watched.expected = "status of 422"
    answered(page)
    page.get_by_label("Roof at").fill("0, 0")
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator(".trouble")).to_contain_text("no elevation", ignore_case=True)
    expect(page.locator(".changes")).to_be_hidden()
    assert page.get_by_label("Roof at").input_value() == "0, 0"


def test_a_server_that_is_gone_loses_nothing(page, watched):
    watched.expected = "net::ERR_"
    answered(page)
    told = sentence(page)
    page.route("**/api/**", lambda route: route.abort())
    page.get_by_label("Roof at").fill(f"{WEST.latitude_deg}, {WEST.longitude_deg}")
    page.get_by_role("button", name="Work it out").click()
    expect(page.locator(".trouble")).to_contain_text("does not answer")
    page.get_by_role("tab", name="On the air").click()
    expect(page.locator(".transmitters .problem")).to_contain_text("does not answer")
    expect(page.locator(".transmitters")).not_to_contain_text("Reading the list")  # nothing is under way
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
    page.goto(link_to(NORTH, now="roof-yagi"))
    page.wait_for_selector(".changes:not([hidden])")
    assert page.locator("main img").count() == 0
    assert "<b>Name</b> 0" in page.locator(".changes details").text_content()
    assert page.evaluate("() => document.documentElement.scrollWidth") <= 320
    page.set_viewport_size({"width": 3440, "height": 1440})
    assert page.evaluate("() => document.querySelector('main').clientWidth") < 1300


def test_an_old_answer_is_marked_beside_what_cannot_be_read(page):
    answered(page)
    told = sentence(page)
    page.locator("#height").fill("abc")
    page.locator("#place").focus()
    expect(page.locator("#height-problem")).to_have_text(
        "“abc” is not a height: write it in metres above the ground, 1 to 200, such as 10."
    )
    expect(page.locator(".old")).to_contain_text("Not an answer to what is typed now")
    expect(page.locator("html")).to_have_attribute("data-stale", "yes")
    assert sentence(page) == told
    page.locator("#height").fill("10,5")
    page.locator("#height").press("Enter")
    still(page)
    expect(page.locator(".old")).to_be_hidden()
    expect(page.locator("html")).to_have_attribute("data-stale", "no")
    expect(page.locator("#height-problem")).to_have_text("")


def test_readings_of_two_tabs_on_one_roof_meet(watched, browser):
    first, second = watched.open(browser), watched.open(browser)
    for page in (first, second):
        show(page, "readings", roof=EAST)
    for page, level in ((first, "45"), (second, "52")):
        page.get_by_label("Figure", exact=True).fill(level)
        with page.expect_response("**/api/readings"):
            page.get_by_role("button", name="Keep the reading").click()
        still(page)
    expect(second.locator(".readings .items li")).to_have_count(2)
    second.get_by_role("button", name="Forget the reading of").first.click()
    expect(second.locator(".readings .items li")).to_have_count(1)
    still(second)
    second.get_by_role("button", name="Forget the reading of").first.click()
    expect(second.locator(".readings .items li")).to_have_count(0)


@pytest.mark.parametrize(("width", "height"), [(280, 480), (3840, 2160)])
def test_very_small_and_very_large_windows(watched, browser, width, height):
    page = watched.open(browser, viewport={"width": width, "height": height})
    answered(page)
    assert widest(page) <= width
    for tab in page.get_by_role("tab").all():
        tab.click()
        assert widest(page) <= width, tab.inner_text()
    assert page.evaluate("() => document.querySelector('main').clientWidth") < 1300
