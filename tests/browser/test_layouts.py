"""Every screen in every layout: nothing wider than the window, no fault that axe finds."""

from __future__ import annotations

import pytest
from playwright.sync_api import Page, expect

from tests.browser.steps import SHEETS, answered, settled, show, start, violations, widest

pytestmark = pytest.mark.browser

READY = {
    "skyline": ".skyline .curtain",
    "path": ".path .ground-line",
    "ledger": ".ledger .result",
    "elsewhere": ".elsewhere .rise-line >> nth=0",
}


def every_sheet(page: Page, width: int) -> None:
    """Open each sheet in turn, then all together."""
    for sheet in SHEETS:
        page.locator(f"#tab-{sheet}").click()
        expect(page.locator(f"#{sheet}")).to_be_visible()
        if sheet in READY:
            page.wait_for_selector(READY[sheet], state="attached", timeout=60_000)
        assert widest(page) <= width, sheet
    page.locator(".changes details, details.seen").evaluate_all("all => { for (const one of all) one.open = true; }")
    page.locator(".sheet").evaluate_all("all => { for (const one of all) one.hidden = false; }")


@pytest.mark.parametrize("scheme", ["light", "dark"])
@pytest.mark.parametrize("width", [360, 820, 1280])
def test_every_screen_is_without_fault_and_fits(watched, browser, width, scheme):
    page = watched.open(browser, viewport={"width": width, "height": 800}, color_scheme=scheme)
    start(page)
    settled(page)
    assert widest(page) <= width
    if width == 360:
        assert violations(page) == []  # before there is a roof
    show(page, "skyline", more="%7B%22second%22%3A%22high-gain%22%7D")
    every_sheet(page, width)
    assert violations(page) == []


def test_nothing_is_lost_at_twice_the_size(watched, browser):
    """A window of 1280 at 200 % zoom has room for 640; of 320 px, by WCAG 2.2 criterion 1.4.10, at 400 %."""
    page = watched.open(browser, viewport={"width": 640, "height": 400}, device_scale_factor=2)
    show(page, "skyline")
    for width in (640, 320):
        page.set_viewport_size({"width": width, "height": 400})
        every_sheet(page, width)
        page.evaluate("() => document.querySelectorAll('.sheet').forEach(one => { one.hidden = true; })")
    for part in (".sentence", ".changes tbody tr", ".roofline", ".cautions li"):
        expect(page.locator(part).first).to_be_visible()


def test_without_webgl_nothing_is_missing(watched, browser_without_webgl):
    page = watched.open(browser_without_webgl, color_scheme="dark")
    answered(page)
    settled(page)
    expect(page.locator("html")).to_have_attribute("data-map", "leaflet")
    expect(page.locator(".overlay .way.line")).to_have_count(1)
    assert violations(page) == []


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_the_page_for_programs_has_no_fault(watched, browser, scheme):
    page = watched.open(browser, color_scheme=scheme)
    start(page, "/docs")
    expect(page.locator("#operations")).to_contain_text("/api/assess")
    expect(page.locator("#operations")).to_contain_text("roof.latitude_deg")
    # All operations have the same make: the first of each group, with the first rows, stand for them.
    for parts, kept in (("#operations > section", 4), ("#operations tbody", 3)):
        page.locator(parts).evaluate_all(
            "(all, kept) => { for (const one of all) [...one.children].slice(kept).forEach(each => each.remove()); }",
            kept,
        )
    assert violations(page) == []


def test_forced_colours_and_stillness_are_heeded(watched, browser):
    page = watched.open(browser, forced_colors="active", reduced_motion="reduce")
    answered(page)
    outlined = "one => getComputedStyle(one).outlineStyle"
    assert page.locator(".cell[aria-pressed=true]").first.evaluate(outlined) == "solid"
    assert page.locator("[role=tab][aria-selected=true]").evaluate(outlined) == "solid"
