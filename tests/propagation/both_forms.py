"""Compiled and plain form of the same paths, side by side."""

from dataclasses import fields
from types import SimpleNamespace

import numpy as np
import pytest

from app.assumptions import Assumptions
from app.paths_to_roof import path_over
from app.roof import Roof
from propagation import p1812
from propagation.digest import stacked_digests
from propagation.fast_digest import Ends, digests
from terrain.profile import sample_profile

PATHS = 40


def hills(rows=300, columns=400, seed=3):
    """Smooth random hills with a sea in one corner."""
    random = np.random.default_rng(seed)
    y, x = np.mgrid[0:rows, 0:columns] / 40.0
    heights = sum(
        random.uniform(20, 120) * np.sin(random.uniform(0.3, 2) * x + random.uniform(0.3, 2) * y + random.uniform(0, 6))
        for _ in range(12)
    )
    return np.clip(120 + heights + random.normal(0, 3, heights.shape) - 3 * np.hypot(y, x) * (x < 2), 0, None)


def ends_within(sheet, seed=5, paths=PATHS):
    random = np.random.default_rng(seed)
    row, column = (
        random.uniform(3, sheet.grid.rows - 4, (2, paths)),
        random.uniform(3, sheet.grid.columns - 4, (2, paths)),
    )
    lat, lon = sheet.grid.position(row, column)
    return Ends(
        lat[0],
        lon[0],
        random.uniform(20, 250, paths),
        lat[1],
        lon[1],
        np.full(paths, 10.0),
        np.arange(paths + 1),
        np.full(paths, 0.027),
    )


def plain(ground, ends, p):
    profile = sample_profile(
        ground,
        ends.tx_latitude_deg[p],
        ends.tx_longitude_deg[p],
        ends.rx_latitude_deg[p],
        ends.rx_longitude_deg[p],
    )
    roof = Roof(ends.rx_latitude_deg[p], ends.rx_longitude_deg[p], 10.0, "urban")
    return path_over(profile, ends.antenna_agl_m[p], roof, Assumptions())


def fields_db(digest, terms, n0):
    frequency, time = np.array([100.0, 690.0])[:, None, None], np.array([1.0, 50.0])[:, None]
    loss = p1812.loss_of_path(terms, frequency_mhz=frequency, time_percent=time, polarisation="horizontal", n0=n0)
    clearance = digest.clearance_ratio(frequency[..., 0])
    straight = digest.diffraction_true_earth(frequency, "vertical").loss_db
    return SimpleNamespace(field=loss.field_dbuv_m, clearance=clearance, straight=straight)


def compare(ground, sheet, ends):
    """Largest differences in dB over the paths that the sheet holds, and how many those are."""
    fast = digests(sheet, ends)
    known = np.flatnonzero(fast.known & (fast.digest.path_length_km > 0.3))
    paths = [plain(ground, ends, p) for p in known]
    expected = fields_db(
        stacked_digests([path.digest for path in paths]),
        p1812.stacked_paths([path.terms for path in paths]),
        fast.n0[known],
    )

    def only(batch):
        return type(batch)(**{field.name: getattr(batch, field.name)[known] for field in fields(batch)})

    got = fields_db(only(fast.digest), only(fast.terms), fast.n0[known])
    sources = [(path.edges[0].into_ray_m, p) for path, p in zip(paths, known, strict=True) if path.edges]
    for into_ray_m, p in sources:
        height_m = Assumptions().value("cover_urban_m")
        assert height_m - 10.0 - fast.source_slope[p] * 0.027 == pytest.approx(into_ray_m, abs=0.01)
    return known.size, max(
        np.abs(got.field - expected.field).max(),
        np.abs(got.straight - expected.straight).max(),
        np.abs(got.clearance - expected.clearance).max(),
    )
