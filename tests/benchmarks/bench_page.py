"""How quickly the page answers in a browser, on the demo and with 300 emissions: run it, it prints.

1 December 2026, Chromium 156 without a graphics card, 2 cores that other work shared (load 3 to 5):
demo: decision and table 1.2 s, map 1.5 s, 118 kB + 255 kB of map library; click to chances 265 ms, of which the API
228 ms (100 ms on an idle machine); sliding 60 updates a second, 0.3 ms of script each.
300 emissions, four chains: decision and table 4.7 s, of which the API 2.0 to 4.4 s; 182 kB.
"""

from __future__ import annotations

import os
import statistics
import tempfile
import threading
import time
from dataclasses import replace

import uvicorn
from playwright.sync_api import Page, sync_playwright

from app.channels import centre_mhz
from app.demo import scenario
from app.transmitters.model import Emission, Multiplex, Transmitter
from app.transmitters.rows import Source
from app.web.main import create_app
from app.world import World, open_world

START = "#v=2&at=44.3,-37.4507&height=10&now=roof-yagi&sheet=skyline"
MASTS, CHANNELS = 30, tuple(str(one) for one in range(21, 31))
WATCH = """() => {
  const start = performance.now(); window.took = null; performance.clearResourceTimings();
  const seen = new MutationObserver(() => {
    if (document.documentElement.dataset.asking !== 'no') return;
    window.took = performance.now() - start; seen.disconnect();
  });
  seen.observe(document.documentElement, {attributes: true, attributeFilter: ['data-asking']});
}"""
API = "() => performance.getEntriesByName(location.origin + '/api/assess').at(-1)?.duration ?? null"
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


def clicks(page: Page, count: int = 8) -> tuple[float, float]:
    """Median from the click to the updated chances and the share of the API in it [ms]."""
    view = page.locator("#map-view")
    view.scroll_into_view_if_needed()
    took = []
    for k in range(count):
        box = page.locator(".overlay .roof-point").bounding_box()
        assert box is not None
        page.evaluate(WATCH)
        page.mouse.click(box["x"] + (8 if k % 2 else -6), box["y"] + (7 if k % 2 else -5))
        page.wait_for_timeout(2500)
        took.append((page.evaluate("() => window.took"), page.evaluate(API)))
    known = [(a, b) for a, b in took if a is not None and b is not None]
    return statistics.median(a for a, _ in known), statistics.median(b for _, b in known)


def main() -> None:
    """Print every figure."""
    with tempfile.TemporaryDirectory() as folder:
        os.environ |= {"GAINWORTH_DATA_DIR": f"{folder}/data", "GAINWORTH_CACHE_DIR": f"{folder}/cache"}
        world = open_world()
        server = uvicorn.Server(uvicorn.Config(create_app(world.store, world.ground), port=0, log_level="error"))
        threading.Thread(target=server.run, daemon=True).start()
        while not server.started:
            time.sleep(0.05)
        address = f"http://127.0.0.1:{server.servers[0].sockets[0].getsockname()[1]}/"
        with sync_playwright() as one:
            path = os.environ.get("GAINWORTH_CHROMIUM", "/usr/bin/chromium")
            browser = one.chromium.launch(executable_path=path, args=["--headless", "--no-sandbox", "--disable-gpu"])
            for name in ("demo", "300 emissions"):
                if name != "demo":
                    crowded(world)
                page = browser.new_context(viewport={"width": 1280, "height": 900}).new_page()
                page.goto(address + START)
                page.wait_for_selector(".changes:not([hidden])")
                page.close()
                page = browser.new_context(viewport={"width": 1280, "height": 900}).new_page()
                start = time.perf_counter()
                page.goto(address + START)
                page.wait_for_selector(".changes:not([hidden])")
                decision = time.perf_counter() - start
                page.wait_for_selector("#map[data-idle]")
                map_s = time.perf_counter() - start
                rest, vendor = page.evaluate(BYTES)
                print(
                    print(
                        f"{name}: decision and table {decision:.2f} s, map {map_s:.2f} s, {rest:.0f} + {vendor:.0f} kB"
                    )
                )
                page.wait_for_selector(".skyline .curtain", state="attached")
                whole, api = clicks(page)
                print(f"{name}: click to chances {whole:.0f} ms, of which the API {api:.0f} ms")
                page.locator(".slider").scroll_into_view_if_needed()
                page.wait_for_selector(".skyline .curtain", state="attached")
                rate, work = page.evaluate(SLIDE)
                print(f"{name}: sliding {rate:.0f} updates a second, {work:.2f} ms of script each")
                page.close()
            browser.close()
        server.should_exit = True


if __name__ == "__main__":
    main()
