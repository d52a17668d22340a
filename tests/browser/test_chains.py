"""Chains on the page as a person uses them: edited, priced, proposed, measured, taken back; in Chromium on the demo."""

from __future__ import annotations

import json
import math
import re
from contextlib import suppress

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Error, Locator, Page, Route, expect

from tests.browser.steps import NORTH, RULES, link_to, start, still

pytestmark = pytest.mark.browser


def show(page: Page, **more: str) -> None:
    page.goto("about:blank")  # a link that differs behind # only would not load anew
    start(page, link_to(NORTH, **({"now": "roof-yagi", "sheet": "chains"} | more)))
    page.wait_for_selector(".changes:not([hidden])")


def edited(page: Page, chain: str = "high-gain-masthead") -> None:
    page.locator(".chains .which").select_option(chain)


def part(page: Page, kind: str, place: int = 0) -> Locator:
    rows = page.locator(".chains .a-part").filter(has=page.locator(".kind", has_text=re.compile(f"^{kind}$")))
    return rows.nth(place)


def asked(page: Page):
    return page.expect_response("**/api/assess")


def chains_of(response) -> list:
    return json.loads(response.value.request.post_data)["chains"]


def test_a_chain_is_edited_in_place_and_the_result_follows(page):
    show(page)
    edited(page)
    told = page.locator(".sentence").inner_text()
    with asked(page):
        part(page, "Masthead amplifier").get_by_label("Price").fill("300")
    expect(page.locator(".sentence")).not_to_have_text(told)
    expect(part(page, "Masthead amplifier").get_by_label("Price")).to_have_value("300")
    page.get_by_role("button", name="Back to the kept one").click()
    expect(page.locator(".sentence")).to_have_text(told)
    expect(part(page, "Masthead amplifier").get_by_label("Price")).to_have_value("29")


def test_an_own_chain_is_compared_kept_and_removed(page):
    show(page)
    edited(page, "roof-yagi")
    with asked(page):
        page.get_by_role("button", name="Start another from this").click()
    still(page)
    expect(page.locator(".changes thead .chain").last).to_have_text("Short roof Yagi 2")
    with asked(page):
        part(page, "Aerial").get_by_label("Gain").fill("470: 9; 694: 14.5")
    still(page)
    expect(page.locator(".chains .result")).to_have_text(re.compile("Short roof Yagi 2 adds .* for 52\u00a0EUR"))
    assert page.locator(".chains .result").inner_text() == page.locator(".sentence").inner_text()
    with asked(page):
        page.get_by_label("Called").fill("My own")
    still(page)
    with page.expect_response("**/api/chains"):
        page.get_by_role("button", name="Keep this chain").click()
    expect(page.get_by_label("Idea 2").locator("option", has_text="My own")).to_have_count(0)  # it is idea 1
    expect(page.get_by_label("Idea 1").locator("option", has_text="My own")).to_have_count(1)
    with page.expect_response("**/api/chains"):
        page.get_by_role("button", name="Remove from the kept").click()
    expect(page.get_by_label("Idea 1").locator("option", has_text="My own")).to_have_count(0)


def test_where_no_chain_is_kept_one_is_begun(page):
    page.route("**/api/chains", lambda route: route.fulfill(json={"chains": []}))
    page.goto("about:blank")
    page.goto(f"/#v=2&at={NORTH.latitude_deg},{NORTH.longitude_deg}&height=10&now=nothing&sheet=chains")
    page.wait_for_selector("html[data-ready]")
    with asked(page):
        page.get_by_role("button", name="Begin a chain").click()
    expect(page.locator(".sentence")).to_contain_text("My chain brings")
    expect(page.locator(".chains .kind")).to_have_text(["Aerial", "Feeder", "Outlet", "Set"])


def test_a_slip_names_chain_and_part_beside_its_field_and_loses_nothing(page, watched):
    watched.expected = "status of 422"
    show(page)
    edited(page, "loft-dipole")
    told = page.locator(".sentence").inner_text()
    length = part(page, "Feeder").get_by_label("Length")
    with asked(page):
        length.fill("99999")
    note = part(page, "Feeder").locator(".problem")
    expect(note).to_contain_text('Chain "Loft dipole": feeder "Feeder from the loft": “Length” 99999 is not possible')
    expect(length).to_have_attribute("aria-invalid", "true")
    assert length.get_attribute("aria-describedby") == note.get_attribute("id")
    assert page.locator(".sentence").inner_text() == told
    expect(length).to_have_value("99999")
    expect(page.locator(".chains .which option", has_text="to be mended")).to_have_text(re.compile("^Loft dipole"))
    edited(page, "high-gain")
    expect(page.locator(".chains .field-problem:not(:empty)")).to_have_count(0)  # not said beside another chain
    edited(page, "loft-dipole")
    with asked(page):
        part(page, "Feeder").get_by_label("Length").fill("12")
    expect(page.locator(".chains .field-problem:not(:empty)")).to_have_count(0)
    expect(page.locator(".trouble")).to_be_empty()


