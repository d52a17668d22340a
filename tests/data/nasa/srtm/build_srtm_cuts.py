"""Cuts of real elevation tiles and points sampled from the whole tiles, independently of our code.

    python build_srtm_cuts.py FOLDER

FOLDER holds the tiles by the names below (NASA SRTM, public domain, 3 arc-seconds). Heights at the
points come from scipy.ndimage.map_coordinates over the whole tiles' sample centres.
"""

import csv
import hashlib
import sys
from datetime import date
from pathlib import Path

import numpy as np
import rasterio
from rasterio.windows import Window
from scipy.ndimage import map_coordinates

HERE = Path(__file__).parent
SIDE = 40  # samples
PER_DEGREE = 1200
# name of the cut: tile, its upper left sample's row and column in the tile, what it is for
CUTS = {
    "hills_north": ("N50E011.hgt.zip", 1161, 600, "north of a seam at 50 N; shares its last row"),
    "hills_south": ("N49E011.hgt.zip", 0, 600, "south of the same seam; shares its first row"),
    "island_west": ("N38W029.SRTMGL3.hgt.zip", 390, 1161, "west of a seam at 28 W, an island's ridge and sea"),
    "island_east": ("N38W028.SRTMGL3.hgt.zip", 390, 0, "east of the same seam"),
    "summit_void": ("N46E008.tif", 0, 0, "the highest sample of its tile beside a void"),  # place is looked up
    "large_void": ("N46E008.tif", 0, 0, "a void of more than ten samples across"),  # place is looked up
    "small_voids": ("N42E001.hgt.zip", 0, 0, "voids of a few samples"),  # place is looked up
}
SEAMS = {"hills": ("hills_north", "hills_south", 0), "island": ("island_west", "island_east", 1)}


def main(folder: Path) -> None:
    random = np.random.default_rng(20261201)
    tiles = {name: read(folder / tile) for name, (tile, *_) in CUTS.items()}
    places = {name: (row, column) for name, (_, row, column, _) in CUTS.items()}
    places["summit_void"] = around_the_summit(tiles["summit_void"][0])
    places["large_void"] = around_a_large_void(tiles["large_void"][0])
    places["small_voids"] = around_small_voids(tiles["small_voids"][0])
    points = []
    for name, (tile, *_, purpose) in CUTS.items():
        heights, west, north = tiles[name]
        row, column = places[name]
        write_cut(folder / tile, name, row, column, purpose)
        for r, c in row_and_column(random, heights, row, column):
            points.append((name, "inside", *where(west, north, r, c), interpolated(heights, r, c)))
        if name == "summit_void":
            r, c = np.unravel_index(np.nanargmax(heights), heights.shape)
            points.append((name, "beside a void", *where(west, north, r, c), heights[r, c]))
        if name == "large_void":
            r, c = row + SIDE // 2, column + SIDE // 2
            points.append((name, "in a void", *where(west, north, r + 0.5, c + 0.5), np.nan))
    for seam, (first, second, axis) in SEAMS.items():
        heights = np.concatenate([tiles[first][0], np.delete(tiles[second][0], 0, axis)], axis)
        _, west, north = tiles[first]
        for _ in range(12):
            across, along = PER_DEGREE + random.uniform(-1.5, 1.5), places[second][1 - axis] + random.uniform(1, 38)
            r, c = (across, along) if axis == 0 else (along, across)
            points.append((seam, "at a seam", *where(west, north, r, c), interpolated(heights, r, c)))
    write_points(points)


def read(path: Path) -> tuple[np.ndarray, float, float]:
    """Heights of a tile (NaN where void) and the place of its first sample's centre."""
    with rasterio.open(path) as file:
        heights = file.read(1, masked=True).astype(float).filled(np.nan)
        west = file.transform.c + file.transform.a / 2
        north = file.transform.f + file.transform.e / 2
    return heights, round(west), round(north)


def where(west: float, north: float, row: float, column: float) -> tuple[float, float]:
    return north - row / PER_DEGREE, west + column / PER_DEGREE


