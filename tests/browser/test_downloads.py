"""Open tiles from the page, in Chromium: from a server on this machine that misbehaves; nothing goes farther."""

from __future__ import annotations

import re
import sys
from pathlib import Path

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import expect

sys.path.insert(0, str(Path(__file__).parents[1] / "terrain"))
from tile_server import OWN_SOURCE, TileServer, hgt_tile

from app.demo.scenario import ensure_demo
from app.transmitters.store import Store
from app.transmitters.template import import_template
from app.web.main import create_app
from app.world import open_ground
from tests.browser.serving import serving

pytestmark = pytest.mark.browser

SOON_MS = 30_000  # a first answer loads libraries

RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"]
MASTS = """transmitter,latitude_deg,longitude_deg,multiplex,channel,raster,system,mode,erp_kw,polarisation,antenna_agl_m
North Mast,49.8,11.5,Blue,27,europe-uhf-8,DVB-T2,256-QAM 2/3,50,horizontal,180
North Mast,49.8,11.5,Green,33,europe-uhf-8,DVB-T2,256-QAM 2/3,50,horizontal,180
"""
ROOF = "#v=2&at=49.5,11.5&height=10&now=nothing&sheet=downloads"
TILES = [f"N{north}E{east:03d}" for north in (48, 49, 50) for east in (10, 11, 12)]


@pytest.fixture
def tiles():
    with TileServer() as server:
        server.files |= {f"/{tile}.hgt.gz": hgt_tile(number) for number, tile in enumerate(TILES)}
        yield server


@pytest.fixture
def own_address(tiles, tmp_path, monkeypatch):
    """A server of our own with masts on land and no ground at all."""
    monkeypatch.setenv("GAINWORTH_DATA_DIR", str(tmp_path / "data"))
    monkeypatch.setenv("GAINWORTH_CACHE_DIR", str(tmp_path / "cache"))
    for name in ("http_proxy", "HTTP_PROXY", "https_proxy", "HTTPS_PROXY"):
        monkeypatch.delenv(name, raising=False)
    store = Store.open(tmp_path / "data")
    (tmp_path / "data" / "sources.toml").write_text(OWN_SOURCE.format(url=tiles.url))
    (tmp_path / "mine.csv").write_text(MASTS)
    ensure_demo(store)
    import_template(tmp_path / "mine.csv", store)
    with serving(create_app(store, open_ground(False))) as own:
        yield own


@pytest.fixture
def watcher(watcher, own_address):
    """Pages on the server of our own, watched as all are."""
    return type(watcher)(own_address)


def open_panel(page, reach="30"):
    """The roof has no ground; its panel says what would bring some."""
    page.goto(f"/{ROOF}")
    page.wait_for_selector("html[data-ready]")
    panel = page.locator("#downloads")
    expect(panel).to_be_visible()
    panel.get_by_label("From").select_option("hills")
    panel.get_by_label("All round the roof").fill(reach)
    panel.get_by_label("All round the roof").blur()
    return panel


def agree_and_fetch(panel):
    panel.get_by_role("checkbox").check()
    panel.get_by_role("button", name="Fetch the tiles").click()


def test_nothing_leaves_before_the_user_agrees_and_then_the_roof_is_answered(watched, browser, tiles):
    watched.expected = "422"  # the roof without ground
    page = watched.open(browser)
    drawn = []
    page.on("request", lambda request: drawn.append(request.url))
    panel = open_panel(page)
    expect(page.locator(".trouble")).to_contain_text("no elevation at 49.5000 N 11.5000 E", ignore_case=True)
    expect(page.locator(".trouble")).to_contain_text("Under “Ground” below the page can fetch them.")
    expect(panel.locator(".plan")).to_have_text("1 tile, 0 of them here already; 1 to fetch, about 1 MB.")
    expect(panel.locator(".terms")).to_have_text("Invented hills. Licence: free with credit. © nobody")
    expect(panel.locator(".consent")).to_contain_text("Until then nothing leaves this machine")
    expect(panel.locator(".consent")).to_contain_text(tiles.url.removeprefix("http://"))
    expect(panel.get_by_role("button", name="Fetch the tiles")).to_be_disabled()
    assert tiles.requests == []
    agree_and_fetch(panel)
    expect(panel.locator(".result")).to_have_text("1 fetched.")
    expect(panel.locator(".timing")).to_have_text(
        re.compile(r"The first answer over the new ground took \d+\.\d s; the next one \d+\.\d s\."),
        timeout=SOON_MS,
    )
    expect(page.locator(".trouble")).to_be_empty()
    expect(page.locator(".sentence")).to_contain_text("Nothing is up today.")
    expect(page.locator("#map .credit")).to_contain_text("© nobody")
    expect(panel.locator(".credits")).to_contain_text("Natural Earth")
    expect(panel.locator(".plan")).to_have_text("1 tile, all of them here already.")
    assert len(tiles.requests) == 1
    version = page.request.get("/api/health").json()["ground"]["version"]
    assert any(f"version={version}" in one for one in drawn)  # the map draws the new ground


