"""Steps 6 to 11 of P.1546 where no published example goes, from the printed tables by hand arithmetic."""

import csv
from functools import cache
from importlib.resources import files
from math import atan, degrees, exp, log10, sqrt

import numpy as np
import pytest

from propagation.p1546 import field_strength
from propagation.p1546.curves import clear_distance_km
from propagation.p1546.normal import inverse_complementary_normal
from propagation.p1546.tables import DISTANCES_KM, HEIGHTS_M


@cache
def printed():
    text = files("propagation").joinpath("data/p1546_tables.csv").read_text(encoding="utf-8")
    return {(int(row["figure"]), float(row["distance_km"])): row for row in csv.DictReader(text.splitlines())}


def table(figure, distance_km, height_m):
    """Number printed in a figure's table."""
    return float(printed()[figure, distance_km][f"field_{height_m:g}_m_dbuv_m"])


def curves(f, t, d, h1, **lengths):
    """Field after step 11, without anything else known of the path."""
    return field_strength(
        frequency_mhz=f,
        time_percent=t,
        path_length_km=d,
        h1_source_height_m=h1,
        rx_height_agl_m=10.0,
        rx_environment="rural",
        **lengths,
    ).field_after_step11_dbuv_m


@pytest.mark.parametrize(
    ("figure", "f", "t", "lengths"),
    [
        (1, 100, 50, {}),
        (10, 600, 10, {}),
        (19, 2000, 1, {}),
        (12, 600, 50, {"cold_sea_km": 110.0}),
        (12, 600, 50, {"warm_sea_km": 110.0}),
        (13, 600, 10, {"cold_sea_km": 110.0}),
        (15, 600, 10, {"warm_sea_km": 110.0}),
        (16, 600, 1, {"warm_sea_km": 110.0}),
        (7, 100, 10, {"warm_sea_km": 110.0}),
        (24, 2000, 1, {"warm_sea_km": 110.0}),
    ],
)
@pytest.mark.parametrize("height_m", [10, 150, 1200])
def test_nominal_values_read_the_figure(figure, f, t, lengths, height_m):
    assert curves(f, t, 110.0, height_m, **lengths) == table(figure, 110, height_m)


def test_distance_between_two_rows():
    """Eq. (13): 112 km between 110 and 120 km, Figure 9, 300 m."""
    low, high = table(9, 110, 300), table(9, 120, 300)
    expected = low + (high - low) * log10(112 / 110) / log10(120 / 110)
    assert curves(600, 50, 112.0, 300) == pytest.approx(expected, abs=1e-9)


def test_height_between_two_columns_and_above_the_last():
    """Eq. (8): 100 m between 75 and 150 m; 2000 m from 600 and 1200 m."""
    low, high = table(9, 50, 75), table(9, 50, 150)
    assert curves(600, 50, 50.0, 100) == pytest.approx(low + (high - low) * log10(100 / 75) / log10(2))
    low, high = table(9, 100, 600), table(9, 100, 1200)
    expected = low + (high - low) * log10(2000 / 600) / log10(2)
    assert expected < 106.9 - 40  # the maximum field does not cut it off
    assert curves(600, 50, 100.0, 2000) == pytest.approx(expected)


def test_frequency_between_and_beyond_the_figures():
    """Eq. (14): 800 MHz between 600 and 2000 MHz, 3000 MHz beyond 2000 MHz, 50 MHz below 100 MHz."""
    at_100, at_600, at_2000 = (table(figure, 60, 150) for figure in (1, 9, 17))
    share = log10(800 / 600) / log10(2000 / 600)
    assert curves(800, 50, 60.0, 150) == pytest.approx(at_600 + (at_2000 - at_600) * share)
    share = log10(3000 / 600) / log10(2000 / 600)
    assert curves(3000, 50, 60.0, 150) == pytest.approx(at_600 + (at_2000 - at_600) * share)
    share = log10(50 / 100) / log10(6)
    assert curves(50, 50, 60.0, 150) == pytest.approx(at_100 + (at_600 - at_100) * share)


def test_time_between_the_figures():
    """Eq. (16) with the quantiles of section 16: 20 % between 10 and 50 %."""
    q10, q20, q50 = (float(inverse_complementary_normal(p)) for p in (0.1, 0.2, 0.5))
    at_10, at_50 = table(10, 60, 150), table(9, 60, 150)
    expected = at_50 * (q10 - q20) / (q10 - q50) + at_10 * (q20 - q50) / (q10 - q50)
    assert curves(600, 20, 60.0, 150) == pytest.approx(expected)


def test_quantiles_as_printed():
    """Section 16, eqs. (39a) to (39c), worked by hand: 2.3267853, 1.2817288 and -1.01e-7."""
    assert inverse_complementary_normal([0.01, 0.1]) == pytest.approx([2.3267853, 1.2817288], abs=5e-8)
    assert inverse_complementary_normal(0.5) == pytest.approx(-1.01e-7, abs=1e-9)
    assert inverse_complementary_normal(0.95) == -inverse_complementary_normal(1 - 0.95)


