"""Steps 12 to 18 of P.1546 by hand arithmetic, where no published example goes, and their trends."""

from math import atan, degrees, log10, sqrt

import numpy as np
import pytest

from propagation.p1546 import corrections, field_strength

OPEN = {
    "frequency_mhz": 600.0,
    "time_percent": 50.0,
    "path_length_km": 40.0,
    "h1_source_height_m": 200.0,
    "rx_height_agl_m": 10.0,
    "rx_environment": "rural",
}


def j(nu):
    return 6.9 + 20 * log10(sqrt((nu - 0.1) ** 2 + 1) + nu - 0.1)


def test_horizon_below_0_55_degrees_costs_nothing():
    """Section 11 limits the angle to 0.55 degrees; 0.065 * 0.55 is not quite 0.036: 0.02 to 0.05 dB."""
    _, correction = corrections.clearance_angle_correction_db(np.array([50.0, 600, 3000]), np.full(3, -2.0))
    assert (np.abs(correction) < 0.06).all()


def test_high_horizon_costs_by_two_knife_edges():
    """Eq. (32) by hand, 3 degrees at 600 MHz: J(0.036 sqrt 600) - J(0.065 * 3 sqrt 600)."""
    nu, correction = corrections.clearance_angle_correction_db(np.array(600.0), np.array(3.0))
    assert nu == pytest.approx(0.195 * sqrt(600))
    assert correction == pytest.approx(j(0.036 * sqrt(600)) - j(0.195 * sqrt(600)))


def test_horizon_above_40_degrees_counts_as_40():
    _, correction = corrections.clearance_angle_correction_db(np.array(600.0), np.array([40.0, 89.0]))
    assert correction[0] == correction[1]


def test_troposcatter_by_hand():
    """Eqs. (35) and (36): 600 MHz, 200 km, 1 %, both horizons at 0.2 degrees.

    Scatter angle 180 * 200 / (pi * 4/3 * 6370) + 0.4 = 1.3492 + 0.4; 5 log 600 - 2.5 (log 600 - 3.3)^2 =
    13.8908 - 0.6808; gain 10.1 (log 50)^0.7 = 14.6370.
    """
    theta, field = corrections.troposcatter_dbuv_m(
        np.array(200.0), np.array(600.0), np.array(1.0), np.array(0.2), np.array(0.2)
    )
    assert theta == pytest.approx(1.7492, abs=1e-4)
    expected = 24.4 - 20 * log10(200) - 17.492 - (13.8908 - 0.6808) + 0.15 * 325 + 14.6370
    assert field == pytest.approx(expected, abs=0.001)


def test_troposcatter_needs_both_angles():
    one = field_strength(**OPEN, rx_clearance_angle_deg=0.3)
    assert np.isnan(one.tropo_field_dbuv_m)
    assert not np.isnan(one.tca_correction_db)
    assert not np.isnan(one.field_dbuv_m)


def test_rural_aerial_at_ten_metres_needs_no_correction():
    assert field_strength(**OPEN).rx_height_correction_db == 0


def test_rural_aerial_rises_by_kh2_per_decade():
    """Eq. (28b): (3.2 + 6.2 log 600) log(20/10)."""
    higher = field_strength(**{**OPEN, "rx_height_agl_m": 20.0})
    assert higher.rx_height_correction_db == pytest.approx((3.2 + 6.2 * log10(600)) * log10(2))


def test_aerial_below_urban_clutter_by_hand():
    """Eqs. (27) and (28a): R2 = 20 m, h1 = 200 m at 40 km: R' = (1000 * 40 * 20 - 15 * 200) / (40000 - 15)."""
    result = field_strength(**{**OPEN, "rx_environment": "urban"}, rx_clutter_height_m=20.0)
    modified = (800000 - 3000) / 39985
    hd = modified - 10
    nu = 0.0108 * sqrt(600) * sqrt(hd * degrees(atan(hd / 27)))
    assert result.rx_modified_clutter_height_m == pytest.approx(modified)
    assert result.rx_height_correction_db == pytest.approx(6.03 - j(nu))


def test_aerial_over_low_clutter_by_hand():
    """Eq. (28b) with R' below 10 m: K log(h2/R') - K log(10/R'), which is 0 for an aerial at 10 m."""
    result = field_strength(**{**OPEN, "rx_environment": "suburban"}, rx_clutter_height_m=6.0)
    assert result.rx_modified_clutter_height_m < 10
    assert result.rx_height_correction_db == pytest.approx(0, abs=1e-12)


def test_field_rises_with_the_aerial_in_every_surrounding():
    heights = np.linspace(3, 60, 200)
    for name in ("rural", "suburban", "urban", "dense_urban", "sea"):
        fields = field_strength(
            **{**OPEN, "rx_environment": name, "rx_height_agl_m": heights}, rx_clutter_height_m=20.0
        ).rx_height_correction_db
        assert (np.diff(fields) >= -0.01).all(), name  # 6.03 for J(0) leaves 0.003 dB at the clutter's top


