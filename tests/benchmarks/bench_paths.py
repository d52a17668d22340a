"""Paths of one rooftop and of a million roofs: the production code against pycraf, plain C, our numpy and itself.

Every path goes through the same functions as an answer of the server, zones and water on. The relief is declared as
bare ground: under surface models finer than 35 m the plain form answers. Under land cover: `bench_cover.py`.

Medians of 7 rounds on 2 virtual Xeon processors (2.6 GHz, Ice Lake, 1.25 MiB L2 each), 2026-12-01, little else running;
200 paths of 2697 points, 91 % of them meet the sea. Microseconds a path: whole 38, geodesics and sampling 25, sampling
alone 17. A million paths take 6.9 s on two threads.

    against pycraf's diffraction on given profiles, warm   3.0 (goal 8)    missed
    the same, caches flushed                               3.0 (goal 3)
    against pycraf's profiles and diffraction              63 (goal 60)
    against our numpy                                      281 (goal 15)
    sampling against plain C over samples in rows          4.7 (goal 0.7)
    whole against its geodesics and sampling               1.60 (goal 1.5) missed; 1.48 under land cover
    two threads against one                                0.94 (goal 1.7) missed
    12 frequencies against 1                               1.18 (goal 1.4)
    both methods, 3 times, 200 × 6 emissions               1.05 (goal 5)
    fresh map against decoding ten tiles                   0.03 (goal 0.05)
    a million paths against their sampling                 2.15 (goal 1.5) missed
    a million paths, two threads against one               2.00 (goal 1.7)

Two threads bring nothing for one rooftop: 100 paths are 4 ms, of which numpy's calls between the compiled passes hold
the interpreter; so an answer stays on one thread below 1000 paths. Not tried: closing the formulas in compiled code.

With samples in rows it was 1.4 times pycraf: each point of a path to the north lies on a memory line and a page of its
own, 24 ns a point. In patches (terrain/patches.py) sampling takes 6.5 to 8 ns over 200 paths, 3.1 over 5 that stay in
the second-level cache, 2.1 in its three loops alone (where 0.8, fetch 0.9, blend 0.4). The difference of the first two
is memory: a third of a line a point, from a cache and a memory that others fill; huge pages no longer change it. The
rest of the whole, in microseconds a path: rays, sums and places 6, zones 2, closing formulas 3, geodesics 3, climate 1.
With these 15 and samples at hand (8) it would be 4 times pycraf; 8 times would be 11 in all, which this processor does
not reach. The two ratios to our own sampling were 1.28 and 1.6 to 1.7 when sampling was three times slower.
Tried without gain: 512-bit vectors, stretches of 64 to 1024 points; with 0.4 ns, not taken up: asking for the next
stretch before this one is blended, paths in the order of their bearing.
"""

from __future__ import annotations

import ctypes
import shutil
import subprocess
import tempfile
import warnings
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from pathlib import Path

import numpy as np
import rasterio
from protocol import Row, Variant, ratio, timed
from relief import COLUMNS, ROWS, SOUTH, WEST, write_tiles

from app.assumptions import Assumptions
from app.paths_to_roof import path_over
from app.roof import Roof
from propagation import p1546, p1812
from propagation.fast_digest import Digests, Ends, digests
from terrain.compiled import compiled
from terrain.geodesy import destination
from terrain.kernels import Scratch, SheetArrays, sample_heights, scratch_for, sheet_arrays
from terrain.lines import Lines, lines_over
from terrain.mosaic import Ground
from terrain.patches import in_rows
from terrain.profile import sample_profile
from terrain.sheet import Sheet

SPACING_M = 30.0
ROOF = Roof(47.4, 9.9, 10.0)
FEW = 20  # paths of the slow variants, every tenth


def rooftop(paths: int = 200, seed: int = 1) -> Ends:
    """Transmitters 5 to 150 km round one roof, as far as the relief reaches."""
    random = np.random.default_rng(seed)
    lat, lon = np.empty(0), np.empty(0)
    while lat.size < paths:
        place = destination(
            ROOF.latitude_deg, ROOF.longitude_deg, random.uniform(0, 360, 900), random.uniform(5, 150, 900)
        )
        inside = (place[0] > SOUTH + 0.01) & (place[0] < SOUTH + ROWS - 0.01)
        inside &= (place[1] > WEST + 0.01) & (place[1] < WEST + COLUMNS - 0.01)
        lat, lon = np.append(lat, place[0][inside]), np.append(lon, place[1][inside])
    return _ends(lat[:paths], lon[:paths], ROOF.latitude_deg, ROOF.longitude_deg, random.uniform(30, 250, paths))