def test_clear_distance_as_worked_by_hand():
    """Section 18: 20 m and 10 m, Dh = 4.1 (sqrt 20 + sqrt 10) = 31.30 km, Df = 0.00778 f km."""
    assert clear_distance_km(100.0, 20.0, 10.0) == pytest.approx(0.759, abs=5e-4)
    assert clear_distance_km(600.0, 20.0, 10.0) == pytest.approx(4.062, abs=5e-4)
    assert clear_distance_km(2000.0, 20.0, 10.0) == pytest.approx(10.393, abs=5e-4)
    assert clear_distance_km(600.0, -5.0, 10.0) == 0.001


def hidden(nu_per_degree, h):
    """Eqs. (12) to (12b) by hand."""
    nu = nu_per_degree * degrees(atan(-h / 9000))
    return 6.03 - (6.9 + 20 * log10(sqrt((nu - 0.1) ** 2 + 1) + nu - 0.1) if nu > -0.7806 else 0)


@pytest.mark.parametrize(("f", "figure", "k"), [(100, 1, 1.35), (600, 9, 3.31), (2000, 17, 6.00)])
def test_low_and_negative_sources_over_land(f, figure, k):
    """Eqs. (9) and (12): 0 to 10 m by a line, below 0 m by the angle over 9 km."""
    e10, e20 = table(figure, 40, 10), table(figure, 40, 20)
    e0 = e10 + 0.5 * (e10 - e20 + hidden(k, -10))
    assert curves(f, 50, 40.0, 4) == pytest.approx(e0 + 0.4 * (e10 - e0))
    assert curves(f, 50, 40.0, 0) == pytest.approx(e0)
    assert curves(f, 50, 40.0, -60) == pytest.approx(e0 + hidden(k, -60))


@pytest.mark.parametrize("f", [100, 300, 600, 1500, 2000])
def test_source_height_has_no_step_over_land(f):
    """Continuous at 10 m; at 0 m the text rounds J(0) to 6.03: 0.003 dB."""
    below, at = curves(f, 50, 40.0, np.array([10 - 1e-9, 10.0]))
    assert below == pytest.approx(at, abs=1e-6)
    below, at = curves(f, 50, 40.0, np.array([-1e-9, 0.0]))
    assert below == pytest.approx(at, abs=0.004)


def test_field_grows_with_the_source_over_land():
    heights = np.concatenate([np.arange(-200.0, 20.0), np.geomspace(20, 3000, 50)])
    assert (np.diff(curves(600, 50, 40.0, heights)) >= -0.004).all()


def test_low_source_over_sea_beyond_the_20_m_distance():
    """Eq. (11c) by hand: 600 MHz, 5 m, 50 km of cold sea, half of the time, Figure 12."""
    e10, e20 = table(12, 50, 10), table(12, 50, 20)
    e0 = e10 + 0.5 * (e10 - e20 + hidden(3.31, -10))
    upwards = e10 + (e20 - e10) * log10(5 / 10) / log10(2)
    downwards = e0 + 0.5 * (e10 - e0)
    share = (50 - 4.0619) / 50  # D20 above
    expected = upwards * (1 - share) + downwards * share
    assert curves(600, 50, 50.0, 5, cold_sea_km=50.0) == pytest.approx(expected, abs=1e-3)


def test_low_source_over_sea_near_by():
    """Eqs. (11a) and (11b) by hand: 2000 MHz, 5 m, Figure 20.

    Dh = 4.1 (sqrt 5 + sqrt 10) = 22.133, Df = 3.89: D(5 m) = 3.3085 km; D20 = 10.393 km.
    At 3 km the maximum of a sea path at half of the time, 106.9 - 20 log 3; at 6 km between both distances.
    """
    assert curves(2000, 50, 3.0, 5, cold_sea_km=3.0) == pytest.approx(106.9 - 20 * log10(3))
    near, far = 3.3085, 10.3933
    at_near = 106.9 - 20 * log10(near)

    def at_far(height):
        low, high = table(20, 10, height), table(20, 11, height)
        return low + (high - low) * log10(far / 10) / log10(1.1)

    e20 = at_far(10) + (at_far(20) - at_far(10)) * log10(5 / 10) / log10(2)
    expected = at_near + (e20 - at_near) * log10(6 / near) / log10(far / near)
    assert curves(2000, 50, 6.0, 5, cold_sea_km=6.0) == pytest.approx(expected, abs=2e-3)


@pytest.mark.parametrize("f", [100, 600, 2000])
def test_low_sources_over_sea_have_no_step(f):
    """At 10 m beyond D20 (eq. 11c goes over to the curves), and at the distance D20 itself."""
    d = np.array([15.0, 60.0, 500.0])
    below = curves(f, 50, d, 10 - 1e-9, cold_sea_km=d)
    assert below == pytest.approx(curves(f, 50, d, 10.0, cold_sea_km=d), abs=1e-6)
    d20 = max(1.0, float(clear_distance_km(f, 20.0, 10.0)))
    d = np.array([d20 - 1e-9, d20 + 1e-9]) if d20 > 1 else np.array([1.0, 1.0 + 1e-9])
    before, after = curves(f, 50, d, 5.0, cold_sea_km=d)
    assert before == pytest.approx(after, abs=1e-5)


