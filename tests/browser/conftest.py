"""A server on the demo and a Chromium that listens for errors and for requests that leave the server."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from playwright.sync_api import (
    Browser,
    BrowserContext,
    ConsoleMessage,
    Page,
    Playwright,
    Request,
    ViewportSize,
    expect,
    sync_playwright,
)

from app.demo.scenario import ensure_demo
from app.transmitters.store import Store
from app.web.main import create_app
from tests.browser.serving import serving

FLAGS = [
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
]
expect.set_options(timeout=45_000)  # a busy machine is not a fault of the page
WINDOW: ViewportSize = {"width": 1280, "height": 900}
# What other pages of the context kept is not this one's memory; sessionStorage is a page's own.
FORGET = """try {
    if (!sessionStorage.getItem('begun')) { localStorage.clear(); sessionStorage.setItem('begun', 'yes'); }
} catch { /* a document without storage */ }"""
NO_WEBGL = ["--disable-webgl", "--disable-webgl2", "--disable-3d-apis"]


@pytest.fixture(scope="session")
def address(demo_world, tmp_path_factory) -> Iterator[str]:
    store = Store.open(tmp_path_factory.mktemp("page"))  # its own: what the pages keep reaches no other test
    ensure_demo(store)
    with serving(create_app(store, demo_world.ground)) as own:
        yield own


@pytest.fixture(scope="session")
def playwright() -> Iterator[Playwright]:
    with sync_playwright() as one:
        yield one


@pytest.fixture(scope="session")
def browser(playwright, chromium_path) -> Iterator[Browser]:
    one = playwright.chromium.launch(executable_path=chromium_path, args=FLAGS)
    yield one
    one.close()


@pytest.fixture(scope="session")
def browser_without_webgl(playwright, chromium_path) -> Iterator[Browser]:
    one = playwright.chromium.launch(executable_path=chromium_path, args=[*FLAGS, *NO_WEBGL])
    yield one
    one.close()


class Watched:
    """Pages whose console and requests are watched; what went wrong is checked when the test ends."""

    def __init__(self, address: str) -> None:
        self.address = address
        self.contexts: list[BrowserContext] = []
        self.wrong: list[str] = []
        self.also = "data:"  # an address besides the server's that a test opens
        self.expected = ""  # part of a console error that the test brings about

    def open(self, browser: Browser, **options: object) -> Page:
        """Open a new page in a context of its own."""
        context = self.context(browser, **options)
        self.contexts.append(context)
        return self.page_in(context)

    def context(self, browser: Browser, **options: object) -> BrowserContext:
        """Return a context on the server."""
        return browser.new_context(**({"viewport": WINDOW, "base_url": self.address} | options))

    def page_in(self, context: BrowserContext) -> Page:
        """Open a page whose console and requests are watched."""
        page = context.new_page()
        page.set_default_timeout(45_000)
        page.on("pageerror", lambda error: self.wrong.append(str(error)))
        page.on("console", self._hear)
        page.on("request", self._see)
        return page

    def check(self) -> None:
        """Fail if anything went wrong, and begin anew."""
        wrong, self.wrong, self.also, self.expected = self.wrong, [], "data:", ""
        assert wrong == []

    def _hear(self, message: ConsoleMessage) -> None:
        if message.type == "error" and not (self.expected and self.expected in message.text):
            self.wrong.append(message.text)

    def _see(self, request: Request) -> None:
        if not request.url.startswith((self.address, self.also, "data:", "blob:")):
            self.wrong.append(f"left the server: {request.url}")


@pytest.fixture(scope="session")
def watcher(address) -> Watched:
    return Watched(address)


@pytest.fixture
def watched(watcher) -> Iterator[Watched]:
    yield watcher
    for context in watcher.contexts:
        context.close()
    watcher.contexts.clear()
    watcher.check()


@pytest.fixture(scope="session")
def common(watcher, browser) -> Iterator[BrowserContext]:
    """One context for most tests: what its cache holds is not loaded again."""
    context = watcher.context(browser)
    yield context
    context.close()


@pytest.fixture
def fresh(watched, common) -> Iterator[Page]:
    """A page that has not been loaded, and remembers nothing."""
    page = watched.page_in(common)
    page.add_init_script(FORGET)
    yield page
    page.close()


@pytest.fixture(scope="module")
def open_page(watcher, common) -> Iterator[list[Page]]:
    """The page that a module's tests pass on; empty until it is needed, and after a failure."""
    pages: list[Page] = []
    yield pages
    for page in pages:
        page.close()


@pytest.fixture
def page(watched, common, open_page) -> Iterator[Page]:
    """A page that an earlier test may have loaded: `answered` and `show` bring it to a roof of their own."""
    if not open_page:
        open_page.append(watched.page_in(common))
        open_page[0].add_init_script(FORGET)
    page = open_page[0]
    yield page
    page.unroute_all()
    if page.viewport_size != WINDOW:
        page.set_viewport_size(WINDOW)