def test_a_stopped_download_is_taken_up_by_a_page_opened_later(watched, browser, tiles):
    watched.expected = "422"
    tiles.pause_s = 2.0  # before each answer; four are asked at once
    panel = open_panel(watched.open(browser), "90")
    agree_and_fetch(panel)
    expect(panel.get_by_role("progressbar")).to_be_visible()
    second = watched.open(browser)
    other = open_panel(second, "90")
    expect(other.get_by_role("progressbar")).to_be_visible()
    other.get_by_role("button", name="Stop").click()
    for one in (panel, other):
        expect(one.locator(".result")).to_have_text(
            re.compile("^Stopped. .* stopped.* Fetch them again to go on"), timeout=SOON_MS
        )
    tiles.pause_s = 0.0
    agree_and_fetch(other)
    expect(other.locator(".timing")).to_contain_text("The first answer", timeout=SOON_MS)
    expect(other.locator(".result")).to_have_text(re.compile(r"^\d+ fetched(, \d there)?\.$"))


def test_what_goes_wrong_is_said_in_plain_words(watched, browser, tiles):
    watched.expected = "422"
    tiles.faults["/N49E011.hgt.gz"] = ["always html"]
    page = watched.open(browser)
    panel = open_panel(page)
    agree_and_fetch(panel)
    expect(panel.locator(".outcomes")).to_contain_text("sent a web page in place of N49E011.hgt.gz: a login page")
    expect(panel.locator(".result")).to_contain_text("1 failed. Fetch them again to go on: what has come is kept.")
    panel.get_by_label("All round the roof").fill("900")
    panel.get_by_label("All round the roof").blur()
    expect(panel.locator(".problem")).to_have_text("A reach of 900 km is not possible: use 1 to 500 km.")
    panel.get_by_label("All round the roof").fill("far")
    panel.get_by_label("All round the roof").blur()
    expect(panel.locator(".problem")).to_contain_text("a number of kilometres")


def test_a_machine_without_a_network_says_so(watched, browser, tiles):
    watched.expected = "422"
    panel = open_panel(watched.open(browser))
    tiles.__exit__()
    agree_and_fetch(panel)
    expect(panel.locator(".problem")).to_contain_text("this machine is offline, or a proxy is needed")


@pytest.mark.parametrize("width", [360, 1280])
@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_the_panel_is_accessible_and_fits(watched, browser, tiles, width, scheme, tmp_path):
    watched.expected = "422"
    page = watched.open(browser, viewport={"width": width, "height": 900}, color_scheme=scheme)
    panel = open_panel(page)
    expect(panel.locator(".plan")).to_contain_text("1 to fetch")
    found = Axe().run(page, options={"runOnly": {"type": "tag", "values": RULES}})
    assert found.response["violations"] == []
    assert page.evaluate("document.documentElement.scrollWidth <= innerWidth")


def test_latitude_and_longitude_that_look_swapped_are_asked(watched, browser):
    watched.expected = "422"
    page = watched.open(browser)
    page.goto("/")
    page.wait_for_selector("html[data-ready]")
    page.get_by_label("Roof at").fill("5.4, 52.3")  # at sea; the exchanged place is land
    page.get_by_label("Roof at").press("Enter")
    expect(page.locator(".doubt")).to_contain_text("are latitude and longitude swapped?")
    page.get_by_role("button", name="Swap them").click()
    expect(page.get_by_label("Roof at")).to_have_value(re.compile(r"^52\.3\d*, 5\.4"))
    expect(page.locator(".doubt")).to_be_empty()
    page.get_by_label("Roof at").fill("111.5, 49.5")  # no latitude
    page.get_by_label("Roof at").press("Enter")
    expect(page.locator("#place-problem")).to_contain_text("Latitude 111.5 is not on Earth")
    expect(page.locator(".doubt")).to_contain_text("Are latitude and longitude swapped?")
    page.get_by_role("button", name="Swap them").click()
    expect(page.get_by_label("Roof at")).to_have_value(re.compile(r"^49\.5\d*, 111\.5"))


@pytest.mark.parametrize(
    "text",
    ["49°30'0\"N 11°30'0\"E", "8FXHGG22+22", "EPSG:32632 681021 5486293", "32N 681021 5486293", "49 30 0 11 30 0"],
)
def test_a_position_is_read_in_every_writing_of_the_command_line(watched, browser, text):
    watched.expected = "422"
    page = watched.open(browser)
    page.goto("/")
    page.wait_for_selector("html[data-ready]")
    page.get_by_label("Roof at").fill(text)
    page.get_by_label("Roof at").press("Enter")
    expect(page.locator(".trouble")).to_contain_text(re.compile(r"No elevation at 49\.50\d\d N 11\.50\d\d E"))


def test_the_place_of_the_device_is_asked_only_on_a_press(watched, browser):
    watched.expected = "422"
    place = {"latitude": 49.5, "longitude": 11.5, "accuracy": 2400}
    page = watched.open(browser, geolocation=place, permissions=["geolocation"])
    page.goto("/")
    page.wait_for_selector("html[data-ready]")
    assert page.get_by_label("Roof at").input_value() == ""
    page.get_by_role("button", name="Take this device’s place").click()
    expect(page.get_by_label("Roof at")).to_have_value(re.compile("^49.5"))
    expect(page.locator(".here-said")).to_contain_text("only sure within 2400 m")
    denied = watched.open(browser)
    denied.goto("/")
    denied.wait_for_selector("html[data-ready]")
    denied.get_by_role("button", name="Take this device’s place").click()
    expect(denied.locator(".here-said")).to_contain_text("was not allowed")
