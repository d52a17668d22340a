"""Paths over seams and from one coordinate system into another: the ground decides, not how it is cut into files."""

from pathlib import Path

import numpy as np
import pytest
import rasterio
from affine import Affine
from pyproj import Transformer

from app.path_query import path_document
from terrain.cover import Cover
from terrain.geodesy import points_along
from terrain.mosaic import Ground
from terrain.overlay import Overlay
from terrain.profile import sample_profile
from terrain.raster import declare

CUTS = Path(__file__).parents[1] / "data" / "nasa" / "srtm"
WEST, SOUTH, EAST, NORTH = 8.0, 46.9, 8.6, 47.3  # of the invented hills [deg]
SEAM = 8.3
STEP = 0.0005


def hills_m(lat, lon):
    """Waves of some kilometres: bent by at most 2.4e-4 per m, so 0.06 m between samples 45 m apart."""
    return 400 + 90 * np.sin((lon - WEST) * 95) * np.cos((lat - SOUTH) * 120) + 40 * np.sin((lat - lon) * 260)


def kept(path, heights, transform, crs, kind="bare"):
    profile = {"driver": "GTiff", "count": 1, "dtype": "float64", "crs": crs, "transform": transform}
    with rasterio.open(path, "w", height=heights.shape[0], width=heights.shape[1], **profile) as file:
        file.write(heights, 1)
    declare(path, kind=kind)
    return path


def degrees(path, west, south, east, north):
    """Samples in the middles of pixels of STEP degrees."""
    rows, columns = round((north - south) / STEP), round((east - west) / STEP)
    lat, lon = north - (np.arange(rows) + 0.5) * STEP, west + (np.arange(columns) + 0.5) * STEP
    return kept(path, hills_m(lat[:, None], lon[None, :]), Affine(STEP, 0, west, 0, -STEP, north), "EPSG:4326")


def metres(path, west):
    """The east in metres of UTM, every 30 m; over the seam by a little."""
    to_utm = Transformer.from_crs(4326, 32632, always_xy=True)
    x, y = to_utm.transform([west - 0.01, west - 0.01, EAST, EAST], [SOUTH, NORTH, SOUTH, NORTH])
    columns, rows = int((max(x) - min(x)) / 30), int((max(y) - min(y)) / 30)
    transform = Affine(30, 0, min(x), 0, -30, max(y))
    across, down = np.meshgrid(np.arange(columns) + 0.5, np.arange(rows) + 0.5)
    lon, lat = to_utm.transform(min(x) + 30 * across, max(y) - 30 * down, direction="INVERSE")
    return kept(path, hills_m(lat, lon), transform, "EPSG:32632")


@pytest.fixture(scope="module")
def grounds(tmp_path_factory):
    """The same hills as one raster, as four tiles, and as degrees in the west and metres in the east."""
    folder = tmp_path_factory.mktemp("hills")
    one = [degrees(folder / "one.tif", WEST, SOUTH, EAST, NORTH)]
    middle = 47.1
    tiles = [
        degrees(folder / f"tile{number}.tif", *box)
        for number, box in enumerate(
            [
                (WEST, SOUTH, SEAM, middle),
                (SEAM, SOUTH, EAST, middle),
                (WEST, middle, SEAM, NORTH),
                (SEAM, middle, EAST, NORTH),
            ]
        )
    ]
    mixed = [degrees(folder / "west.tif", WEST, SOUTH, SEAM, NORTH), metres(folder / "east.tif", SEAM)]
    return {
        name: Ground.open(paths, folder / "cache") for name, paths in (("one", one), ("tiles", tiles), ("mixed", mixed))
    }


WAYS = [
    ((47.05, 8.05), (47.15, 8.55)),
    ((47.22, 8.12), (46.98, 8.50)),
    ((47.11, 8.45), (47.09, 8.15)),
    ((46.95, 8.29), (47.25, 8.31)),
    ((47.09, 8.299), (47.11, 8.304)),
]


def fields_dbuv_m(ground, start, end, heights=(60.0, 10.0)):
    document = path_document(ground, *start, *end, 600.0, *heights)
    return np.array([document["p1546"]["field_dbuv_m"], document["p1812"]["field_dbuv_m"]])


