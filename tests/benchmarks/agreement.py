"""How far both forms of a path differ over real rasters: `agreement.py FOLDER [--paths N] [--cover MAP]`.

Every raster of the folder is taken for bare ground, alone and then all together; random pairs of places on each sheet
are digested both ways and the fields of both methods compared at 1, 10 and 50 % of the time, 100, 474 and 690 MHz.
"""

from __future__ import annotations

import argparse
import shutil
import tempfile
from collections.abc import Iterator
from dataclasses import fields
from pathlib import Path

import numpy as np

from app.assumptions import Assumptions
from app.paths_to_roof import path_over
from app.roof import Roof
from propagation import p1546, p1812
from propagation.digest import PathDigest, stacked_digests
from propagation.fast_digest import Ends, digests
from propagation.p1812 import PathTerms
from terrain.cover import Cover
from terrain.errors import TerrainError
from terrain.mosaic import Ground
from terrain.overlay import Overlay
from terrain.profile import sample_profile
from terrain.raster import declare
from terrain.sheet import Sheet

FREQUENCY_MHZ = np.array([100.0, 474.0, 690.0])[:, None, None]
TIME_PERCENT = np.array([1.0, 10.0, 50.0])[:, None]
AERIAL_M = 10.0
SHORTEST_KM = 0.3


def fields_db(digest: PathDigest, terms: PathTerms, n0: np.ndarray) -> np.ndarray:
    """Fields of both methods (2, frequencies, times, paths) [dB(µV/m)]."""
    shared = {"frequency_mhz": FREQUENCY_MHZ, "time_percent": TIME_PERCENT}
    by_p1812 = p1812.loss_of_path(terms, **shared, polarisation="horizontal", n0=n0).field_dbuv_m
    by_p1546 = p1546.field_strength(
        **shared,
        path_length_km=digest.path_length_km,
        land_km=digest.land_km,
        cold_sea_km=digest.sea_km,
        h1_source_height_m=digest.h1_source_height_m,
        tx_height_agl_m=100.0,
        rx_height_agl_m=AERIAL_M,
        rx_environment="rural",
        tx_clearance_angle_deg=digest.tx_clearance_angle_deg,
        rx_clearance_angle_deg=digest.rx_clearance_angle_deg,
        tx_ground_amsl_m=digest.tx_ground_amsl_m,
        rx_ground_amsl_m=digest.rx_ground_amsl_m,
    ).field_dbuv_m
    return np.stack(np.broadcast_arrays(by_p1812, by_p1546))


def random_ends(sheet: Sheet, paths: int, seed: int) -> Ends:
    """Paths between random places of a sheet."""
    random = np.random.default_rng(seed)
    row, column = (random.uniform(1, size - 2, (2, paths)) for size in (sheet.grid.rows, sheet.grid.columns))
    lat, lon = sheet.grid.position(row, column)
    return Ends(
        lat[0],
        lon[0],
        random.uniform(10, 300, paths),
        lat[1],
        lon[1],
        np.full(paths, AERIAL_M),
        np.zeros(paths + 1, np.int64),
        np.zeros(0),
    )


def compare(ground: Ground, sheet: Sheet, paths: int, seed: int) -> tuple[int, float, str]:
    """Paths compared, largest difference [dB], and where."""
    ends = random_ends(sheet, paths, seed)
    fast = digests(sheet, ends)
    some = np.flatnonzero(fast.known & (fast.digest.path_length_km > SHORTEST_KM))
    plain, kept = [], []
    for p in some:
        ways = (ends.tx_latitude_deg[p], ends.tx_longitude_deg[p], ends.rx_latitude_deg[p], ends.rx_longitude_deg[p])
        roof = Roof(ways[2], ways[3], AERIAL_M)
        path = path_over(sample_profile(ground, *ways), ends.antenna_agl_m[p], roof, Assumptions())
        if not isinstance(path, str) and path.terms is not None:
            plain.append(path)
            kept.append(p)
    if not kept:
        return 0, 0.0, "nowhere"

    def only(batch: PathDigest | PathTerms) -> PathDigest | PathTerms:
        return type(batch)(**{field.name: getattr(batch, field.name)[kept] for field in fields(batch)})

    n0 = fast.n0[kept]
    expected = fields_db(
        stacked_digests([path.digest for path in plain]), p1812.stacked_paths([path.terms for path in plain]), n0
    )
    off = np.abs(fields_db(only(fast.digest), only(fast.terms), n0) - expected).max(axis=(1, 2))
    method, worst = np.unravel_index(off.argmax(), off.shape)
    p = kept[worst]
    where = (
        f"{('P.1812', 'P.1546')[method]}, {ends.tx_latitude_deg[p]:.5f},{ends.tx_longitude_deg[p]:.5f} to "
        f"{ends.rx_latitude_deg[p]:.5f},{ends.rx_longitude_deg[p]:.5f}, {fast.digest.path_length_km[p]:.1f} km"
    )
    return len(kept), float(off.max()), where


def grounds(folder: Path, work: Path, overlay: Overlay | None) -> Iterator[tuple[str, Ground]]:
    """Each raster alone, then all of them as one ground."""
    files = []
    for number, path in enumerate(sorted(folder.iterdir())):
        if path.suffix in (".tif", ".zip", ".asc", ".hgt"):
            own = work / str(number)
            own.mkdir()
            files.append(own / path.name)
            shutil.copyfile(path, files[-1])
            declare(files[-1], kind="bare")
            yield path.name, Ground.open([files[-1]], work / "cache", overlay=overlay)
    yield "all together", Ground.open(files, work / "cache", overlay=overlay)


def report(folder: Path, paths: int, maps: list[Path]) -> None:
    """Print a line for each sheet, and the largest difference of all."""
    total, largest, where = 0, 0.0, ""
    with tempfile.TemporaryDirectory() as work:
        overlay = Overlay(Cover.open(maps, Path(work) / "cache")) if maps else None
        for name, ground in grounds(folder, Path(work), overlay):
            try:
                sheets = ground.sheets()
            except TerrainError as error:
                print(f"{name}: {error}")
                continue
            for number, sheet in enumerate(sheets):
                count, off, place = compare(ground, sheet, paths, number)
                print(f"{name}: {count} paths, largest {off:.5f} dB ({place})", flush=True)
                total += count
                if off > largest:
                    largest, where = off, f"{name}, {place}"
    print(f"{total} paths, largest difference {largest:.5f} dB: {where}")


if __name__ == "__main__":
    options = argparse.ArgumentParser(description=__doc__)
    options.add_argument("folder", type=Path)
    options.add_argument("--paths", type=int, default=300, help="random paths of each sheet")
    options.add_argument("--cover", type=Path, action="append", default=[], help="a map that stands on all of them")
    chosen = options.parse_args()
    report(chosen.folder, chosen.paths, chosen.cover)