def test_low_aerial_at_sea_between_two_distances():
    """Eq. (29) by hand: 600 MHz, h1 = 30 m, h2 = 3 m.

    10 m: Dh = 4.1 (sqrt 30 + sqrt 10) = 35.422, Df = 7.002, d10 = 5.8463 km.
    3 m: Dh = 4.1 (sqrt 30 + sqrt 3) = 29.558, Df = 2.1006, d3 = 1.9612 km.
    """
    d = np.array([1.5, 3.0, 20.0])
    result = field_strength(
        **{
            **OPEN,
            "h1_source_height_m": 30.0,
            "rx_height_agl_m": 3.0,
            "rx_environment": "sea",
            "path_length_km": d,
        },
        cold_sea_km=d,
    )
    full = (3.2 + 6.2 * log10(600)) * log10(0.3)
    between = full * log10(3 / 1.9612) / log10(5.8463 / 1.9612)
    assert result.rx_height_correction_db == pytest.approx([0, between, full], abs=1e-3)


def test_transmitter_level_with_its_clutter_loses_a_grazing_edge():
    """Eq. (30): nu = 0, -J(0) = -6.03."""
    result = field_strength(**OPEN, tx_height_agl_m=30.0, tx_clutter_height_m=30.0)
    assert result.tx_clutter_correction_db == pytest.approx(-6.03, abs=0.005)


def test_transmitter_clears_its_clutter():
    heights = np.array([10.0, 25.0, 30.0, 35.0, 60.0])
    clutter = field_strength(**OPEN, tx_height_agl_m=heights, tx_clutter_height_m=30.0).tx_clutter_correction_db
    assert (np.diff(clutter) >= 0).all()
    assert clutter[-1] == 0


def test_slope_path_by_hand():
    """Eq. (37): 1500 m up over 3 km: 20 log(3 / sqrt(3² + 1.5²)) with ground at both ends."""
    result = field_strength(
        **{**OPEN, "path_length_km": 3.0},
        tx_height_agl_m=60.0,
        tx_ground_amsl_m=1500.0,
        rx_ground_amsl_m=50.0,
    )
    assert result.slope_path_correction_db == pytest.approx(20 * log10(3 / sqrt(9 + 1.5**2)))
    assert result.field_maximum_dbuv_m == pytest.approx(106.9 - 20 * log10(sqrt(9 + 1.5**2)))


def test_below_40_metres_the_field_is_that_of_free_space():
    """Eq. (38a): 30 m along, 40 m up: 50 m of slope, 106.9 - 20 log 0.05."""
    result = field_strength(**{**OPEN, "path_length_km": 0.03}, tx_height_agl_m=50.0)
    assert result.field_dbuv_m == pytest.approx(106.9 - 20 * log10(0.05))


def test_short_paths_meet_the_curves_at_one_kilometre():
    d = np.array([1 - 1e-6, 1.0])
    before, after = field_strength(**{**OPEN, "path_length_km": d}, tx_height_agl_m=50.0).field_dbuv_m
    assert before == pytest.approx(after, abs=1e-4)


def test_field_falls_along_a_short_path():
    d = np.geomspace(0.01, 3, 100)
    fields = field_strength(**{**OPEN, "path_length_km": d}, tx_height_agl_m=50.0).field_dbuv_m
    assert (np.diff(fields) < 0).all()


def test_share_of_locations_by_hand():
    """Eq. (33): 95 % of places, 5.5 dB: 1.6449 * 5.5 = 9.047 dB less; the quantile is rounded to 4.5e-4."""
    places = np.array([5.0, 50.0, 95.0])
    low, middle, high = field_strength(**OPEN, location_percent=places, location_sigma_db=5.5).field_dbuv_m
    assert low - middle == pytest.approx(9.047, abs=0.003)
    assert middle - high == pytest.approx(9.047, abs=0.003)


def test_spread_over_an_area_by_hand():
    """Eq. (34): (0.52 + 0.024 * 0.6) 500^0.28, ln 500 = 6.2146: 0.5344 * 5.6975 = 3.0447 dB."""
    half, nearly_all = field_strength(
        **OPEN, location_percent=[50.0, 84.13447], location_area_width_m=500.0
    ).field_dbuv_m
    assert half - nearly_all == pytest.approx(3.0447, abs=0.003)  # one standard deviation


@pytest.mark.parametrize(("environment", "sigma"), [("rural", 12), ("suburban", 10), ("urban", 8), ("dense_urban", 8)])
def test_unknown_terrain_spreads_by_surroundings(environment, sigma):
    half, nearly_all = field_strength(
        **{**OPEN, "rx_environment": environment},
        rx_clutter_height_m=10.0,
        terrain_information=False,
        location_percent=[50.0, 84.13447],
    ).field_dbuv_m
    assert half - nearly_all == pytest.approx(sigma, abs=0.01)


def test_receiver_at_sea_has_no_spread():
    result = field_strength(**{**OPEN, "rx_environment": "sea"}, location_percent=[5.0, 50.0], location_sigma_db=5.5)
    assert np.ptp(result.field_dbuv_m) == 0
    assert np.isnan(result.field_location_corrected_dbuv_m).all()
