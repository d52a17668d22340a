"""The compiled way of one path after the other: sample, find zones, scan.

Everything of one path stays in the processor's cache from the first loop to the last.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from propagation.constants import EARTH_RADIUS_KM
from propagation.p1812.path import BETA0_EARTH_RADIUS_KM
from propagation.scan import MOST_POINTS, MOST_STRETCHES, ray_source, scan_profile
from propagation.scan_zones import all_inland, mark_lakes, zone_lengths
from terrain.compiled import compiled
from terrain.cover_kernels import CoverArrays, sample_cover, sea_by_cover, set_up
from terrain.kernels import Scratch, SheetArrays, inside, sample_heights

FloatArray = NDArray[np.float64]

_BULGE_TRUE_EARTH = 500 / EARTH_RADIUS_KM
_BULGE_BETA0 = 500 / BETA0_EARTH_RADIUS_KM


@compiled
def scan_lines(
    sheet: SheetArrays,
    cover: CoverArrays,
    scratch: Scratch,
    first_knot: NDArray[np.int64],  # (p + 1,)
    row: FloatArray,  # (k,)
    column: FloatArray,
    cover_knots: FloatArray,  # (maps, 2, k); (0, 2, k) without cover
    length_km: FloatArray,  # (p,), as all that follow
    points: NDArray[np.int64],
    bulge: FloatArray,  # 500/a per km² at the median
    antenna_agl_m: FloatArray,
    aerial_agl_m: FloatArray,
    flattened_km: float,  # from the roof, where the surface is the bare ground
    first_edge: NDArray[np.int64],  # (p + 1,)
    edge_km: FloatArray,  # (e,)
    root: NDArray[np.float32],
    back: NDArray[np.float32],
    scans: NDArray[np.void],  # result (p,)
    sources: FloatArray,  # result (2, e)
) -> None:
    """Scan paths one after the other; those over a gap of the sheet stay unknown."""
    most = points.max()
    tops, ground_tops = np.empty((MOST_STRETCHES, 12), np.float32), np.empty((MOST_STRETCHES, 12), np.float32)
    wet = np.empty(most, np.bool_)
    profile = np.empty(most, np.float32)
    most_covered = most if cover.first.size > 0 else 0
    category = np.empty(most_covered, np.uint8)
    standing_of_all, surface_of_all = np.empty(most_covered, np.float32), np.empty(most_covered, np.float32)
    for p in range(points.size):
        n = points[p]
        rows, columns = row[first_knot[p] : first_knot[p + 1]], column[first_knot[p] : first_knot[p + 1]]
        if n == 0 or not inside(rows, columns, sheet.rows, sheet.columns):
            continue
        height = profile[:n]
        known, any_water = sample_heights(sheet, rows, columns, scratch, height, wet[:n])
        if not known:
            continue
        out = scans[p : p + 1]
        if not any_water:
            wet[:n] = False
        surface, standing = height, standing_of_all[:0]
        if cover.first.size > 0:
            knots = cover_knots[:, :, first_knot[p] : first_knot[p + 1]]
            sample_cover(cover, knots, category[:n])
            any_water = sea_by_cover(cover, knots, category[:n], height, wet[:n])
            if set_up(cover, category[:n], height, length_km[p], flattened_km, standing_of_all[:n], surface_of_all[:n]):
                surface, standing = surface_of_all[:n], standing_of_all[:n]
        if mark_lakes(height, length_km[p], wet[:n]) or any_water:
            zone_lengths(wet[:n], height, length_km[p], out)
        else:
            all_inland(length_km[p], out)

        out[0].known = True
        scan_profile(
            sheet,
            rows,
            columns,
            height,
            surface,
            standing,
            length_km[p],
            antenna_agl_m[p],
            aerial_agl_m[p],
            (bulge[p], _BULGE_TRUE_EARTH, _BULGE_BETA0),
            root[:n],
            back[MOST_POINTS - n :],
            tops,
            ground_tops,
            out,
        )
        for e in range(first_edge[p], first_edge[p + 1]):
            sources[0, e], sources[1, e] = ray_source(
                sheet,
                rows,
                columns,
                surface,
                standing,
                edge_km[e],
                length_km[p],
                antenna_agl_m[p],
                aerial_agl_m[p],
                bulge[p],
                root[:n],
                back[MOST_POINTS - n :],
                tops,
            )