def interpolated(heights: np.ndarray, row: float, column: float) -> float:
    return float(map_coordinates(heights, [[row], [column]], order=1)[0])


def row_and_column(
    random: np.random.Generator, heights: np.ndarray, row: int, column: int
) -> list[tuple[float, float]]:
    """Six positions in a cut, off its voids and their rims."""
    found: list[tuple[float, float]] = []
    while len(found) < 6:
        r, c = row + random.uniform(1, SIDE - 2), column + random.uniform(1, SIDE - 2)
        if np.isfinite(heights[int(r) - 1 : int(r) + 3, int(c) - 1 : int(c) + 3]).all():
            found.append((r, c))
    return found


def around_the_summit(heights: np.ndarray) -> tuple[int, int]:
    row, column = np.unravel_index(np.nanargmax(heights), heights.shape)
    return int(row) - SIDE // 2, int(column) - SIDE // 2


def around_small_voids(heights: np.ndarray) -> tuple[int, int]:
    """The first cut on a coarse search whose voids are few and stand in two or more places."""
    missing = np.isnan(heights)
    for row in range(20, PER_DEGREE - SIDE, 20):
        for column in range(20, PER_DEGREE - SIDE, 20):
            here = missing[row : row + SIDE, column : column + SIDE]
            rim_free = not (here[:12].any() or here[-12:].any() or here[:, :12].any() or here[:, -12:].any())
            if 3 <= here.sum() <= 40 and rim_free:
                return row, column
    raise SystemExit("no cut with small voids in this tile")


def around_a_large_void(heights: np.ndarray) -> tuple[int, int]:
    """The first cut on a coarse search with a void of 13 × 13 samples in its middle and ground round it."""
    missing = np.isnan(heights)
    for row in range(0, PER_DEGREE - SIDE, 3):
        for column in range(0, PER_DEGREE - SIDE, 3):
            here = missing[row : row + SIDE, column : column + SIDE]
            if here[14:27, 14:27].all() and here.mean() < 0.5:
                return row, column
    raise SystemExit("no cut with a large void in this tile")


def write_cut(tile: Path, name: str, row: int, column: int, purpose: str) -> None:
    window = Window(column, row, SIDE, SIDE)
    with rasterio.open(tile) as file:
        profile = {
            "driver": "GTiff", "dtype": "int16", "count": 1, "height": SIDE, "width": SIDE,
            "crs": file.crs, "transform": file.window_transform(window), "nodata": file.nodata,
            "compress": "deflate", "predictor": 2,
        }  # fmt: skip
        samples = file.read(1, window=window)
    path = HERE / f"{name}.tif"
    with rasterio.open(path, "w", **profile) as cut:
        cut.write(samples, 1)
    write_source(path, f"Cut of 40 × 40 samples of {tile.name.split('.')[0]}: {purpose}", tile.name)


def write_points(points: list[tuple[str, str, float, float, float]]) -> None:
    path = HERE / "points.csv"
    with path.open("w", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(["place", "kind", "latitude_deg", "longitude_deg", "elevation_m"])
        for place, kind, lat, lon, height in points:
            writer.writerow([place, kind, f"{lat:.9f}", f"{lon:.9f}", "" if np.isnan(height) else f"{height:.4f}"])
    write_source(path, "Heights at positions in the cuts, from the whole tiles", "the tiles named beside the cuts")


def write_source(path: Path, title: str, document: str) -> None:
    path.with_suffix(".source.toml").write_text(
        f'title = "{title}"\n'
        'publisher = "NASA / NGA / USGS"\n'
        f'document = "Shuttle Radar Topography Mission, 3 arc-seconds: {document}"\n'
        f"retrieved = {date.today()}\n"
        'licence = "public domain (United States Government)"\n'
        f'sha256 = "{hashlib.sha256(path.read_bytes()).hexdigest()}"\n'
        'changed = "cut and sampled by build_srtm_cuts.py"\n'
    )


if __name__ == "__main__":
    if len(sys.argv) != 2:
        raise SystemExit(__doc__)
    main(Path(sys.argv[1]))
