import numpy as np
import pytest
from affine import Affine
from pyproj import Transformer

from terrain.ground import bare_ground_m
from terrain.mosaic import Ground
from terrain.raster import declare

TO_DEGREES = Transformer.from_crs("EPSG:32632", "EPSG:4326", always_xy=True)
SIDE = 400


@pytest.fixture
def ground_of(tmp_path):
    return lambda *paths: Ground.open(list(paths), tmp_path / "cache")


@pytest.fixture
def hillside(write_raster):
    """Writes a slope with houses of 6 to 14 m on a third of it; gives the raster, the ground and the surface."""

    def build(slope, roughness_m=0.0, pixel_m=1.0, houses=240):
        random = np.random.default_rng(1)
        bare = 300 + slope * pixel_m * np.arange(SIDE) + random.normal(0, roughness_m, (SIDE, SIDE))
        surface = bare.copy()
        for _ in range(houses):
            row, column = random.integers(0, SIDE - 20, 2)
            height, width = random.integers(8, 20, 2)
            house = np.s_[row : row + height, column : column + width]
            surface[house] = bare[house].max() + random.uniform(6, 14)
        transform = Affine(pixel_m, 0, 600_000, 0, -pixel_m, 5_300_000)
        return write_raster(surface.astype("float32"), crs="EPSG:32632", transform=transform), bare, surface

    return build


def places(pixel_m=1.0):
    """Rows, columns, latitudes and longitudes of samples well inside."""
    row, column = np.random.default_rng(2).integers(90, SIDE - 90, (2, 200))
    x, y = 600_000 + (column + 0.5) * pixel_m, 5_300_000 - (row + 0.5) * pixel_m
    lon, lat = TO_DEGREES.transform(x, y)
    return row, column, lat, lon


@pytest.mark.parametrize("slope", [0.0, 0.2, 0.5])
def test_ground_under_houses_on_a_slope_is_found_without_bias(hillside, ground_of, slope):
    path, bare, surface = hillside(slope)
    row, column, lat, lon = places()
    found = bare_ground_m(ground_of(path), lat, lon)
    on_houses = surface[row, column] > bare[row, column] + 1
    assert 20 < on_houses.sum() < 150
    assert np.abs(found - bare[row, column]).max() < 0.3


def test_rough_ground_is_found_within_its_own_roughness(hillside, ground_of):
    """Lowest samples of 24 × 24 m lie below the mean ground, but it is never above the surface: within 3 sigma."""
    path, bare, _ = hillside(0.2, roughness_m=0.3)
    row, column, lat, lon = places()
    error_m = bare_ground_m(ground_of(path), lat, lon) - bare[row, column]
    assert abs(error_m.mean()) < 0.9
    assert np.percentile(np.abs(error_m), 95) < 1.2


def test_bare_ground_never_stands_above_the_surface(hillside, ground_of):
    path, _, surface = hillside(0.2, roughness_m=0.5)
    row, column, lat, lon = places()
    assert (bare_ground_m(ground_of(path), lat, lon) <= surface[row, column] + 1e-3).all()


def test_a_raster_of_bare_ground_is_taken_at_its_word(hillside, ground_of):
    path, _, _ = hillside(0.2)
    declare(path, kind="bare")
    ground = ground_of(path)
    _, _, lat, lon = places()
    np.testing.assert_array_equal(bare_ground_m(ground, lat, lon), ground.elevation_m(lat, lon))


def test_samples_too_wide_for_houses_stay_as_they_are(hillside, ground_of):
    path, _, _ = hillside(0.2, pixel_m=90.0)
    ground = ground_of(path)
    _, _, lat, lon = places(90.0)
    np.testing.assert_array_equal(bare_ground_m(ground, lat, lon), ground.elevation_m(lat, lon))


def test_many_places_are_what_each_is_alone_and_outside_there_is_nothing(hillside, ground_of):
    path, _, _ = hillside(0.2, roughness_m=0.3)
    ground = ground_of(path)
    _, _, lat, lon = places()
    lat, lon = np.append(lat[:70], 10.0), np.append(lon[:70], 10.0)
    together = bare_ground_m(ground, lat, lon)
    assert np.isnan(together[-1])
    alone = [float(bare_ground_m(ground, a, b)) for a, b in zip(lat[:-1], lon[:-1], strict=True)]
    assert together[:-1] == pytest.approx(alone, abs=1e-9)


@pytest.mark.parametrize("pixel_m", [1.0, 10.0, 30.0])
@pytest.mark.parametrize("fall", [0.03, 0.1, 0.3, 0.6])
def test_a_crest_is_no_house(write_raster, ground_of, pixel_m, fall):
    """A ridge that falls evenly to both sides, made by the test: its top is not taken for cover."""
    heights = 1900 - fall * pixel_m * np.abs(np.arange(SIDE) - SIDE // 2)[:, None] * np.ones(SIDE)
    transform = Affine(pixel_m, 0, 600_000, 0, -pixel_m, 5_300_000)
    path = write_raster(heights.astype("float32"), crs="EPSG:32632", transform=transform)
    x, y = 600_000 + SIDE / 2 * pixel_m, 5_300_000 - (SIDE // 2 + 0.5) * pixel_m
    lon, lat = TO_DEGREES.transform(x, y)
    assert float(bare_ground_m(ground_of(path), lat, lon)) == pytest.approx(1900, abs=1.5)
