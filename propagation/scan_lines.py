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
from terrain.kernels import Scratch, SheetArrays, inside, sample_heights

FloatArray = NDArray[np.float64]

_BULGE_TRUE_EARTH = 500 / EARTH_RADIUS_KM
_BULGE_BETA0 = 500 / BETA0_EARTH_RADIUS_KM


@compiled
def scan_lines(
    sheet: SheetArrays,
    scratch: Scratch,
    first_knot: NDArray[np.int64],  # (p + 1,)
    row: FloatArray,  # (k,)
    column: FloatArray,
    length_km: FloatArray,  # (p,), as all that follow
    points: NDArray[np.int64],
    bulge: FloatArray,  # 500/a per km² at the median
    antenna_agl_m: FloatArray,
    aerial_agl_m: FloatArray,
    first_edge: NDArray[np.int64],  # (p + 1,)
    edge_km: FloatArray,  # (e,)
    root: NDArray[np.float32],
    back: NDArray[np.float32],
    scans: NDArray[np.void],  # result (p,)
    sources: FloatArray,  # result (2, e)
) -> None:
    """Scan paths one after the other; those over a gap of the sheet stay unknown."""
    most = points.max()
    tops = np.empty((MOST_STRETCHES, 12), np.float32)
    wet = np.empty(most, np.bool_)
    profile = np.empty(most, np.float32)
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
            length_km[p],
            antenna_agl_m[p],
            aerial_agl_m[p],
            (bulge[p], _BULGE_TRUE_EARTH, _BULGE_BETA0),
            root[:n],
            back[MOST_POINTS - n :],
            tops,
            out,
        )
        for e in range(first_edge[p], first_edge[p + 1]):
            sources[0, e], sources[1, e] = ray_source(
                sheet,
                rows,
                columns,
                height,
                edge_km[e],
                length_km[p],
                antenna_agl_m[p],
                aerial_agl_m[p],
                bulge[p],
                root[:n],
                back[MOST_POINTS - n :],
                tops,
            )
