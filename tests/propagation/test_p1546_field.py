"""The whole of P.1546: order, missing inputs, batches and limits."""

import dataclasses

import numpy as np
import pytest

from propagation.errors import RangeError
from propagation.p1546 import field_strength

KNOWN = {
    "frequency_mhz": 600.0,
    "time_percent": 10.0,
    "path_length_km": 60.0,
    "cold_sea_km": 20.0,
    "h1_source_height_m": 200.0,
    "tx_height_agl_m": 120.0,
    "rx_height_agl_m": 10.0,
    "rx_environment": "suburban",
    "tx_clutter_height_m": 10.0,
    "rx_clutter_height_m": 12.0,
    "tx_clearance_angle_deg": -0.1,
    "rx_clearance_angle_deg": 1.2,
    "tx_ground_amsl_m": 300.0,
    "rx_ground_amsl_m": 50.0,
}


def test_power_and_loss_belong_to_the_field():
    """Step 20: 139.3 - E + 20 log f, and 10 log of the power in kW."""
    result = field_strength(**KNOWN, erp_kw=50.0)
    assert result.field_dbuv_m - result.field_1kw_dbuv_m == pytest.approx(16.99, abs=0.001)
    assert result.basic_loss_db == pytest.approx(139.3 - result.field_1kw_dbuv_m + 20 * np.log10(600))


def test_batch_equals_one_by_one():
    draw = np.random.default_rng(7)
    n = 200
    d = 10 ** draw.uniform(-1, 3, n)
    batch = {
        "frequency_mhz": draw.uniform(30, 4000, n),
        "time_percent": draw.choice([1.0, 3.0, 10.0, 30.0, 50.0], n),
        "path_length_km": d,
        "cold_sea_km": d * draw.choice([0, 0.3, 1.0], n),
        "h1_source_height_m": draw.uniform(-100, 3500, n),
        "tx_height_agl_m": draw.uniform(5, 300, n),
        "rx_height_agl_m": draw.uniform(3, 30, n),
        "rx_environment": draw.choice(["rural", "suburban", "urban", "dense_urban", "sea"], n),
        "tx_clutter_height_m": np.where(draw.random(n) < 0.5, np.nan, 15.0),
        "rx_clutter_height_m": draw.uniform(0, 40, n),
        "tx_clearance_angle_deg": draw.uniform(-5, 5, n),
        "rx_clearance_angle_deg": np.where(draw.random(n) < 0.3, np.nan, 1.5),
        "tx_ground_amsl_m": draw.uniform(0, 1000, n),
        "rx_ground_amsl_m": draw.uniform(0, 1000, n),
    }
    whole = field_strength(**batch)
    for i in range(n):
        one = field_strength(**{name: values[i] for name, values in batch.items()})
        for field in dataclasses.fields(one):
            name = field.name
            assert getattr(one, name) == pytest.approx(getattr(whole, name)[i], abs=1e-9, nan_ok=True), name
    assert not np.isnan(whole.field_dbuv_m).any()


def test_inputs_broadcast():
    result = field_strength(**{**KNOWN, "frequency_mhz": np.full((4, 1), 600.0), "time_percent": [1.0, 10.0, 50.0]})
    assert result.field_dbuv_m.shape == (4, 3)


def test_single_numbers_give_a_single_number():
    assert field_strength(**KNOWN).field_dbuv_m.shape == ()


@pytest.mark.parametrize(
    "name", ["frequency_mhz", "time_percent", "path_length_km", "h1_source_height_m", "rx_height_agl_m"]
)
def test_no_value_in_a_required_input_gives_no_value(name):
    result = field_strength(**{**KNOWN, name: [np.nan, KNOWN[name]]})
    assert np.isnan(result.field_dbuv_m).tolist() == [True, False]


@pytest.mark.parametrize(
    ("name", "term"),
    [
        ("tx_height_agl_m", "slope_path_correction_db"),
        ("tx_clutter_height_m", "tx_clutter_correction_db"),
        ("rx_clearance_angle_deg", "tca_correction_db"),
        ("tx_clearance_angle_deg", "tropo_field_dbuv_m"),
    ],
)
def test_missing_optional_input_leaves_out_its_step(name, term):
    none = field_strength(**{**KNOWN, name: None})
    number = field_strength(**{**KNOWN, name: np.nan})
    assert np.isnan(getattr(none, term))
    assert np.isfinite(none.field_dbuv_m)
    assert none.field_dbuv_m == number.field_dbuv_m


