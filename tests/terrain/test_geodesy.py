import numpy as np
import pytest
from pyproj import Geod

from terrain.geodesy import destination, distance_and_bearing, points_along, rays

GEOD = Geod(ellps="WGS84")


def test_one_degree_of_the_equator_is_a_360th_of_its_circumference():
    distance_km, bearing_deg = distance_and_bearing(0, 0, 0, 1)
    assert distance_km == pytest.approx(2 * np.pi * 6378.137 / 360, abs=1e-9)
    assert bearing_deg == 90


def test_bearings_run_from_0_to_360():
    _, bearing_deg = distance_and_bearing(50, 10, [51, 50, 49, 50], [10, 11, 10, 9])
    assert bearing_deg == pytest.approx([0, 90 - 0.38, 180, 270 + 0.38], abs=0.01)


def test_two_equal_points_have_no_distance_and_bearing_zero():
    assert distance_and_bearing(50, 10, 50, 10) == (0, 0)


def test_results_have_the_common_shape_of_the_inputs():
    distance_km, bearing_deg = distance_and_bearing(np.zeros((3, 1)), 0.0, 1.0, np.arange(4.0))
    assert distance_km.shape == bearing_deg.shape == (3, 4)
    lat, lon = destination(0.0, 0.0, np.zeros((2, 1)), np.arange(5.0))
    assert lat.shape == lon.shape == (2, 5)


def test_nan_gives_nan():
    assert np.isnan(distance_and_bearing(np.nan, 0, 1, 1)).all()
    assert np.isnan(destination(np.nan, 0, 1, 1)).all()


def test_destination_undoes_distance_and_bearing():
    distance_km, bearing_deg = distance_and_bearing(47.1, 8.2, 48.3, 7.4)
    assert destination(47.1, 8.2, bearing_deg, distance_km) == (
        pytest.approx(48.3, abs=1e-9),
        pytest.approx(7.4, abs=1e-9),
    )


def test_both_ends_come_back_exactly():
    length, _ = distance_and_bearing(47.123, 8.456, 48.9, 7.1)
    lat, lon = points_along(47.123, 8.456, 48.9, 7.1, [0, length / 2, length])
    assert (lat[0], lon[0], lat[-1], lon[-1]) == (47.123, 8.456, 48.9, 7.1)


@pytest.mark.parametrize(("lat", "bearing_deg"), [(0, 45), (47.5, 10), (60, 90), (70, 135), (-33, 200)])
def test_points_lie_within_a_decimetre_of_the_geodesic_up_to_300_km(lat, bearing_deg):
    """Outside reference: pyproj's intermediate points (inv_intermediate), another entry of the library."""
    lon2, lat2, _ = GEOD.fwd(8, lat, bearing_deg, 300e3)
    ends = {"initial_idx": 0, "terminus_idx": 0, "return_back_azimuth": True}
    expected = GEOD.inv_intermediate(8, lat, lon2, lat2, 1001, **ends)
    got_lat, got_lon = points_along(lat, 8, lat2, lon2, np.linspace(0, 300, 1001))
    _, _, error_m = GEOD.inv(got_lon, got_lat, np.array(expected.lons), np.array(expected.lats))
    assert np.max(error_m) < 0.1


def test_a_path_over_the_180th_meridian_stays_short():
    length, bearing_deg = distance_and_bearing(0, 179.5, 0, -179.5)
    assert length == pytest.approx(111.319, abs=0.001)
    assert bearing_deg == 90
    _, lon = points_along(0, 179.5, 0, -179.5, [0, length / 4, 3 * length / 4, length])
    assert lon == pytest.approx([179.5, 179.75, -179.75, -179.5], abs=1e-9)


@pytest.mark.parametrize(("lat", "lon"), [(0, 0), (47, 8), (-33, -70), (70, 179.9), (80, 20), (89, 5)])
def test_rays_are_within_a_centimetre_of_their_geodesics_to_300_km(lat, lon):
    bearing_deg, distance_km = np.arange(0, 360, 7.5), np.linspace(0, 300, 101)
    ray_lat, ray_lon = rays(lat, lon, bearing_deg, distance_km)
    exact_lat, exact_lon = destination(lat, lon, bearing_deg[:, None], distance_km)
    error_km, _ = distance_and_bearing(exact_lat, exact_lon, ray_lat, ray_lon)
    assert ray_lat.shape == (48, 101)
    assert 1e5 * error_km.max() < 1
    assert np.abs(ray_lon).max() <= 180
