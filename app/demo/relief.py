"""The invented island of the demo: two lands and a strait in open ocean, made by ourselves at 1 arc-second.

Nothing here stands anywhere on Earth. Heights come from a few drawn shapes and value noise: random numbers
on a lattice, smoothly interpolated, added up over finer and finer lattices. One seed, plain arithmetic: every
machine makes the same island, up to a rounding of 1 m.
"""

from __future__ import annotations

import tempfile
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import rasterio
from numpy.typing import NDArray

from terrain.errors import CacheError, RasterError
from terrain.raster import declare, open_raster

Array = NDArray[np.float32]

WEST_DEG, EAST_DEG = -37.8, -36.6
SOUTH_DEG, NORTH_DEG = 43.8, 44.8
ROWS, COLUMNS = 3600, 4320  # 1 arc-second
FILE_NAME = "invented-island-1.tif"  # a new number with every change of the shapes

_SEED = 20260
_KM_PER_DEGREE_NORTH, _KM_PER_DEGREE_EAST = 111.11, 79.78  # WGS 84 at 44.3° N
_BEACH = 0.22  # share of the way inland over which the land rises from the sea


@dataclass(frozen=True, slots=True)
class Ridge:
    """A range of hills: a rounded wall from one point to another. Kilometres east and north of the middle."""

    start: tuple[float, float]
    end: tuple[float, float]
    half_width_km: float
    height_m: float


@dataclass(frozen=True, slots=True)
class Land:
    """One land: an oval whose coast the noise frays, with hills on it."""

    centre: tuple[float, float]
    half_axes_km: tuple[float, float]
    plain_m: float
    ridges: tuple[Ridge, ...]


LANDS = (
    Land(
        centre=(-20, -22),
        half_axes_km=(23, 28),
        plain_m=45,
        ridges=(
            Ridge((-31, -2), (-17, -14), 3.2, 430),  # the northern range
            Ridge((-17, -14), (-8, -33), 3.6, 560),  # the backbone, down to the south-east
            Ridge((-21, -28), (-29, -38), 2.2, 260),  # a spur of its own in the south-west
            Ridge((-9, -12), (-6, -9), 1.6, 150),  # a hill over the eastern shore
        ),
    ),
    Land(
        centre=(36, 42),
        half_axes_km=(10, 11.5),
        plain_m=30,
        ridges=(Ridge((34, 38), (38, 46), 2.4, 190),),
    ),
)


def island_heights_m() -> NDArray[np.int16]:
    """Heights (ROWS, COLUMNS) in metres, north first; the sea is 0 and land at least 1."""
    heights = np.zeros((ROWS, COLUMNS), dtype=np.int16)
    rng = np.random.Generator(np.random.PCG64(_SEED))
    for land in LANDS:
        rows, columns = _box(land)
        north_km = (NORTH_DEG - (np.arange(ROWS)[rows] + 0.5) / 3600 - _MIDDLE[1]) * _KM_PER_DEGREE_NORTH
        east_km = (WEST_DEG + (np.arange(COLUMNS)[columns] + 0.5) / 3600 - _MIDDLE[0]) * _KM_PER_DEGREE_EAST
        heights[rows, columns] = _land_heights_m(land, east_km, north_km, rng)
    return heights


def ensure_demo_relief(folder: Path) -> Path:
    """Return the island as a GeoTIFF in folder, made if it is not there yet (one to two seconds).

    Raises
    ------
    CacheError
        The folder cannot be written.
    """
    path = folder / FILE_NAME
    declared = folder / f"{FILE_NAME}.gainworth.toml"
    if path.is_file() and declared.is_file() and _is_whole(path):
        return path
    try:
        folder.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryDirectory(dir=folder, prefix=".making-") as making:
            part = Path(making) / FILE_NAME
            _write(part, island_heights_m())
            declare(part, kind="bare").replace(declared)  # nothing stands on it
            part.replace(path)  # whole or not at all, also with two processes at once
    except (OSError, rasterio.errors.RasterioIOError) as error:
        raise CacheError(
            f"the demo's relief cannot be written to {folder} ({error}): "
            "set GAINWORTH_CACHE_DIR to a folder that you may write"
        ) from error
    return path


def _is_whole(path: Path) -> bool:
    """Whether a relief made earlier can still be read to its end."""
    try:
        open_raster(path)
    except RasterError:
        return False
    return True


_MIDDLE = ((WEST_DEG + EAST_DEG) / 2, (SOUTH_DEG + NORTH_DEG) / 2)


def position_deg(east_km: float, north_km: float) -> tuple[float, float]:
    """Latitude and longitude of a point of the drawing."""
    return _MIDDLE[1] + north_km / _KM_PER_DEGREE_NORTH, _MIDDLE[0] + east_km / _KM_PER_DEGREE_EAST


