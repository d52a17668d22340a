"""Paths of one rooftop with land cover and zones on: the compiled form against our numpy and its own sampling.

The relief of `bench_paths.py` under an invented map of 30 m whose sea, lakes, woods and towns lie in patches of 240 m.
Every path sets the map up on the ground: its rays run over the surface, its horizons and fits over the bare ground.

Medians of 7 rounds on 2 virtual Xeon processors, 2026-12-01, little else running; 200 paths, 91 % meet the sea, and on
90 % the cover decides. Microseconds a path: whole 135, geodesics and sampling 90; over open ground in the same rounds
58 (of 5 earlier rounds 89, 64 and 42).

    against our numpy                                      163 (goal 15)
    whole against its geodesics and sampling               1.48 (goal 1.5)

The map itself, 156 MB, is laid out once; of 10 m it would be 144 MB for a square degree, never whole in memory.
"""

from __future__ import annotations

import tempfile
from pathlib import Path

import numpy as np
from bench_paths import FEW, ROOF, SPACING_M, rooftop
from protocol import Row, Variant, ratio, timed
from relief import write_cover, write_tiles

from app.assumptions import Assumptions
from app.paths_to_roof import path_over
from propagation.fast_digest import Ends, digests
from terrain.compiled import compiled
from terrain.cover import Cover
from terrain.cover_kernels import CoverArrays, cover_arrays, sample_cover
from terrain.kernels import Scratch, SheetArrays, sample_heights, scratch_for, sheet_arrays
from terrain.lines import lines_over
from terrain.mosaic import Ground
from terrain.overlay import Overlay
from terrain.profile import sample_profile
from terrain.sheet import Sheet


@compiled
def sample_all(
    sheet: SheetArrays,
    cover: CoverArrays,
    scratch: Scratch,
    first_knot: np.ndarray,
    row: np.ndarray,
    column: np.ndarray,
    cover_knots: np.ndarray,
    points: np.ndarray,
) -> None:
    """Heights and cover of all paths, without what follows."""
    most = points.max()
    height, wet, category = np.empty(most, np.float32), np.empty(most, np.bool_), np.empty(most, np.uint8)
    for p in range(points.size):
        first, stop, n = first_knot[p], first_knot[p + 1], points[p]
        sample_heights(sheet, row[first:stop], column[first:stop], scratch, height[:n], wet[:n])
        sample_cover(cover, cover_knots[:, :, first:stop], category[:n])


def sampled(sheet: Sheet, ends: Ends) -> None:
    """Geodesics, heights and cover of all paths."""
    arrays = sheet_arrays(sheet)
    lines = lines_over(
        sheet, ends.tx_latitude_deg, ends.tx_longitude_deg, ends.rx_latitude_deg, ends.rx_longitude_deg, SPACING_M
    )
    knots, _ = sheet.cover.knots(lines.knot_latitude_deg, lines.knot_longitude_deg, lines.first_knot)
    sample_all(
        arrays,
        cover_arrays(sheet.cover),
        scratch_for(arrays),
        lines.first_knot,
        lines.row,
        lines.column,
        knots,
        lines.points,
    )


def table(rounds: int) -> list[Row]:
    """Measure and return the lines."""
    with tempfile.TemporaryDirectory() as name:
        tif, _ = write_tiles(Path(name))
        return rows_over(tif, write_cover(Path(name)), Path(name), rounds)


def rows_over(tif: Path, cover_map: Path, folder: Path, rounds: int) -> list[Row]:
    """Measure over tiles and a map that are there."""
    ground = Ground.open([tif], folder / "covered", overlay=Overlay(Cover.open([cover_map], folder / "covered")))
    (sheet,) = ground.sheets()
    (open_sheet,) = Ground.open([tif], folder / "cache").sheets()
    ends = rooftop()
    first = digests(sheet, ends, SPACING_M)
    deeper = first.digest.obstacle_into_line_m > digests(open_sheet, ends, SPACING_M).digest.obstacle_into_line_m + 1
    print(f"under cover: {first.known.mean():.0%} on the sheet, {(first.digest.sea_km > 0).mean():.0%} meet the sea,")
    print(f"{deeper.mean():.0%} have something standing on what decides")
    some = np.arange(0, ends.tx_latitude_deg.size, ends.tx_latitude_deg.size // FEW)

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

    s = timed(
        [
            Variant("covered", lambda: digests(sheet, ends, SPACING_M)),
            Variant("open", lambda: digests(open_sheet, ends, SPACING_M)),
            Variant("covered sampling", lambda: sampled(sheet, ends)),
            Variant("covered numpy", by_numpy, some.size / ends.tx_latitude_deg.size, 1),
        ],
        rounds,
    )
    told = ", ".join(
        f"{name} {1e6 * np.median(s[name]) / ends.tx_latitude_deg.size:.1f}"
        for name in ("covered", "open", "covered sampling")
    )
    print(f"microseconds a path: {told}")
    return [
        Row("under land cover, against our numpy reference", ratio(s, "covered numpy", "covered"), 15),
        Row("under land cover, whole against its own geodesics and sampling",
            ratio(s, "covered", "covered sampling"), 1.5, False),
    ]  # fmt: skip