def test_unknown_ground_leaves_the_slope_to_the_antennas():
    """Eq. (37a): 120 - 10 m over 60 km."""
    result = field_strength(**{**KNOWN, "rx_ground_amsl_m": None})
    assert result.slope_path_correction_db == pytest.approx(20 * np.log10(60 / np.hypot(60, 0.11)))


def test_source_height_without_terrain():
    """Section 3.1, eqs. (4), (5), (7): 120 m up to 3 km, half way to 200 m at 9 km, 200 m from 15 km."""
    d = np.array([2.0, 3.0, 9.0, 15.0, 40.0])
    unknown = field_strength(**{**KNOWN, "path_length_km": d, "cold_sea_km": 0.0}, terrain_information=False)
    assert unknown.h1_m == pytest.approx([120, 120, 160, 200, 200])
    known = field_strength(**{**KNOWN, "path_length_km": d, "cold_sea_km": 0.0})
    assert known.h1_m == pytest.approx([200] * 5)


def test_source_height_without_terrain_or_antenna_is_the_estimate():
    result = field_strength(
        **{**KNOWN, "path_length_km": 9.0, "cold_sea_km": 0.0, "tx_height_agl_m": None},
        terrain_information=False,
    )
    assert result.h1_m == 200


def test_sources_above_three_kilometres_count_as_three():
    low, high = field_strength(**{**KNOWN, "h1_source_height_m": [3000.0, 8000.0]}).field_dbuv_m
    assert low == high


def test_field_falls_with_distance_and_rises_with_rarer_time():
    d = np.geomspace(1, 1000, 300)
    result = field_strength(**{**KNOWN, "path_length_km": d, "cold_sea_km": 0.0, "rx_clearance_angle_deg": None})
    assert (np.diff(result.field_dbuv_m) < 0.005).all()  # printed tables round
    rising = field_strength(**{**KNOWN, "time_percent": [50.0, 30.0, 10.0, 3.0, 1.0]}).field_dbuv_m
    assert (np.diff(rising) > 0).all()


def test_field_never_exceeds_free_space_over_land():
    d = np.geomspace(0.01, 1000, 300)
    result = field_strength(
        **{**KNOWN, "path_length_km": d, "cold_sea_km": 0.0, "h1_source_height_m": 3000.0, "rx_height_agl_m": 300.0}
    )
    assert (result.field_dbuv_m <= 106.9 - 20 * np.log10(d) + 1e-9).all()


@pytest.mark.parametrize(
    ("changed", "message"),
    [
        ({"frequency_mhz": 25.0}, "frequency 25 MHz is outside Rec. ITU-R P.1546-6: use 30 to 4000 MHz"),
        ({"frequency_mhz": 5000.0}, "use 30 to 4000 MHz"),
        ({"time_percent": 0.5}, "use 1 to 50 %"),
        ({"time_percent": 60.0}, "use 1 to 50 %"),
        ({"path_length_km": 0.0, "cold_sea_km": 0.0}, "use 0.001 to 1000 km"),
        ({"path_length_km": 1200.0}, "use 0.001 to 1000 km"),
        ({"rx_height_agl_m": 0.5}, "aerial height 0.5 m above ground"),
        ({"rx_height_agl_m": 2.0, "rx_environment": "sea"}, "aerial height at sea 2 m is outside"),
        ({"rx_environment": "forest"}, "use rural, suburban, urban, dense_urban, sea"),
        ({"rx_clutter_height_m": None}, "give rx_clutter_height_m"),
        ({"path_length_km": 0.5, "cold_sea_km": 0.0, "tx_height_agl_m": None}, "give tx_height_agl_m below 1 km"),
        ({"location_percent": 95.0}, "give location_sigma_db or location_area_width_m"),
        ({"location_percent": 99.5, "location_sigma_db": 5.5}, "use 1 to 99 %"),
        ({"land_km": 10.0}, "sections add up to 30 km on a path of 60 km"),
        ({"cold_sea_km": 70.0}, "sections add up to 70 km on a path of 60 km"),
        ({"erp_kw": 0.0}, "radiated power 0 kW"),
        ({"frequency_mhz": np.inf}, "use 30 to 4000 MHz"),
    ],
)
def test_input_outside_the_recommendation_is_refused(changed, message):
    with pytest.raises(RangeError) as refused:
        field_strength(**{**KNOWN, **changed})
    assert message in str(refused.value)


def test_one_bad_row_of_a_batch_is_named():
    with pytest.raises(RangeError, match="frequency 25 MHz"):
        field_strength(**{**KNOWN, "frequency_mhz": [600.0, 25.0, 700.0]})