@pytest.mark.parametrize(("start", "end"), WAYS)
def test_the_field_over_seams_is_that_over_one_raster(grounds, start, end):
    """The same samples; but the step follows the spacing in the middle of the tile under an end: other points."""
    whole, tiles = (fields_dbuv_m(grounds[name], start, end) for name in ("one", "tiles"))
    assert tiles == pytest.approx(whole, abs=0.1)


@pytest.mark.parametrize(("start", "end"), WAYS)
def test_the_field_over_a_change_of_coordinate_system_is_that_over_one_raster(grounds, start, end):
    """Other samples of the same hills: heights differ by up to 0.06 m, and the knife edges with them."""
    whole, mixed = (fields_dbuv_m(grounds[name], start, end) for name in ("one", "mixed"))
    assert mixed == pytest.approx(whole, abs=0.1)


@pytest.mark.parametrize("name", ["one", "tiles", "mixed"])
@pytest.mark.parametrize(("start", "end"), WAYS)
def test_a_path_in_two_halves_meets_the_ground_of_the_whole(grounds, name, start, end):
    ground = grounds[name]
    whole = sample_profile(ground, *start, *end, spacing_m=40.0)
    middle = whole.distance_km.size // 2
    at = float(whole.latitude_deg[middle]), float(whole.longitude_deg[middle])
    there_km, on_km = whole.distance_km[: middle + 1], whole.distance_km[middle:] - whole.distance_km[middle]
    first, second = (points_along(*one, km) for one, km in (((*start, *at), there_km), ((*at, *end), on_km)))
    halves = np.append(ground.elevation_m(*first), ground.elevation_m(*second)[1:])
    assert halves == pytest.approx(whole.ground_amsl_m, abs=0.02)


@pytest.mark.parametrize("name", ["tiles", "mixed"])
@pytest.mark.parametrize(("start", "end"), WAYS)
def test_basic_loss_of_p1812_is_the_same_from_either_end(grounds, name, start, end):
    """Rec. ITU-R P.1812-7 treats both ends alike; P.1546 does not."""
    there, back = (
        path_document(grounds[name], *way, 600.0, *heights)["p1812"]["basic_loss_db"][0]
        for way, heights in (((*start, *end), (60.0, 12.0)), ((*end, *start), (12.0, 60.0)))
    )
    assert there == pytest.approx(back, abs=0.01)


@pytest.fixture(scope="module", params=["without cover", "with cover"])
def pieces(request, tmp_path_factory):
    """The pieces of real tiles on both sides of a seam, and a map of trees and houses over them."""
    folder = tmp_path_factory.mktemp("pieces")
    overlay = Overlay()
    if request.param == "with cover":
        codes = np.random.default_rng(5).choice(np.array([10, 30, 50], dtype="uint8"), (120, 120))
        profile = {"driver": "GTiff", "count": 1, "dtype": "uint8", "crs": "EPSG:4326", "height": 120, "width": 120}
        path = folder / "worldcover.tif"
        with rasterio.open(path, "w", transform=Affine(0.0006, 0, 11.49, 0, -0.0006, 50.04), **profile) as file:
            file.write(codes, 1)
        overlay = Overlay(Cover.open([path], folder))
    return Ground.open([CUTS / "hills_north.tif", CUTS / "hills_south.tif"], folder / "cache", overlay)


def test_random_paths_over_a_seam_of_real_tiles_have_fields_without_gaps_and_steps(pieces):
    """Both ways; moving the roof by a metre moves the field by less than 3 dB, over the seam as elsewhere."""
    draw = np.random.default_rng(11)
    for _ in range(40):
        start = draw.uniform(49.969, 49.998), draw.uniform(11.502, 11.531)
        end = draw.uniform(50.002, 50.030), draw.uniform(11.502, 11.531)
        field = fields_dbuv_m(pieces, start, end)
        assert np.isfinite(field).all()
        assert np.isfinite(fields_dbuv_m(pieces, end, start)).all()
        moved = fields_dbuv_m(pieces, start, (end[0] + 1e-5, end[1]))
        assert np.abs(moved - field).max() < 3
