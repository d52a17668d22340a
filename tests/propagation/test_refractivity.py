"""Refractivity by place: own table, full maps from a folder, and what is refused."""

from pathlib import Path

import numpy as np
import pytest

from propagation.errors import MapError, RangeError
from propagation.refractivity import refractivity


def write_maps(folder: Path, lapse: np.ndarray, sea_level: np.ndarray) -> Path:
    np.savetxt(folder / "DN50.TXT", lapse, fmt="%9.3f")
    np.savetxt(folder / "N050.TXT", sea_level, fmt="%9.3f")
    return folder


@pytest.fixture
def sloping_maps(tmp_path: Path) -> Path:
    """Maps in which lapse tells the latitude and N0 the longitude (without the wrap)."""
    latitude, longitude = np.meshgrid(np.linspace(90, -90, 121), np.linspace(0, 360, 241), indexing="ij")
    return write_maps(tmp_path, 40 + latitude / 10, 300 + longitude / 10)


def test_one_turn_east_is_the_same_place():
    assert refractivity(47.3, -8.2) == refractivity(47.3, 351.8) == refractivity(47.3, 711.8)


def test_values_run_on_across_the_ends_of_the_table():
    """At 0, 180 and 357 to 360 degrees a step of 0.02 degrees moves the lapse by less than 0.3 N/km."""
    for seam in (0.0, 180.0, -180.0, 357.0, 360.0):
        west, east = refractivity([10.0, 52.0], seam - 0.01), refractivity([10.0, 52.0], seam + 0.01)
        np.testing.assert_allclose(west, east, atol=0.3)


def test_between_grid_points_the_value_is_their_mean():
    lapse, n0 = refractivity([30.0, 30.0, 30.0], [6.0, 9.0, 7.5])
    assert lapse[2] == pytest.approx((lapse[0] + lapse[1]) / 2)
    assert n0[2] == pytest.approx((n0[0] + n0[1]) / 2)


def test_pole_has_one_value_whatever_the_longitude():
    lapse, _ = refractivity(90, np.linspace(0, 360, 50))
    assert np.ptp(lapse) == 0


def test_batch_equals_one_by_one():
    latitude, longitude = np.array([-33.0, 0.4, 61.0]), np.array([151.0, -78.0, 10.5])
    lapse, n0 = refractivity(latitude, longitude)
    for i in range(3):
        assert refractivity(latitude[i], longitude[i]) == (lapse[i], n0[i])


def test_no_position_gives_no_value():
    lapse, n0 = refractivity([50.0, np.nan], [np.nan, 10.0])
    assert np.isnan(lapse).all()
    assert np.isnan(n0).all()


def test_latitude_beyond_a_pole_is_refused():
    with pytest.raises(RangeError, match="latitude 91 is beyond a pole: use -90 to 90"):
        refractivity([10, 91], 0)


def test_infinite_longitude_is_refused():
    with pytest.raises(RangeError, match="longitude is infinite"):
        refractivity(10, np.inf)


def test_full_maps_are_read_from_the_north_and_the_greenwich_meridian(sloping_maps: Path):
    lapse, n0 = refractivity([90, 50.7, -90], [0, 12.3, 359.9], maps_folder=sloping_maps)
    np.testing.assert_allclose(lapse, [49, 45.07, 31], atol=1e-3)
    np.testing.assert_allclose(n0, [300, 301.23, 335.99], atol=1e-3)


def test_missing_map_says_which_files_belong_there(sloping_maps: Path):
    (sloping_maps / "N050.TXT").unlink()
    with pytest.raises(MapError, match=r"no map .*N050.TXT: the folder must hold DN50.TXT and N050.TXT"):
        refractivity(50, 10, maps_folder=sloping_maps)


def test_map_of_another_size_says_what_it_holds(tmp_path: Path):
    write_maps(tmp_path, np.full((61, 121), 40.0), np.full((61, 121), 320.0))
    with pytest.raises(MapError, match=r"holds 61 x 121 numbers: it needs 121 lines of 241"):
        refractivity(50, 10, maps_folder=tmp_path)


def test_map_with_words_in_it_is_no_map(sloping_maps: Path):
    (sloping_maps / "DN50.TXT").write_text("lapse of refractivity\n", encoding="ascii")
    with pytest.raises(MapError, match=r"DN50.TXT is not a map .*: it needs 121 lines"):
        refractivity(50, 10, maps_folder=sloping_maps)


def test_map_with_a_gap_is_refused(tmp_path: Path):
    gap = np.full((121, 241), 40.0)
    gap[60, 100] = np.nan
    write_maps(tmp_path, gap, np.full((121, 241), 320.0))
    with pytest.raises(MapError, match="holds a figure that is no number"):
        refractivity(50, 10, maps_folder=tmp_path)