def test_what_is_no_number_is_said_at_once_and_not_asked(page):
    show(page)
    edited(page)
    questions = []
    page.on("request", lambda request: questions.append(request.url) if "/api/assess" in request.url else None)
    part(page, "Feeder").get_by_label("Length").fill("12 m or so")
    expect(part(page, "Feeder").locator(".problem")).to_contain_text("“12 m or so” is not a length")
    part(page, "Aerial").get_by_label("Gain").fill("694: 1; 470: 2")
    expect(part(page, "Aerial").locator(".problem")).to_contain_text("write pairs by rising frequency")
    page.wait_for_timeout(400)
    assert questions == []
    with asked(page):
        part(page, "Splitter").get_by_label("Price").fill("6")
    still(page)
    expect(part(page, "Feeder").get_by_label("Length")).to_have_value("12 m or so")  # nothing typed is lost
    expect(part(page, "Feeder").locator(".problem")).to_contain_text("is not a length")


def test_overtaken_questions_are_cancelled_while_editing(page):
    """Two edits further apart than the pause, the first answer held back: only the last one counts."""
    show(page, idea="high-gain-masthead")

    def held_back(route: Route) -> None:
        page.wait_for_timeout(700)
        with suppress(Error):  # the page has given the question up
            route.continue_()

    page.route("**/api/assess", held_back, times=1)
    cancelled = []
    page.on("requestfailed", lambda request: cancelled.append(request.url))
    price = part(page, "Masthead amplifier").get_by_label("Price")
    with page.expect_request("**/api/assess"):
        price.fill("301")
    with asked(page) as last:
        price.fill("90")
    still(page)
    sent = next(one for one in chains_of(last) if not isinstance(one, str))
    assert next(one["price"] for one in sent["parts"] if one["id"] == "masthead-amplifier") == 90
    assert len(cancelled) == 1
    expect(page.locator(".sentence")).to_contain_text("169\u00a0EUR")  # 39 + 90 + 25 + 15


def test_a_second_aerial_is_joined_turned_and_taken_out_again(page):
    show(page)
    edited(page, "roof-yagi")
    page.get_by_label("Kind of part to add").select_option("aerial")
    with asked(page) as first:
        page.get_by_role("button", name="Add it").click()
    assert first.value.status == 200
    expect(page.locator(".chains .kind")).to_have_text(
        ["Aerial", "Aerial", "Combiner", "Feeder", "Splitter", "Outlet", "Outlet", "Set"]
    )
    expect(part(page, "Combiner").get_by_role("checkbox").nth(0)).to_be_checked()
    with asked(page) as turned:
        part(page, "Aerial", 1).get_by_label("Turned to").fill("57")
    mine = next(one for one in chains_of(turned) if not isinstance(one, str))
    assert mine["parts"][1]["pointing_deg"] == 57
    expect(page.locator(".cautions")).to_contain_text("Short roof Yagi")
    with asked(page) as single:
        page.get_by_role("button", name="Take out Short UHF Yagi 2").click()
    assert single.value.status == 200
    expect(page.locator(".chains .kind")).to_have_text(["Aerial", "Feeder", "Splitter", "Outlet", "Outlet", "Set"])


def test_it_is_said_which_part_stands_after_which(page, watched):
    watched.expected = "status of 422"
    show(page)
    edited(page, "roof-yagi")
    page.get_by_label("Say which part stands after which").check()
    after = part(page, "Outlet", 1).get_by_label("Stands after")
    expect(after.locator("option").first).to_have_text("by its place: Two-way splitter")
    with asked(page):
        after.select_option("roof-feeder")  # it goes into the splitter already
    note = part(page, "Feeder").locator(".problem")
    expect(note).to_contain_text("feeds 2 parts")
    with asked(page) as mended:
        part(page, "Outlet", 1).get_by_label("Stands after").select_option("splitter")
    assert mended.value.status == 200
    expect(note).to_be_empty()


