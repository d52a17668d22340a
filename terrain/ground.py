"""Bare ground under a surface model: what the raster would say without houses and trees."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from terrain.mosaic import Ground

FloatArray = NDArray[np.float64]

# The neighbourhood is cut into 5 × 5 cells. A cell is wider than a house with its garden, so that some
# of its ground is seen, and holds at least 3 × 3 samples. Our choice.
CELLS = 5
CELL_M = 24.0
SAMPLES_PER_CELL = 3
# Samples wider than this have houses, trees and ground in one: nothing to take apart.
COARSEST_M = 35.0

# A lowest sample this far above the plane stands on a roof or under closed trees, and is left out.
_ABOVE_PLANE_M = 1.5
_ROUNDS = 5
_FEWEST_CELLS = 6
_MOST_LEFT_OUT = 0.5
# What the lowest samples depart from the plane is relief: on a crest that falls evenly to both sides they lie
# up to 3.5 times that (root mean square) below it.
_DEPARTURES = 3.5
_METRES_PER_DEGREE = 111_320.0


def bare_ground_m(ground: Ground, latitude_deg: ArrayLike, longitude_deg: ArrayLike) -> FloatArray:
    """Height of the ground itself above sea level [m] at positions; NaN where no raster has a height.

    Where a raster of bare ground answers, or one coarser than 35 m, its own height. Else the height of a plane
    through the lowest samples of 5 × 5 cells about the position: a plane, because on a slope the
    lowest neighbours stand lower than the ground here (20 % over 100 m: by 14 m). Cells whose lowest
    sample stands more than 1.5 m above the plane are left out, up to half of them, and the plane is fitted again.
    What the others depart from it raises the result: a crest is no house. Never above the surface itself.
    Positions broadcast.

    Raises RasterError and CacheError as `Ground.elevation_m`.
    """
    lat, lon = np.broadcast_arrays(np.asarray(latitude_deg, dtype=float), np.asarray(longitude_deg, dtype=float))
    shape, lat, lon = lat.shape, lat.ravel(), lon.ravel()
    surface_m = ground.elevation_m(lat, lon)
    bare_m = surface_m.copy()
    answering = ground.answering(lat, lon)
    for number in np.unique(answering[answering >= 0]):
        kind, spacing_m = ground.kinds[number], ground.spacings_m[number]
        if kind == "bare" or spacing_m > COARSEST_M:
            continue
        here = np.nonzero(answering == number)[0]
        # Points in groups, so that their neighbourhoods (hundreds of samples each) stay small.
        for few in np.array_split(here, -(-here.size // 64)):
            plane_m = _plane_m(ground, lat[few], lon[few], spacing_m)
            bare_m[few] = np.fmin(surface_m[few], plane_m)
    return bare_m.reshape(shape)


def _plane_m(ground: Ground, lat: FloatArray, lon: FloatArray, spacing_m: float) -> FloatArray:
    """Height at positions (n,) of planes through local minima; NaN where too few cells have ground."""
    cell_m = max(CELL_M, SAMPLES_PER_CELL * spacing_m)
    east_m, north_m, height_m = _cells(ground, lat, lon, cell_m, spacing_m)
    lowest = np.where(np.isnan(height_m), np.inf, height_m).argmin(axis=2)[..., None]
    z = np.take_along_axis(height_m, lowest, axis=2)[..., 0]  # (n, cells)
    x = np.take_along_axis(np.broadcast_to(east_m, height_m.shape), lowest, axis=2)[..., 0]
    y = np.take_along_axis(np.broadcast_to(north_m, height_m.shape), lowest, axis=2)[..., 0]
    used = np.isfinite(z)
    z = np.where(used, z, 0.0)
    terms = np.stack([np.ones_like(x), x, y], axis=-1)  # plane = a + b·x + c·y, the position at 0, 0
    # Near cells count more: hilltops and hollows are no planes for long.
    weight = 1 / (1 + (x**2 + y**2) / (CELLS / 4 * cell_m) ** 2)
    plane = _fit(terms, z, used * weight)
    for _ in range(_ROUNDS):
        above = z - np.einsum("nct,nt->nc", terms, plane) > _ABOVE_PLANE_M
        fewer = used & ~above
        enough = np.maximum(_FEWEST_CELLS, z.shape[1] * (1 - _MOST_LEFT_OUT))
        refit = (fewer.sum(axis=1) >= enough) & (fewer != used).any(axis=1)
        if not refit.any():
            break
        used[refit] = fewer[refit]
        plane[refit] = _fit(terms[refit], z[refit], (used * weight)[refit])
    count = used.sum(axis=1)
    departure = np.where(used, z - np.einsum("nct,nt->nc", terms, plane), 0.0)
    relief_m = _DEPARTURES * np.sqrt((departure**2).sum(axis=1) / np.maximum(count, 1))
    return np.where(count >= _FEWEST_CELLS, plane[:, 0] + relief_m, np.nan)


def _fit(terms: FloatArray, z: FloatArray, weight: FloatArray) -> FloatArray:
    """Weighted least squares over the cells: coefficients (n, 3)."""
    weighted = terms * weight[..., None]
    normal = np.einsum("nct,ncu->ntu", weighted, terms)
    right = np.einsum("nct,nc->nt", weighted, z)
    return np.asarray(np.einsum("ntu,nu->nt", np.linalg.pinv(normal), right))


def _cells(
    ground: Ground, lat: FloatArray, lon: FloatArray, cell_m: float, spacing_m: float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Offsets east and north [m] (cells, samples) and heights (n, cells, samples) about positions (n,)."""
    across = max(SAMPLES_PER_CELL, round(cell_m / max(spacing_m, 2.0)))
    offset = (np.arange(CELLS * across) + 0.5) * cell_m / across - CELLS * cell_m / 2
    east_m, north_m = (_by_cell(grid, across) for grid in np.meshgrid(offset, offset))
    place_lat = lat[:, None, None] + north_m / _METRES_PER_DEGREE
    place_lon = lon[:, None, None] + east_m / (_METRES_PER_DEGREE * np.cos(np.deg2rad(lat)))[:, None, None]
    return east_m, north_m, ground.elevation_m(place_lat, (place_lon + 180) % 360 - 180)


def _by_cell(grid: FloatArray, across: int) -> FloatArray:
    """(5·k, 5·k) rearranged to (25, k·k)."""
    return grid.reshape(CELLS, across, CELLS, across).swapaxes(1, 2).reshape(CELLS * CELLS, across * across)