def million_roofs(side: int = 1000) -> Ends:
    """Roofs every 100 m round one transmitter."""
    north, east = (axis.ravel() * 100.0 for axis in np.mgrid[0:side, 0:side] - side / 2 + 0.5)
    lat = ROOF.latitude_deg + north / 111_195
    lon = ROOF.longitude_deg + east / (111_195 * np.cos(np.radians(lat)))
    return _ends(ROOF.latitude_deg, ROOF.longitude_deg, lat, lon, 150.0)


def _ends(tx_lat, tx_lon, rx_lat, rx_lon, antenna_agl_m) -> Ends:
    values = np.broadcast_arrays(*(np.asarray(v, float) for v in (tx_lat, tx_lon, antenna_agl_m, rx_lat, rx_lon, 10.0)))
    plain = [np.ascontiguousarray(v) for v in values]
    return Ends(*plain, first_edge=np.zeros(plain[0].size + 1, np.int64), edge_km=np.zeros(0))


@compiled
def sample_all(
    sheet: SheetArrays,
    scratch: Scratch,
    first_knot: np.ndarray,
    row: np.ndarray,
    column: np.ndarray,
    points: np.ndarray,
) -> int:
    """The sampling stage alone: the first half of `scan_lines`."""
    most = points.max()
    height, wet, known = np.empty(most, np.float32), np.empty(most, np.bool_), 0
    for p in range(points.size):
        knots = slice(first_knot[p], first_knot[p + 1])
        n = points[p]
        known += sample_heights(sheet, row[knots], column[knots], scratch, height[:n], wet[:n])[0]
    return known