def test_the_price_is_traced_to_every_line(page, address):
    show(page)
    page.locator(".bill summary").click()
    expect(page.locator(".bill summary")).to_have_text("108\u00a0EUR, line by line: 2 to buy, 4 stay")
    cells = page.locator(".bill tbody .number").all_inner_texts()
    assert [int(one.split()[0]) for one in cells] == [39, 29, 25, 15]  # aerial, amplifier, labour, visit
    expect(page.locator(".bill tfoot")).to_contain_text("108")
    expect(page.locator(".bill")).to_contain_text("Stays up, not paid again: Feeder from the roof, 15 m of copper-7mm")
    expect(page.locator(".bill")).to_contain_text("Comes down: Short UHF Yagi.")
    edited(page)
    with asked(page):
        part(page, "Feeder").get_by_label("Length").fill("25")
    expect(page.locator(".bill")).to_contain_text("up now are 15 m of copper-7mm")
    expect(page.locator(".bill tfoot")).to_contain_text("120")  # the longer feeder is bought for 12 more


def test_the_cheapest_chains_are_found_told_and_taken(page):
    show(page)
    page.locator("#cheapest > summary").click()
    form = page.locator("#cheapest form")
    form.get_by_label("Outlets").fill("two")
    page.get_by_role("button", name="Find it").click()
    expect(page.locator("#cheapest .problem")).to_contain_text("write numbers")
    form.get_by_label("Outlets").fill("2")
    with page.expect_response("**/api/cheapest") as found:
        page.get_by_role("button", name="Find it").click()
    front = found.value.json()["front"]
    steps = page.locator("#cheapest li")
    expect(steps).to_have_count(len(front))
    for number, step in enumerate(front):
        expect(steps.nth(number)).to_contain_text("it pays" if step["pays"] and not number else "pay")
        expect(steps.nth(number)).to_contain_text(step["reason"])
    with asked(page):
        steps.last.get_by_role("button").click()
    still(page)
    expect(page.locator(".changes thead .chain").last).to_have_text(front[-1]["chain"]["title"])
    expect(page.locator(".chains .which option:checked")).to_have_text(f"{front[-1]['chain']['title']} (not kept yet)")


def test_a_block_of_flats_comes_from_four_answers_and_is_a_chain_to_edit(page):
    show(page)
    page.locator("#block > summary").click()
    expect(page.locator("#block-aerial")).to_have_value("long-yagi")  # that of the shown idea
    page.locator("#block-outlets").fill("6")
    with page.expect_response("**/api/block"), asked(page):
        page.get_by_role("button", name="Propose a chain").click()
    expect(page.locator(".sentence")).to_contain_text("Block of 6, star")
    assert page.locator(".chains .an-outlet").count() == 6
    expect(page.locator("#block .found")).to_contain_text("Levels at its outlets")
    with asked(page):
        page.get_by_label("Labour", exact=False).first.fill("200")


def sweep_file(reflection: float) -> dict:
    rows = "".join(f"{f} {reflection} 0\n" for f in range(470, 699, 4))
    return {"name": "aerial.s1p", "mimeType": "text/plain", "buffer": f"# MHz S RI R 75\n{rows}".encode()}


def pattern_file() -> dict:
    """Loss of 10 (1 - cos a) dB: 3 dB at 45.6 degrees either side, 15 dB at 120 degrees and more behind."""
    rows = "".join(f"{a},{10 * (1 - math.cos(math.radians(a))):.3f}\n" for a in range(360))
    return {"name": "p.csv", "mimeType": "text/csv", "buffer": f"angle_deg,loss_db\n{rows}".encode()}


def test_a_measured_match_is_said_by_channel_and_taken(page, watched):
    watched.expected = "status of 422"
    show(page, idea="high-gain")
    page.locator("#measured > summary").click()
    page.get_by_role("button", name="Read the match").click()
    expect(page.locator(".match-problem")).to_have_text(re.compile("^Choose the sweep"))
    page.locator("#match-sweep").set_input_files({"name": "a.s1p", "mimeType": "", "buffer": b"\x00\x01"})
    page.get_by_role("button", name="Read the match").click()
    expect(page.locator(".match-problem")).to_contain_text("a.s1p: is binary, not text: export it as text")
    page.locator("#match-sweep").set_input_files({"name": "a.s1p", "mimeType": "", "buffer": b"1" * 700_001})
    page.get_by_role("button", name="Read the match").click()
    expect(page.locator(".match-problem")).to_contain_text("the limit here is 700 kB")
    page.locator("#match-sweep").set_input_files(sweep_file(1 / 3))
    page.get_by_role("button", name="Read the match").click()
    row = page.locator(".match-found tbody tr").filter(has=page.locator("th", has_text=re.compile("^48$")))
    expect(row.locator("td")).to_have_text(["2.00", "9.5", re.compile("to"), "0.51"])
    expect(page.locator(".match-found .caution")).to_contain_text("Match is not gain")
    with asked(page):
        page.get_by_role("button", name="Take the match into Long UHF Yagi").click()
    edited(page, "high-gain")
    with asked(page) as without:
        part(page, "Aerial").get_by_label("Its gain").select_option("false")
    mine = next(one for one in chains_of(without) if not isinstance(one, str))
    assert mine["parts"][0]["gain_includes_mismatch"] is False
    with asked(page):
        page.get_by_role("button", name="Leave the match out").click()


