"""Bare ground under a surface model: a plane through local minima.

Houses and trees stand on the ground here and there; between them a surface model touches it. Round a
point the lowest sample of each cell of a square is taken where it lies, and a plane is laid through
these. Taking positions into account keeps slopes unbiased, which a low quantile would not.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from terrain.mosaic import Ground

FloatArray = NDArray[np.float64]

CELLS = 4  # along each side of the square
# A cell must reach from a roof into a garden or street, and hold two samples across. Our choice.
SMALLEST_CELL_M = 25.0
_FINEST_STEP_M = 5.0  # no street is narrower
# Fewer minima than this lay no plane that deserves trust: near voids and edges the surface stands.
_LEAST_MINIMA = 6
NEAR_END_KM = 0.5
KNOT_KM = 0.25  # woods and towns are wider than this, mostly
_METRES_PER_DEGREE = 111_195.0  # on a sphere of 6371 km: an error of 0.5 % in the place of a sample


def bare_ground_m(ground: Ground, latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> FloatArray:
    """Bare ground at positions (n,), never above the surface there. [m]

    A raster of bare ground answers as it is. Under a surface model the result is the plane through the
    local minima, raised by twice what they depart from it (root mean square): minima that lie on no plane
    show relief, and a crest is no house. NaN where there is no elevation.

    References
    ----------
    Our own estimate, not measured against ground truth.
    """
    lat, lon = np.atleast_1d(np.asarray(latitude_deg, dtype=float), np.asarray(longitude_deg, dtype=float))
    bare: FloatArray = ground.elevation_m(lat, lon)
    kinds, spacing_m = ground.answering(lat, lon)
    covered = np.flatnonzero(np.isfinite(bare) & (kinds != "bare"))
    for spacing in np.unique(spacing_m[covered]):
        here = covered[spacing_m[covered] == spacing]
        bare[here] = np.fmin(bare[here], _plane_m(ground, lat[here], lon[here], float(spacing)))
    return bare


def bare_along_m(
    ground: Ground,
    distance_km: FloatArray,
    latitude_deg: FloatArray,
    longitude_deg: FloatArray,
    surface_amsl_m: FloatArray,
) -> FloatArray:
    """Bare ground along a path (n,): estimated at every point near both ends, each 250 m between. [m]

    Between those, what stands on the ground is interpolated, not the ground: ridges stay where they are.
    """
    bare = surface_amsl_m.copy()
    covered = ground.answering(latitude_deg, longitude_deg)[0] != "bare"
    if not covered.any():
        return bare
    last = distance_km[-1]
    near_end = np.flatnonzero(np.minimum(distance_km, last - distance_km) <= NEAR_END_KM)
    between = np.searchsorted(distance_km, np.arange(0.0, last, KNOT_KM))
    knots = np.unique(np.concatenate([near_end, between]))
    cover_m = surface_amsl_m[knots] - bare_ground_m(ground, latitude_deg[knots], longitude_deg[knots])
    known = np.isfinite(cover_m)
    if known.any():
        bare[covered] -= np.interp(distance_km, distance_km[knots[known]], cover_m[known])[covered]
    return bare


def _plane_m(ground: Ground, lat: FloatArray, lon: FloatArray, spacing_m: float) -> FloatArray:
    """Plane through the minima round each position (n,), raised by their departure; NaN where there is none."""
    cell_m = max(SMALLEST_CELL_M, 2 * spacing_m)
    per_cell = int(np.clip(round(cell_m / max(spacing_m, _FINEST_STEP_M)), 2, 5))
    across = CELLS * per_cell
    offset_m = (np.arange(across) + 0.5 - across / 2) * cell_m / per_cell
    north_m, east_m = (axis.reshape(-1) for axis in np.meshgrid(offset_m, offset_m, indexing="ij"))
    height = ground.elevation_m(
        lat[:, None] + north_m / _METRES_PER_DEGREE,
        lon[:, None] + east_m / (_METRES_PER_DEGREE * np.cos(np.radians(lat[:, None]))),
    )

    # samples by cell: (n, cells, samples of one cell)
    order = np.arange(across**2).reshape(CELLS, per_cell, CELLS, per_cell).transpose(0, 2, 1, 3).reshape(CELLS**2, -1)
    by_cell = np.where(np.isfinite(height), height, np.inf)[:, order]
    lowest = by_cell.argmin(axis=-1)
    minimum = np.take_along_axis(by_cell, lowest[..., None], axis=-1)[..., 0]
    y, x = north_m[order], east_m[order]
    row = np.arange(CELLS**2)
    known = np.isfinite(minimum)
    weight = known.astype(float)
    design = np.stack([np.ones_like(weight), y[row, lowest], x[row, lowest]], axis=-1)  # (n, cells, 3)
    value = np.where(known, minimum, 0.0)

    normal = np.einsum("nki,nk,nkj->nij", design, weight, design)
    right = np.einsum("nki,nk,nk->ni", design, weight, value)
    enough = known.sum(axis=-1) >= _LEAST_MINIMA
    normal[~enough] = np.eye(3)
    plane = np.linalg.solve(normal, right[..., None])[..., 0]
    departure = np.where(known, value - np.einsum("nki,ni->nk", design, plane), 0.0)
    rms = np.sqrt((departure**2).sum(axis=-1) / np.maximum(known.sum(axis=-1), 1))
    return np.where(enough, plane[:, 0] + 2 * rms, np.nan)
