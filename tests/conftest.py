"""Tests that need a browser or Node: skipped with one notice where those are missing, or a failure if all must run."""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import hypothesis
import numpy as np
import pytest
import rasterio
from affine import Affine

if TYPE_CHECKING:
    from app.world import World


BROWSERS = ("chromium", "chromium-browser", "google-chrome")
# Speed is measured in benchmarks, not in tests; the same examples every time.
hypothesis.settings.register_profile("steady", deadline=None, derandomize=True)
hypothesis.settings.load_profile("steady")

MUST_RUN = os.environ.get("GAINWORTH_TEST_ALL") == "1"


def chromium() -> str | None:
    """Where the browser is, by GAINWORTH_CHROMIUM or on the path."""
    named = os.environ.get("GAINWORTH_CHROMIUM")
    return shutil.which(named) if named else next(filter(None, map(shutil.which, BROWSERS)), None)


def missing(item: pytest.Item) -> str | None:
    """What a test needs and this machine has not."""
    if item.get_closest_marker("browser") and chromium() is None:
        return "Chromium"
    if item.get_closest_marker("node") and shutil.which("node") is None:
        return "Node"
    return None


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    if MUST_RUN:
        return
    for item in items:
        if tool := missing(item):
            item.add_marker(pytest.mark.skip(reason=f"no {tool} on this machine"))


def pytest_runtest_setup(item: pytest.Item) -> None:
    if MUST_RUN and (tool := missing(item)):
        pytest.fail(f"GAINWORTH_TEST_ALL=1 asks for every test, but there is no {tool}", pytrace=False)


def pytest_terminal_summary(terminalreporter: pytest.TerminalReporter) -> None:
    reasons = [
        str(report.longrepr[2])
        for report in terminalreporter.stats.get("skipped", [])
        if isinstance(report.longrepr, tuple)
    ]
    counts = {tool: sum(f"no {tool} on this machine" in reason for reason in reasons) for tool in ("Chromium", "Node")}
    told = [f"{count} that need {tool}" for tool, count in counts.items() if count]
    if told:
        terminalreporter.write_line(
            f"not run: {' and '.join(told)}; install them or set GAINWORTH_CHROMIUM; GAINWORTH_TEST_ALL=1 insists"
        )


@pytest.fixture(scope="session")
def demo_world(tmp_path_factory: pytest.TempPathFactory) -> Iterator[World]:
    """Return the demo in a data folder of its own."""
    from app.world import open_world

    with pytest.MonkeyPatch.context() as patch:
        for name in ("DATA", "CACHE"):
            patch.setenv(f"GAINWORTH_{name}_DIR", str(tmp_path_factory.mktemp(name.lower())))
        yield open_world()


@pytest.fixture(scope="session")
def repository() -> Path:
    return Path(__file__).parent.parent


@pytest.fixture(scope="session")
def chromium_path() -> str:
    path = chromium()
    assert path is not None  # tests that ask for it are marked, and not run without
    return path


@pytest.fixture
def write_raster(tmp_path):
    """Writes heights (rows, columns) as a GeoTIFF whose upper left pixel corner is at west, north."""

    def write(heights, name="ground.tif", west=8.0, north=47.0, pixel=0.001, crs="EPSG:4326", **options) -> Path:
        heights = np.asarray(heights)
        path = tmp_path / "rasters" / name
        path.parent.mkdir(exist_ok=True)
        transform = options.pop("transform", Affine(pixel, 0, west, 0, -pixel, north))
        unit = options.pop("unit", None)
        profile = {
            "driver": "GTiff",
            "height": heights.shape[0],
            "width": heights.shape[1],
            "count": 1,
            "dtype": heights.dtype.name,
            "crs": crs,
            "transform": transform,
        }
        with rasterio.open(path, "w", **(profile | options)) as file:
            file.write(heights, 1)
            if unit:
                file.units = (unit,)
        return path

    return write
