"""The compiled form says what the plain form says, field by field, over rasters of every kind; else it says nothing."""

import shutil
from dataclasses import fields
from pathlib import Path
from types import SimpleNamespace

import numpy as np
import pytest

from app.assumptions import Assumptions
from app.paths_to_roof import path_over
from app.roof import Roof
from propagation import p1812
from propagation.digest import stacked_digests
from propagation.fast_digest import Ends, digests
from terrain.mosaic import Ground
from terrain.profile import sample_profile
from terrain.raster import declare

PATHS = 40
CUTS = Path(__file__).parent.parent / "data" / "nasa" / "srtm"


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


@pytest.fixture
def raster(write_raster):
    def written(heights, **options):
        path = write_raster(heights, **options)
        declare(path, kind="bare")
        return path

    return written


def test_compiled_and_plain_form_agree_within_a_hundredth_of_a_decibel(raster, tmp_path):
    """0.01 dB: float32 heights and sums; over 13,000 paths of real tiles the largest is in DEVELOPERS.md."""
    ground = Ground.open([raster(hills().astype("int16"))], tmp_path / "cache")
    (sheet,) = ground.sheets()
    count, largest = compare(ground, sheet, ends_within(sheet))
    assert count == PATHS
    assert largest < 0.01


def test_paths_cross_tiles_of_one_lattice(raster, tmp_path):
    """Four tiles, cut from one field of heights and put side by side, pixel-centred."""
    heights = hills().astype("int16")
    files = [
        raster(heights[r : r + 150, c : c + 200], name=f"{r}-{c}.tif", west=8 + c / 1000, north=47 - r / 1000)
        for r in (0, 150)
        for c in (0, 200)
    ]
    ground = Ground.open(files, tmp_path / "cache")
    (sheet,) = ground.sheets()
    assert len(sheet.tiles) == 4
    count, largest = compare(ground, sheet, ends_within(sheet))
    assert count == PATHS
    assert largest < 0.01


@pytest.mark.parametrize(
    ("cuts", "sheets", "fewest"),
    [
        (("hills_north", "hills_south"), 1, 38),  # two tiles that share a row, nearly all paths across the seam
        (("island_west", "island_east"), 1, 38),  # a ridge and the sea
        (("small_voids",), 1, 20),  # bridged
        (("large_void",), 1, 2),  # paths beside it; the many over it are left to the plain form
    ],
)
def test_both_forms_agree_over_cuts_of_real_tiles(tmp_path, cuts, sheets, fewest):
    """SRTM of 3 arc-seconds, NASA, public domain: tests/data/nasa/srtm, each cut with its source beside it."""
    for cut in cuts:
        shutil.copy(CUTS / f"{cut}.tif", tmp_path)
    ground = Ground.open([tmp_path], tmp_path / "cache")
    found = ground.sheets()
    assert len(found) == sheets
    count, largest = compare(ground, found[0], ends_within(found[0]))
    assert fewest <= count <= PATHS
    assert largest < 0.01


def test_a_projected_raster_is_as_good(raster, tmp_path):
    """UTM zone 32 north, 60 m."""
    ground = Ground.open(
        [raster(hills().astype("float32"), crs="EPSG:32632", west=500_000, north=5_200_000, pixel=60)],
        tmp_path / "cache",
    )
    (sheet,) = ground.sheets()
    count, largest = compare(ground, sheet, ends_within(sheet))
    assert count == PATHS
    assert largest < 0.01


def test_feet_become_metres(raster, tmp_path):
    ground = Ground.open([raster(hills().astype("int16"), unit="ft")], tmp_path / "cache")
    (sheet,) = ground.sheets()
    assert compare(ground, sheet, ends_within(sheet))[1] < 0.01


def test_a_path_over_a_void_or_beyond_the_edge_is_left_to_the_plain_form(raster, tmp_path):
    heights = hills().astype("int16")
    heights[100:160, 150:230] = -32768
    ground = Ground.open([raster(heights, nodata=-32768)], tmp_path / "cache")
    (sheet,) = ground.sheets()
    lat, lon = sheet.grid.position(np.array([20.0, 130.0, 130.0, 20.0]), np.array([20.0, 20.0, 20.0, 20.0]))
    to_lat, to_lon = sheet.grid.position(np.array([20.0, 130.0, 130.0, -9.0]), np.array([380.0, 120.0, 380.0, 380.0]))
    four = np.full(4, 50.0)
    ends = Ends(lat, lon, four, to_lat, to_lon, four, np.zeros(5, np.int64), np.zeros(0))
    assert digests(sheet, ends).known.tolist() == [True, True, False, False]


def test_many_threads_say_the_same_as_one(raster, tmp_path):
    from concurrent.futures import ThreadPoolExecutor

    ground = Ground.open([raster(hills().astype("int16"))], tmp_path / "cache")
    (sheet,) = ground.sheets()
    ends = ends_within(sheet, paths=300)
    alone = digests(sheet, ends)
    with ThreadPoolExecutor(4) as pool, ThreadPoolExecutor(4) as requests:
        batches = list(requests.map(lambda _: digests(sheet, ends, each=pool.map, parts=4), range(4)))
    for batch in batches:
        for field in fields(alone.terms):
            assert np.array_equal(getattr(batch.terms, field.name), getattr(alone.terms, field.name))
