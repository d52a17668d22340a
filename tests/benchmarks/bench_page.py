"""How quickly the page answers in a browser, on the demo and with 300 emissions: run it, it prints.

`python tests/benchmarks/bench_page.py ROUNDS` gives medians and minima: first load, kB as sent, the click's way
before, in and after the API, and sliding. Medians (minima) of 5 rounds on 1 December 2026, Chromium 156 without a
graphics card, 2 cores, nothing else running:

                                        demo             300 emissions
    decision and table, s               2.0 (1.5)        3.5 (2.9)
    map, s                              2.3 (2.2)        3.5 (2.9)
    kB, besides 255 of map library      161              221
    click to chances on screen, ms      382 (281)        1787 (1301)
      of which the API                  286 (190)        1573 (1082)
    slides of the aerial a second       59               59

Aimed at: 150 and 400 ms from click to chances, 30 slides. What holds the clicks is `assess` (`bench_assess.py`): 0.15
to 0.20 s and 0.9 to 1.3 s without a browser; turning the chains takes 45 to 70 % of it, the document 20 to 40 %.
"""

from __future__ import annotations

import os
import statistics
import sys
import tempfile
import threading
import time
from dataclasses import replace

import uvicorn
from playwright.sync_api import Browser, Page, sync_playwright

from app.channels import centre_mhz
from app.demo import scenario
from app.fast_paths import warm_up
from app.transmitters.model import Emission, Multiplex, Transmitter
from app.transmitters.rows import Source
from app.web.main import create_app
from app.world import World, open_world

START = "#v=2&at=44.3,-37.4507&height=10&now=roof-yagi&sheet=skyline"
MASTS, CHANNELS = 30, tuple(str(one) for one in range(21, 31))
# From the click to the frame that shows the answer: when the question left, when its answer was there, and the frame.
WATCH = """() => {
  const start = performance.now(); window.took = null; performance.clearResourceTimings();
  const root = document.documentElement;
  const seen = new MutationObserver(() => {
    const asked = performance.getEntriesByType('resource').filter((one) => one.name.endsWith('/api/assess')).at(-1);
    if (root.dataset.asking !== 'no' || !asked) return;
    seen.disconnect();
    requestAnimationFrame(() => setTimeout(() => {
      const ends = [asked.startTime, asked.responseEnd, performance.now()].map((one) => one - start);
      window.took = [ends[2], ends[0], ends[1] - ends[0], ends[2] - ends[1]];
    }));
  });
  seen.observe(root, {attributes: true, attributeFilter: ['data-asking']});
}"""
SLIDE = """async () => {
  const slider = document.querySelector('.slider'), box = slider.getBoundingClientRect();
  slider.setPointerCapture = () => {}; slider.hasPointerCapture = () => true;
  const start = performance.now(); let work = 0;
  for (let i = 0; i < 180; i++) {
    const before = performance.now(), clientX = box.left + box.width * i / 180;
    const where = {clientX, clientY: box.top + 100, pointerId: 1, bubbles: true};
    slider.dispatchEvent(new PointerEvent('pointermove', where));
    work += performance.now() - before; await new Promise(requestAnimationFrame);
  }
  return [180000 / (performance.now() - start), work / 180];
}"""
BYTES = """() => { let map = 0, rest = performance.getEntriesByType('navigation')[0].transferSize;
  for (const one of performance.getEntriesByType('resource')) {
    if (one.name.includes('/vendor/')) map += one.transferSize;
    else if (!one.name.includes('/tiles/')) rest += one.transferSize;
  }
  return [rest / 1000, map / 1000]; }"""