def _box(land: Land) -> tuple[slice, slice]:
    """Rows and columns round a land, with room for the frayed coast."""
    (east, north), (half_east, half_north) = land.centre, land.half_axes_km
    top, left = position_deg(east - 1.35 * half_east, north + 1.35 * half_north)
    bottom, right = position_deg(east + 1.35 * half_east, north - 1.35 * half_north)
    return (
        slice(max(0, int((NORTH_DEG - top) * 3600)), min(ROWS, int((NORTH_DEG - bottom) * 3600))),
        slice(max(0, int((left - WEST_DEG) * 3600)), min(COLUMNS, int((right - WEST_DEG) * 3600))),
    )


def _land_heights_m(
    land: Land, east_km: NDArray[np.float64], north_km: NDArray[np.float64], rng: np.random.Generator
) -> NDArray[np.int16]:
    east, north = east_km.astype(np.float32), north_km.astype(np.float32)
    (east0, north0), (half_east, half_north) = land.centre, land.half_axes_km
    inland = 1 - ((east - east0) / half_east)[None, :] ** 2 - ((north - north0) / half_north)[:, None] ** 2
    for cell_km, share in ((14.0, 0.40), (6.0, 0.30), (2.5, 0.13), (0.9, 0.05), (0.3, 0.015)):
        inland += share * _noise(east, north, cell_km, rng)
    rise = np.clip(inland / _BEACH, 0, 1)
    rise *= rise * (3 - 2 * rise)

    hills = np.full(inland.shape, land.plain_m, dtype=np.float32)
    for ridge in land.ridges:
        np.maximum(hills, land.plain_m + _ridge_m(ridge, east, north), out=hills)
    # Valleys cut more where the land is high, as water does.
    carving = np.zeros_like(hills)
    for cell_km, share in ((5.0, 0.34), (2.2, 0.20), (1.0, 0.11), (0.45, 0.05), (0.2, 0.025)):
        carving += share * (1 - 2 * np.abs(_noise(east, north, cell_km, rng)))
    hills *= 0.85 + carving
    height = np.where(inland > 0, np.maximum(1, np.rint(rise * hills)), 0)
    return height.astype(np.int16)


def _ridge_m(ridge: Ridge, east: Array, north: Array) -> Array:
    """Height of a rounded wall over the plain, (rows, columns)."""
    (x0, y0), (x1, y1) = ridge.start, ridge.end
    along_x, along_y = x1 - x0, y1 - y0
    length2 = along_x**2 + along_y**2
    share = ((east - x0) * along_x)[None, :] + ((north - y0) * along_y)[:, None]
    share = np.clip(share / length2, 0, 1)
    away2 = (east[None, :] - x0 - share * along_x) ** 2 + (north[:, None] - y0 - share * along_y) ** 2
    wall = ridge.height_m / (1 + away2 / ridge.half_width_km**2) ** 2
    return wall.astype(np.float32, copy=False)


def _noise(east: Array, north: Array, cell_km: float, rng: np.random.Generator) -> Array:
    """Value noise about within ±1 on a lattice of cell_km, (rows, columns)."""
    x, y = (east - east[0]) / cell_km, (north[0] - north) / cell_km
    lattice: Array = rng.uniform(-_REACH, _REACH, (int(y[-1]) + 3, int(x[-1]) + 3)).astype(np.float32)
    across = _smoothed(lattice.T, x)  # (columns, lattice rows)
    return _smoothed(across.T, y)


_REACH = 1.7  # the spline averages neighbours: wider random numbers keep the result lively


def _smoothed(values: Array, place: Array) -> Array:
    """Rows of values (k, m) at fractional rows place (n,), (n, m): no kinks, no plateaus.

    Weights of the uniform quadratic B-spline.
    """
    index = place.astype(np.int64)
    t = (place - index).astype(np.float32)[:, None]
    half = np.float32(0.5)
    smoothed: Array = half * (1 - t) ** 2 * values[index]
    smoothed += (half + t * (1 - t)) * values[index + 1]
    smoothed += half * t * t * values[index + 2]
    return smoothed


def _write(path: Path, heights: NDArray[np.int16]) -> None:
    with rasterio.open(
        path,
        "w",
        driver="GTiff",
        dtype="int16",
        count=1,
        height=ROWS,
        width=COLUMNS,
        crs="EPSG:4326",
        transform=rasterio.Affine(1 / 3600, 0, WEST_DEG, 0, -1 / 3600, NORTH_DEG),
        compress="deflate",
        predictor=2,
        zlevel=1,
        tiled=True,
    ) as raster:
        raster.write(heights, 1)
        raster.update_tags(TIFFTAG_IMAGEDESCRIPTION="invented island, no real ground")