def test_low_sources_over_sea_follow_the_trends():
    d = DISTANCES_KM
    for f in (100, 600, 2000):
        assert (np.diff(curves(f, 10, d, 5.0, warm_sea_km=d)) < 0).all()
    heights = np.array([3.0, 4.0, 6.0, 8.0, 10.0])
    assert (np.diff(curves(600, 10, 50.0, heights, warm_sea_km=50.0)) > 0).all()


def test_sources_below_three_metres_at_sea_count_as_three():
    low = field_strength(
        frequency_mhz=600,
        time_percent=50,
        path_length_km=30.0,
        cold_sea_km=30.0,
        h1_source_height_m=[-20.0, 1.0, 3.0],
        rx_height_agl_m=10.0,
        rx_environment="sea",
    )
    assert low.h1_m.tolist() == [3, 3, 3]
    assert np.ptp(low.field_dbuv_m) == 0


def test_mixed_path_with_low_source_takes_it_for_land_and_three_metres_for_sea():
    """Section 3: the land field for -20 m, the sea field for 3 m, then eqs. (22) to (26) by hand."""
    land, sea = curves(600, 50, 40.0, -20), curves(600, 50, 40.0, 3, cold_sea_km=40.0)
    weight = (1 - (1 - 0.25) ** (2 / 3)) ** max(1, 1 + (sea - land) / 40)
    mixed = curves(600, 50, 40.0, -20, cold_sea_km=10.0)
    assert mixed == pytest.approx((1 - weight) * land + weight * sea)


def test_sea_below_100_mhz_near_by():
    """Eqs. (15a) and (15b) by hand: 50 MHz, 300 m, cold sea, half of the time.

    Dh = 4.1 (sqrt 300 + sqrt 10) = 83.979; Df(50) = 5.835, Df(600) = 70.02:
    D(50) = 5.4559 km, D(600) = 38.184 km. At 5 km the maximum, 106.9 - 20 log 5 at 50 %; at 20 km a line
    over the logarithm to the usual field at 38.184 km.
    """
    assert curves(50, 50, 5.0, 300, cold_sea_km=5.0) == pytest.approx(106.9 - 20 * log10(5))

    def usual(figure):
        low, high = table(figure, 35, 300), table(figure, 40, 300)
        return low + (high - low) * log10(38.184 / 35) / log10(40 / 35)

    at_far = usual(4) + (usual(12) - usual(4)) * log10(0.5) / log10(6)
    at_near = 106.9 - 20 * log10(5.4559)
    expected = at_near + (at_far - at_near) * log10(20 / 5.4559) / log10(38.184 / 5.4559)
    assert curves(50, 50, 20.0, 300, cold_sea_km=20.0) == pytest.approx(expected, abs=2e-3)


def test_sea_below_100_mhz_has_no_step_where_the_curves_begin():
    d600 = float(clear_distance_km(600.0, 300.0, 10.0))
    d = np.array([d600 - 1e-9, d600 + 1e-9])
    before, after = curves(50, 10, d, 300, warm_sea_km=d)
    assert before == pytest.approx(after, abs=1e-6)


def test_warm_sea_ducts_more_than_cold_and_land():
    lengths = [{}, {"cold_sea_km": 200.0}, {"warm_sea_km": 200.0}]
    fields = [float(curves(600, 1, 200.0, 150, **length)) for length in lengths]
    assert fields[0] < fields[1] < fields[2]


def test_three_sections_count_by_their_lengths():
    """Land, sea, land: 60 km of land and 40 km of sea, wherever they lie; eqs. (22) to (26) by hand."""
    land, sea = table(10, 100, 150), table(13, 100, 150)
    weight = (1 - 0.6 ** (2 / 3)) ** max(1, 1 + (sea - land) / 40)
    three = curves(600, 10, 100.0, 150, land_km=25.0 + 35.0, cold_sea_km=40.0)
    assert three == pytest.approx((1 - weight) * land + weight * sea)


def test_path_over_both_seas_counts_as_warm():
    both = curves(600, 1, 100.0, 150, cold_sea_km=30.0, warm_sea_km=50.0)
    assert both == curves(600, 1, 100.0, 150, warm_sea_km=80.0)


def test_mixed_path_goes_from_land_to_sea():
    shares = np.linspace(0, 1, 21)
    fields = curves(600, 1, 100.0, 150, warm_sea_km=100 * shares)
    assert fields[0] == table(11, 100, 150)
    assert fields[-1] == table(16, 100, 150)
    assert (np.diff(fields) > 0).all()


def test_sea_field_never_exceeds_its_maximum():
    """Eqs. (2) and (3): 3000 m over warm sea 1 % of the time."""
    d = DISTANCES_KM
    maximum = 106.9 - 20 * np.log10(d) + 2.38 * (1 - np.array([exp(-x / 8.94) for x in d])) * log10(50)
    assert (curves(600, 1, d, 3000.0, warm_sea_km=d) <= maximum + 1e-9).all()
    assert HEIGHTS_M[-1] < 3000