def crowded(world: World) -> None:
    """Put 300 emissions of 60 multiplexes on invented masts round the island."""
    masts = [
        Transmitter(f"m{k}", f"Invented mast {k}", 44.1 + 0.45 * (k % 6) / 5, -37.6 + 0.6 * (k // 6) / 4, None, "crowd")
        for k in range(MASTS)
    ]
    one = scenario.emissions()[0]
    emissions: list[Emission] = [
        replace(
            one,
            id=f"{mast.id}-{channel}",
            transmitter_id=mast.id,
            multiplex_id=f"x{(k * len(CHANNELS) + c) % 60}",
            channel=channel,
            frequency_mhz=centre_mhz(scenario.RASTER, channel)[0],
            erp_kw=0.05 * (1 + k % 5),
        )
        for k, mast in enumerate(masts)
        for c, channel in enumerate(CHANNELS)
    ]
    world.store.replace_source(
        Source("crowd", "Crowd", "", "invented"),
        masts,
        emissions,
        [Multiplex(f"x{k}", f"Multiplex {k}") for k in range(60)],
    )


def clicks(page: Page, count: int) -> list[list[float]]:
    """Each click's ms to the updated chances on the screen, to the question, of the API, and from there."""
    page.locator("#map-view").scroll_into_view_if_needed()
    took = []
    for k in range(count):
        box = page.locator(".overlay .roof-point").bounding_box()
        assert box is not None
        page.evaluate(WATCH)
        page.mouse.click(box["x"] + (8 if k % 2 else -6), box["y"] + (7 if k % 2 else -5))
        while not (one := page.evaluate("() => window.took")):
            page.wait_for_timeout(50)
        took.append(one)
        page.wait_for_load_state("networkidle")  # the sheet that is open fetches what it needs
    return took


def load(browser: Browser, address: str) -> tuple[Page, list[float]]:
    """Open the page as a first visit does; seconds to the decision and to the map, kB of the page and of the map."""
    page = browser.new_context(viewport={"width": 1280, "height": 900}).new_page()
    page.set_default_timeout(180_000)
    start = time.perf_counter()
    page.goto(address)
    page.wait_for_selector(".changes:not([hidden])")
    decision_s = time.perf_counter() - start
    page.wait_for_selector("#map[data-idle]")
    return page, [decision_s, time.perf_counter() - start, *page.evaluate(BYTES)]


def slides(page: Page) -> list[float]:
    """Updates a second while the aerial is slid round, and ms of script for each."""
    page.locator(".slider").scroll_into_view_if_needed()
    page.wait_for_selector(".skyline .curtain", state="attached")
    found: list[float] = page.evaluate(SLIDE)
    return found


def told(rows: list[list[float]], names: str, places: int) -> str:
    """Median and minimum of each column."""
    columns = zip(names.split(","), zip(*rows, strict=True), strict=True)
    return ", ".join(
        f"{name.strip()} {statistics.median(values):.{places}f} ({min(values):.{places}f})" for name, values in columns
    )


def main() -> None:
    """Print every figure, median and in brackets the minimum."""
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else 3
    with tempfile.TemporaryDirectory() as folder:
        os.environ |= {"GAINWORTH_DATA_DIR": f"{folder}/data", "GAINWORTH_CACHE_DIR": f"{folder}/cache"}
        world = open_world()
        app = create_app(world.store, world.ground)
        warm_up(world.ground)
        server = uvicorn.Server(uvicorn.Config(app, port=0, log_level="error"))
        threading.Thread(target=server.run, daemon=True).start()
        while not server.started:
            time.sleep(0.05)
        address = f"http://127.0.0.1:{server.servers[0].sockets[0].getsockname()[1]}/{START}"
        with sync_playwright() as one:
            path = os.environ.get("GAINWORTH_CHROMIUM", "/usr/bin/chromium")
            browser = one.chromium.launch(executable_path=path, args=["--headless", "--no-sandbox", "--disable-gpu"])
            for name in ("demo", "300 emissions"):
                if name != "demo":
                    crowded(world)
                loads, clicked, slid = [], [], []
                for _ in range(rounds):
                    page, loaded = load(browser, address)
                    loads.append(loaded)
                    page.wait_for_selector(".skyline .curtain", state="attached")
                    clicked += clicks(page, 6)
                    slid.append(slides(page))
                    page.context.close()
                print(f"{name}, median (minimum):")
                print(f"  first load: {told(loads, 'decision and table s, map s, kB, kB of map library', 2)}")
                print(f"  click: {told(clicked, 'to chances ms, before the question, API, after it', 0)}")
                print(f"  sliding: {told(slid, 'updates a second, ms of script each', 2)}")
            browser.close()
        server.should_exit = True


if __name__ == "__main__":
    main()