def test_a_measured_pattern_is_taken_into_an_aerial(page):
    show(page, idea="high-gain")
    page.locator("#measured > summary").click()
    expect(page.locator("#measured-into")).to_have_value("high-gain")
    page.locator("#pattern-file").set_input_files(pattern_file())
    page.get_by_role("button", name="Read the pattern").click()
    expect(page.locator(".pattern-found li")).to_contain_text(
        "91° between the half-power points, 15 dB less to the back"
    )
    told = page.locator(".changes tbody").inner_text()
    with asked(page):
        page.get_by_role("button", name="Take the pattern into Long UHF Yagi").click()
    expect(page.locator(".changes tbody")).not_to_have_text(told)
    edited(page, "high-gain")
    expect(part(page, "Aerial").get_by_label("Beamwidth")).to_have_count(0)
    with asked(page):
        page.get_by_role("button", name="Leave the pattern out").click()
    expect(part(page, "Aerial").get_by_label("Beamwidth")).to_have_value(re.compile("^91"))


def test_steps_are_taken_back_and_again_by_button_and_by_key(page):
    show(page)
    edited(page)
    price = part(page, "Masthead amplifier").get_by_label("Price")
    with asked(page):
        price.fill("300")
    still(page)
    changed = page.locator(".sentence").inner_text()
    with asked(page):
        page.get_by_role("button", name="Take the last step back").click()
    expect(price).to_have_value("29")
    again = page.get_by_role("button", name="Take it again")
    with asked(page):
        again.focus()
        page.keyboard.press("Enter")
    expect(price).to_have_value("300")
    expect(page.locator(".sentence")).to_have_text(changed)
    expect(again).to_be_hidden()
    page.locator(".chains .which").focus()
    with asked(page):
        page.keyboard.press("Control+z")
    expect(price).to_have_value("29")
    with asked(page):
        page.keyboard.press("Control+Shift+z")
    expect(price).to_have_value("300")
    price.focus()
    page.keyboard.press("Control+z")  # in a field the browser takes letters back
    expect(page.locator("html")).to_have_attribute("data-asking", "no")


def test_the_keyboard_alone_adds_fills_and_compares(page, watched):
    watched.expected = "status of 422"  # a third outlet on a two-way splitter
    show(page)
    page.locator(".chains .which").focus()
    page.keyboard.press("Tab")
    expect(page.get_by_role("button", name="Start another from this")).to_be_focused()
    with asked(page):
        page.keyboard.press("Enter")
    still(page)
    page.get_by_label("Kind of part to add").focus()
    page.keyboard.press("Tab")
    with asked(page):
        page.keyboard.press("Enter")
    expect(page.get_by_role("button", name="Add it")).to_be_focused()
    page.get_by_role("button", name="Take out Outlet").last.focus()
    with asked(page):
        page.keyboard.press("Enter")
    assert page.evaluate("() => document.activeElement.closest('.a-part') !== null")


def test_everything_of_a_chain_is_without_fault_and_fits(page, watched):
    watched.expected = "status of 422"
    show(page, more="%7B%22second%22%3A%22high-gain%22%7D")
    edited(page, "roof-yagi")
    page.locator(".bill summary").click()
    for one in ("cheapest", "block", "measured"):
        page.locator(f"#{one} > summary").click()
    page.locator("#match-sweep").set_input_files(sweep_file(0.3))
    page.get_by_role("button", name="Read the match").click()
    with page.expect_response("**/api/cheapest"):
        page.get_by_role("button", name="Find it").click()
    page.get_by_label("Kind of part to add").select_option("aerial")
    with asked(page):
        page.get_by_role("button", name="Add it").click()
    still(page)
    with asked(page):
        part(page, "Feeder").get_by_label("Length").fill("99999")
    expect(part(page, "Feeder").locator(".problem")).not_to_be_empty()
    for width, scheme in ((1280, "light"), (820, "dark"), (360, "light"), (360, "dark"), (1280, "dark")):
        page.set_viewport_size({"width": width, "height": 800})
        page.emulate_media(color_scheme=scheme)
        assert page.evaluate("() => document.documentElement.scrollWidth") <= width
        if width != 820:
            for inside in ("#chains", "#bill"):
                assert violations(page, inside) == [], (inside, width, scheme)
    page.emulate_media(color_scheme="light")


def violations(page: Page, inside: str) -> list[tuple[str, str]]:
    found = Axe().run(page, context=inside, options={"runOnly": RULES}).response["violations"]
    return [(fault["id"], fault["nodes"][0]["html"][:150]) for fault in found]
