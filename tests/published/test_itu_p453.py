"""Digital maps of refractivity, Rec. ITU-R P.453 as P.452-16 and P.1812 carry them.

Source: DN50.TXT and N050.TXT (1.5 degrees), the copy inside pycraf 2.1. All 29 161 points are
compared; between them both surfaces are bilinear on aligned grids, so the errors are largest there.
"""

import importlib.util
from pathlib import Path

import numpy as np
import pytest

from propagation.refractivity import refractivity


@pytest.fixture(scope="module")
def maps_folder() -> Path:
    spec = importlib.util.find_spec("pycraf")
    assert spec is not None, "the maps come with pycraf: install the test extra"
    assert spec.origin is not None
    return Path(spec.origin).parent / "itudata" / "p.452-16" / "R-REC-P.452-16-201507"


@pytest.fixture(scope="module")
def grid() -> tuple[np.ndarray, np.ndarray]:
    return tuple(np.meshgrid(np.linspace(90, -90, 121), np.linspace(0, 360, 241), indexing="ij"))


def test_own_lapse_is_within_8_of_the_map_and_2_rms(maps_folder, grid):
    published = np.loadtxt(maps_folder / "DN50.TXT")
    error = refractivity(*grid)[0] - published
    assert error.size == 29161
    assert np.abs(error).max() <= 7.1  # required: 8 N/km
    assert np.sqrt((error**2).mean()) <= 0.3  # required: 2 N/km


def test_own_sea_level_refractivity_is_within_6_of_the_map(maps_folder, grid):
    """5.3 N at most: 0.15 dB for each N makes that 0.8 dB of troposcatter loss (P.1812-7 eq. (44))."""
    published = np.loadtxt(maps_folder / "N050.TXT")
    error = refractivity(*grid)[1] - published
    assert error.size == 29161
    assert np.abs(error).max() <= 5.4
    assert np.sqrt((error**2).mean()) <= 0.35


def test_full_maps_return_every_published_figure(maps_folder, grid):
    lapse, n0 = refractivity(*grid, maps_folder=maps_folder)
    np.testing.assert_allclose(lapse, np.loadtxt(maps_folder / "DN50.TXT"), atol=1e-9)
    np.testing.assert_allclose(n0, np.loadtxt(maps_folder / "N050.TXT"), atol=1e-9)
