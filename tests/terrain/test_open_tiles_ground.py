"""Rasters as the open tiles have them, with known heights: every place to 0.02 m.

A plane in latitude and longitude is its own bilinear interpolation, so any height off it is an error of place.
Its slope is 30 m per 0.01 degree: half a pixel beside would be 0.4 m and more at 1 arc-second.
"""

import numpy as np
import pytest
import rasterio
from affine import Affine

from terrain.mosaic import Ground

TOLERANCE_M = 0.02
# Longitude spacing of GLO-30 as a multiple of that of latitude, by zones of latitude (Copernicus DEM product
# handbook, section on grid spacing; from memory): 1 below 50, 1.5 to 60, 2 to 70, 3 to 80, 5 to 85, 10 beyond.
PER_DEGREE = 240  # samples of latitude, in place of 3600


def widening(south):
    for limit, factor in ((50, 1), (60, 1.5), (70, 2), (80, 3), (85, 5)):
        if (south >= 0 and south < limit) or (south < 0 and -south <= limit):
            return factor
    return 10


def plane(lat, lon, lat0, lon0):
    away = (np.asarray(lon) - lon0 + 180) % 360 - 180
    return 800 + 3000 * (np.asarray(lat) - lat0) - 1700 * away


def name(south, west):
    return f"{'N' if south >= 0 else 'S'}{abs(south):02d}{'E' if west >= 0 else 'W'}{abs(west):03d}"


@pytest.fixture
def glo_tile(tmp_path):
    """A tile whose samples are the middles of pixels, the first on the tile's north-west corner."""

    def write(south, west, lat0, lon0, per_degree=PER_DEGREE):
        rows, columns = per_degree, round(per_degree / widening(south))
        down, across = 1 / rows, 1 / columns
        lat = south + 1 - down * np.arange(rows)
        lon = west + across * np.arange(columns)
        heights = plane(lat[:, None], lon[None, :], lat0, lon0).astype("float32")
        path = tmp_path / "tiles" / f"Copernicus_DSM_COG_10_{name(south, west)}_DEM.tif"
        path.parent.mkdir(exist_ok=True)
        transform = Affine(across, 0, west - across / 2, 0, -down, south + 1 + down / 2)
        with rasterio.open(
            path, "w", driver="GTiff", width=columns, height=rows, count=1, dtype="float32", crs="EPSG:4326",
            transform=transform, tiled=True, blockxsize=64, blockysize=64, compress="deflate",
        ) as file:  # fmt: skip
            file.write(heights, 1)
        return path

    return write


@pytest.fixture
def hgt(tmp_path):
    """A tile of points on its edges, rounded to whole metres as the files are."""

    def write(south, west, lat0, lon0, side=121):
        lat, lon = np.linspace(south + 1, south, side), np.linspace(west, west + 1, side)
        path = tmp_path / "tiles" / f"{name(south, west)}.hgt"
        path.parent.mkdir(exist_ok=True)
        path.write_bytes(np.rint(plane(lat[:, None], lon[None, :], lat0, lon0)).astype(">i2").tobytes())
        return path

    return write


def worst(ground, lat, lon, lat0, lon0):
    found = ground.elevation_m(lat, (np.asarray(lon) + 180) % 360 - 180)
    assert np.isfinite(found).all()
    return np.abs(found - plane(lat, lon, lat0, lon0)).max()


CORNERS = [
    pytest.param(48, 11, id="below-50"),
    pytest.param(49, 11, id="over-50-north"),
    pytest.param(59, 10, id="over-60-north"),
    pytest.param(69, 20, id="over-70-north"),
    pytest.param(79, 15, id="over-80-north"),
    pytest.param(-34, 18, id="south-east"),
    pytest.param(-51, -70, id="south-west-over-50"),
    pytest.param(5, -60, id="north-west"),
    pytest.param(-1, -1, id="zero-crossing"),
    pytest.param(65, 179, id="across-180-north"),
    pytest.param(-17, 179, id="across-180-south"),
]


