"""Steps that the tests of the page share."""

from __future__ import annotations

import re

from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Page, expect

from app.demo.scenario import DEMO_ROOFS, DemoRoof

NORTH, WEST, EAST, *_ = DEMO_ROOFS
SHEETS = (
    "skyline",
    "path",
    "ledger",
    "elsewhere",
    "readings",
    "chains",
    "roofs",
    "transmitters",
    "downloads",
    "assumptions",
)
RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"]
SENTENCE = re.compile(r"^(Today .+ of \d+\.|Nothing is up today\.) .+(worth it|measure first|any price|pay below).*\.$")


def link_to(roof: DemoRoof, **more: str) -> str:
    """Write a link as the page keeps it."""
    pairs = {"v": "2", "at": f"{roof.latitude_deg},{roof.longitude_deg}", "height": "10"} | more
    return "/#" + "&".join(f"{key}={value}" for key, value in pairs.items())


def start(page: Page, link: str = "/") -> None:
    """Load the page anew."""
    page.goto(link)
    page.wait_for_selector("html[data-ready]")


def answered(page: Page, roof: DemoRoof = NORTH, now: str = "loft-dipole", **more: str) -> None:
    """Show the answer of a roof; a page that is open already follows the link without loading anew."""
    link = link_to(roof, now=now, **more)
    if not page.url.startswith("http"):
        start(page, link)
    else:
        page.evaluate("() => history.replaceState(null, '', '#')")  # the same link twice is no change to a browser
        with page.expect_response("**/api/assess"):
            page.goto(link)
    still(page)
    page.wait_for_selector(".changes:not([hidden])")


def show(page: Page, sheet: str, roof: DemoRoof = NORTH, now: str = "roof-yagi", **more: str) -> None:
    """Show one sheet of a roof's answer."""
    answered(page, roof, now, sheet=sheet, **more)


def still(page: Page) -> None:
    """Wait until no question is on its way."""
    expect(page.locator("html")).to_have_attribute("data-asking", "no")


def settled(page: Page) -> None:
    """Wait until the map is drawn."""
    page.wait_for_selector("#map[data-idle]")


def open_sheet(page: Page, name: str) -> None:
    """Press a tab."""
    page.get_by_role("tab", name=name, exact=True).click()


def sentence(page: Page) -> str:
    """Return the answer's sentence."""
    return page.locator(".sentence").inner_text()


def widest(page: Page) -> int:
    """How wide the page is: more than the window means scrolling sideways."""
    return int(page.evaluate("() => document.documentElement.scrollWidth"))


def violations(page: Page) -> list[tuple[str, str]]:
    """Faults that axe finds, each with its first place."""
    found = Axe().run(page, options={"runOnly": RULES}).response["violations"]
    return [(fault["id"], fault["nodes"][0]["html"][:150]) for fault in found]