def sampled(sheet: Sheet, arrays: SheetArrays, ends: Ends, parts: int = 1, each: Callable = map) -> None:
    """Geodesics and sampling of all paths, in as many parts as `digests` makes."""
    size = min(4096, -(-ends.tx_latitude_deg.size // parts))

    def part(first: int) -> None:
        lines = _lines(sheet, ends, slice(first, first + size))
        sample_all(arrays, scratch_for(arrays), lines.first_knot, lines.row, lines.column, lines.points)

    list(each(part, range(0, ends.tx_latitude_deg.size, size)))


def _lines(sheet: Sheet, ends: Ends, part: slice = slice(None)) -> Lines:
    return lines_over(
        sheet,
        ends.tx_latitude_deg[part],
        ends.tx_longitude_deg[part],
        ends.rx_latitude_deg[part],
        ends.rx_longitude_deg[part],
        SPACING_M,
    )


def plain_c(folder: Path, sheet: Sheet, lines: Lines) -> Callable[[], object] | None:
    """Return the sampling loop in C over samples in rows, built here, or None without a compiler."""
    compiler = next(filter(None, map(shutil.which, ("cc", "gcc", "clang"))), None)
    if compiler is None or sheet.patches.dtype != np.int16:
        return None
    samples = np.ascontiguousarray(in_rows(sheet.patches, sheet.grid.rows, sheet.grid.columns))
    samples[samples == sheet.water] = 0
    library = folder / "gather.so"
    source = Path(__file__).with_name("gather.c")
    flags = ["-O3", "-march=native", "-ffast-math", "-shared", "-fPIC"]
    subprocess.run([compiler, *flags, str(source), "-o", str(library), "-lm"], check=True)
    function = ctypes.CDLL(str(library)).sample
    function.restype = ctypes.c_int64
    height = np.empty(int(lines.points.max()), np.float32)
    arrays = (samples, lines.first_knot, lines.row, lines.column, lines.points, height)
    pointers = [ctypes.c_void_p(array.ctypes.data) for array in arrays]
    count = [ctypes.c_int64(samples.shape[1]), ctypes.c_int64(lines.points.size)]
    return lambda: (function(pointers[0], *count, *pointers[1:]), arrays)


def pycraf_variants(hgt: Path, ground: Ground, ends: Ends, some: np.ndarray) -> list[Variant]:
    """pycraf's compiled diffraction on given profiles, and its own profiles (19.9 m, which it does not resample)."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        from pycraf.pathprof import cyprop, heightprofile, srtm
    srtm.SrtmConf.set(srtm_dir=str(hgt), download="never", interp="linear")
    ways = [tuple(getattr(ends, f"{end}_{axis}_deg")[p] for end in ("tx", "rx") for axis in ("longitude", "latitude"))
            for p in some]  # fmt: skip
    profiles = [sample_profile(ground, lat1, lon1, lat2, lon2, SPACING_M) for lon1, lat1, lon2, lat2 in ways]
    given = [(profile.distance_km, profile.ground_amsl_m) for profile in profiles]

    def diffraction() -> None:
        for way, p, (x, h) in zip(ways, some, given, strict=True):
            path = cyprop._PathProp(
                0.6, 290.0, 1013.0, *way, ends.antenna_agl_m[p], 10.0, SPACING_M, 0.01, 0.0,
                None, None, None, None, -1, -1, 0, 16, 45.0, 325.0, x, h, 10.0, 10.0,
            )  # fmt: skip
            cyprop.diffraction_loss_complete_cython(path)

    def profile() -> None:
        for way in ways:
            heightprofile._srtm_height_profile(*way, 19.9)

    share = some.size / ends.tx_latitude_deg.size
    return [
        Variant("pycraf diffraction", diffraction, share, 1),
        Variant("pycraf profile", profile, share * SPACING_M / 19.9, 0),  # scaled to as many points as ours
    ]


def fields_of(batch: Digests, frequencies: int, times: np.ndarray, with_p1546: bool) -> None:
    """Fields of every path at so many frequencies, by one or both methods."""
    frequency = np.linspace(474.0, 690.0, frequencies)[:, None, None]
    p1812.loss_of_path(
        batch.terms, frequency_mhz=frequency, time_percent=times[:, None], polarisation="horizontal", n0=batch.n0
    )
    if not with_p1546:
        return
    digest = batch.digest
    p1546.field_strength(
        frequency_mhz=frequency,
        time_percent=times[:, None],
        path_length_km=digest.path_length_km,
        land_km=digest.land_km,
        cold_sea_km=digest.sea_km,
        h1_source_height_m=digest.h1_source_height_m,
        tx_height_agl_m=100.0,
        rx_height_agl_m=10.0,
        rx_environment="rural",
        tx_clearance_angle_deg=digest.tx_clearance_angle_deg,
        rx_clearance_angle_deg=digest.rx_clearance_angle_deg,
        tx_ground_amsl_m=digest.tx_ground_amsl_m,
        rx_ground_amsl_m=digest.rx_ground_amsl_m,
    )


def table(rounds: int, wide: bool) -> list[Row]:
    """Measure and return the lines; with `wide` those of a million roofs, too."""
    with tempfile.TemporaryDirectory() as name:
        ground, rows = _rooftop_table(Path(name), rounds)
        return rows + (_million_table(ground, max(1, rounds // 3)) if wide else [])


def _rooftop_table(folder: Path, rounds: int) -> tuple[Ground, list[Row]]:
    tif, hgt = write_tiles(folder)
    cache = folder / "cache"
    ground = Ground.open([tif], cache)
    (sheet,) = ground.sheets()
    arrays = sheet_arrays(sheet)
    ends = rooftop()
    lines = _lines(sheet, ends)
    first = digests(sheet, ends, SPACING_M)
    print(
        f"{ends.tx_latitude_deg.size} paths of {lines.points.mean():.0f} points; {first.known.mean():.0%} on the sheet,"
    )
    print(f"{(first.digest.sea_km > 0).mean():.0%} of them meet the sea")
    some = np.arange(0, ends.tx_latitude_deg.size, ends.tx_latitude_deg.size // FEW)
    pool = ThreadPoolExecutor(2)

    def by_numpy() -> None:
        for p in some:
            profile = sample_profile(
                ground,
                ends.tx_latitude_deg[p],
                ends.tx_longitude_deg[p],
                ROOF.latitude_deg,
                ROOF.longitude_deg,
                SPACING_M,
            )
            path_over(profile, ends.antenna_agl_m[p], ROOF, Assumptions())

    (patches_file,) = cache.rglob("*-patches.npy")

    def fresh_map() -> None:
        digests(replace(sheet, patches=np.asarray(np.load(patches_file, mmap_mode="r"))), ends, SPACING_M)

    def decode_ten() -> None:
        for path in sorted(tif.glob("*.tif"))[:10]:
            with rasterio.open(path) as file:
                file.read(1)

    every_time = np.array([1.0, 10.0, 50.0])
    variants = [
        Variant("scan", lambda: digests(sheet, ends, SPACING_M), flushed=True),
        Variant("scan on two", lambda: digests(sheet, ends, SPACING_M, each=pool.map, parts=2)),
        Variant("sampling", lambda: sampled(sheet, arrays, ends)),
        Variant(
            "kernel sampling",
            lambda: sample_all(arrays, scratch_for(arrays), lines.first_knot, lines.row, lines.column, lines.points),
        ),
        Variant("numpy", by_numpy, some.size / ends.tx_latitude_deg.size, 1),
        Variant("12 frequencies", lambda: fields_of(digests(sheet, ends, SPACING_M), 12, np.array([50.0]), False)),
        Variant("1 frequency", lambda: fields_of(digests(sheet, ends, SPACING_M), 1, np.array([50.0]), False)),
        Variant("fields", lambda: fields_of(first, 6, every_time, True)),
        Variant("fresh map", fresh_map, 1.0, 0),
        Variant("ten tiles", decode_ten, 1.0, 0),
        *pycraf_variants(hgt, ground, ends, some),
    ]
    in_c = plain_c(folder, sheet, lines)
    if in_c:
        variants.append(Variant("C", in_c))
    s = timed(variants, rounds)
    s["pycraf end to end"] = s["pycraf profile"] + s["pycraf diffraction"]
    rows = [
        Row("one rooftop, one thread, against pycraf's diffraction on given profiles, warm",
            ratio(s, "pycraf diffraction", "scan"), 8),
        Row("the same, caches flushed", ratio(s, "pycraf diffraction", "scan flushed"), 3),
        Row("against pycraf's profiles and diffraction, warm", ratio(s, "pycraf end to end", "scan"), 60),
        Row("against our numpy reference", ratio(s, "numpy", "scan"), 15),
        Row("whole against its own geodesics and sampling", ratio(s, "scan", "sampling"), 1.5, False),
        Row("two threads against one", ratio(s, "scan wall", "scan on two wall"), 1.7),
        Row("12 frequencies against 1", ratio(s, "12 frequencies", "1 frequency"), 1.4, False),
        Row("both methods, 3 times, 200 × 6 emissions, against the scan", ratio(s, "fields", "scan"), 5, False),
        Row("from a fresh memory map, against decoding ten tiles", ratio(s, "fresh map", "ten tiles"), 0.05, False),
    ]  # fmt: skip
    if in_c:
        rows.insert(4, Row("sampling stage, speed of a plain C loop", ratio(s, "C", "kernel sampling"), 0.7))

    stages = ("scan", "scan flushed", "sampling", "kernel sampling")
    told = ", ".join(f"{name} {1e6 * np.median(s[name]) / ends.tx_latitude_deg.size:.1f}" for name in stages)
    print(f"microseconds a path: {told}")
    return ground, rows


def _million_table(ground: Ground, rounds: int) -> list[Row]:
    (sheet,) = ground.sheets()
    arrays, roofs, pool = sheet_arrays(sheet), million_roofs(), ThreadPoolExecutor(2)
    s = timed(
        [
            Variant("million", lambda: digests(sheet, roofs, SPACING_M, each=pool.map, parts=2), 1.0, 0),
            Variant("million one", lambda: digests(sheet, roofs, SPACING_M), 1.0, 0),
            Variant("million sampled", lambda: sampled(sheet, arrays, roofs, 2, pool.map), 1.0, 0),
        ],
        rounds,
    )
    print(f"a million paths: {np.median(s['million wall']):.1f} s")
    return [
        Row(
            "a million exact paths, two threads, against their own sampling",
            ratio(s, "million", "million sampled"),
            1.5,
            False,
        ),
        Row("a million exact paths, two threads against one", ratio(s, "million one wall", "million wall"), 1.7),
    ]