@pytest.mark.parametrize(("south", "west"), CORNERS)
def test_pixel_centred_tiles_answer_everywhere_and_across_their_seams(glo_tile, tmp_path, south, west):
    lat0, lon0 = south + 1.0, west + 1.0
    for down in (0, 1):
        for across in (0, 1):
            glo_tile(south + down, (west + across + 180) % 360 - 180, lat0, lon0)
    ground = Ground.open([tmp_path / "tiles"], tmp_path / "cache")
    assert len(ground.rasters) == 4
    rng = np.random.default_rng(5)
    lat = np.concatenate([rng.uniform(south + 0.01, south + 1.99, 4000), lat0 + rng.uniform(-0.006, 0.006, 1000)])
    lon = np.concatenate([rng.uniform(west + 0.01, west + 1.97, 4000), lon0 + rng.uniform(-0.02, 0.02, 1000)])
    assert worst(ground, lat, lon, lat0, lon0) < TOLERANCE_M
    # On the seams themselves, and on the corner where four tiles meet.
    along = np.linspace(0.01, 1.97, 500)
    assert worst(ground, np.full(500, lat0), west + along, lat0, lon0) < TOLERANCE_M
    assert worst(ground, south + along, np.full(500, lon0), lat0, lon0) < TOLERANCE_M
    assert worst(ground, [lat0], [lon0], lat0, lon0) < TOLERANCE_M


@pytest.mark.parametrize(("south", "west"), [(48, 11), (-18, 179), (-34, -71), (59, -2)])
def test_points_on_tile_edges_answer_to_their_own_rounding(hgt, tmp_path, south, west):
    """The files round to 1 m, so single heights differ by up to 0.5 m; the mean shows the place to 0.02 m."""
    lat0, lon0 = south + 1.0, west + 1.0
    for down in (0, 1):
        for across in (0, 1):
            hgt(south + down, (west + across + 180) % 360 - 180, lat0, lon0)
    ground = Ground.open([tmp_path / "tiles"], tmp_path / "cache")
    rng = np.random.default_rng(6)
    lat, lon = rng.uniform(south, south + 2, 20_000), rng.uniform(west, west + 2, 20_000)
    found = ground.elevation_m(lat, (lon + 180) % 360 - 180)
    off = found - plane(lat, lon, lat0, lon0)
    assert np.abs(off).max() <= 0.5
    assert abs(off.mean()) < TOLERANCE_M


def test_a_coarser_tile_beside_a_finer_one_joins_without_a_step(glo_tile, tmp_path):
    glo_tile(48, 11, 49.0, 12.0, per_degree=240)
    glo_tile(48, 12, 49.0, 12.0, per_degree=80)
    glo_tile(49, 11, 49.0, 12.0, per_degree=80)
    glo_tile(49, 12, 49.0, 12.0, per_degree=80)
    ground = Ground.open([tmp_path / "tiles"], tmp_path / "cache")
    rng = np.random.default_rng(7)
    lat, lon = 49 + rng.uniform(-0.9, 0.9, 5000), 12 + rng.uniform(-0.9, 0.9, 5000)
    assert worst(ground, lat, lon, 49.0, 12.0) < TOLERANCE_M
    near = rng.uniform(-0.02, 0.02, 5000)
    assert worst(ground, 49 + near, 12 + near[::-1], 49.0, 12.0) < TOLERANCE_M


@pytest.mark.parametrize(
    "transform",
    [
        pytest.param(Affine(0.01, 0, 8.0, 0, -0.01, 47.0), id="north-up"),
        pytest.param(Affine(0.01, 0, 8.0, 0, 0.01, 46.0), id="south-up"),
        pytest.param(Affine(-0.01, 0, 9.0, 0, -0.01, 47.0), id="mirrored"),
        pytest.param(Affine(0.008, 0.006, 8.0, 0.006, -0.008, 46.5), id="rotated"),
    ],
)
def test_rotated_and_south_up_rasters_are_placed_by_their_transform(write_raster, tmp_path, transform):
    column, row = np.meshgrid(np.arange(100) + 0.5, np.arange(100) + 0.5)
    lon, lat = (
        transform.a * column + transform.b * row + transform.c,
        transform.d * column + transform.e * row + transform.f,
    )
    path = write_raster(plane(lat, lon, 46.5, 8.5).astype("float64"), transform=transform)
    ground = Ground.open([path], tmp_path / "cache")
    rng = np.random.default_rng(8)
    c, r = rng.uniform(1, 99, (2, 2000))
    at_lon, at_lat = transform.a * c + transform.b * r + transform.c, transform.d * c + transform.e * r + transform.f
    assert worst(ground, at_lat, at_lon, 46.5, 8.5) < TOLERANCE_M
