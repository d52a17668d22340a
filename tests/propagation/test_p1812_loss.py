"""Basic transmission loss by P.1812 as a whole: limits, trends, symmetry, batches, refusals."""

from dataclasses import FrozenInstanceError, fields

import numpy as np
import pytest
from pyproj import Geod

from propagation.errors import RangeError
from propagation.p1812 import PathTerms, basic_loss, loss_of_path, path_terms, stacked_paths

TIMES = np.array([1.0, 2, 5, 10, 20, 35, 50])
SPHERE = Geod(a=6371000, b=6371000)


def relief(seed, points=200, roughness_m=25.0):
    rng = np.random.default_rng(seed)
    return np.abs(np.cumsum(rng.normal(0, roughness_m, points)))


def arguments(terrain, length_km=60.0, **changes):
    distance = np.linspace(0, length_km, terrain.shape[-1])
    lon, lat, _ = SPHERE.fwd(8.0, 49.0, 40.0, 1000 * length_km)
    given = {
        "distance_km": distance,
        "terrain_amsl_m": terrain,
        "clutter_height_m": np.zeros(distance.size),
        "zone": np.full(distance.size, 4),
        "frequency_mhz": 600.0,
        "time_percent": 50.0,
        "tx_height_agl_m": 80.0,
        "rx_height_agl_m": 10.0,
        "polarisation": "horizontal",
        "tx_latitude_deg": 49.0,
        "tx_longitude_deg": 8.0,
        "rx_latitude_deg": lat,
        "rx_longitude_deg": lon,
        "delta_n_per_km": 45.0,
        "n0": 325.0,
    }
    return {**given, **changes}


def test_clear_short_path_has_the_loss_of_free_space():
    """5 km between masts of 200 m at 3 GHz: first Fresnel radius 11 m, clearance about 200 m."""
    result = basic_loss(**arguments(np.zeros(100), 5.0, frequency_mhz=3000, tx_height_agl_m=200, rx_height_agl_m=200))
    assert result.diffraction_median_db == 0
    # what stays is the mixture of mechanisms: sea-free notional minimum, ducting far above
    assert result.basic_loss_db == pytest.approx(result.loss_free_space_db, abs=0.05)


def test_field_of_1_kw_follows_from_the_loss():
    """Isotropic loss and field: E = P + 199.36 + 20 log f(GHz) - L (eq. (70)), half-wave dipole."""
    result = basic_loss(**arguments(relief(1), frequency_mhz=1000, erp_kw=[1, 100]))
    assert result.field_1kw_dbuv_m == pytest.approx(199.36 - result.basic_loss_db)
    np.testing.assert_allclose(result.field_dbuv_m - result.field_1kw_dbuv_m, [0, 20])


@pytest.mark.parametrize("seed", range(6))
def test_loss_never_falls_as_the_share_of_time_grows(seed):
    result = basic_loss(**arguments(relief(seed), time_percent=TIMES))
    assert (np.diff(result.basic_loss_db) >= -1e-9).all()


def test_1_percent_brings_far_more_than_50_percent_over_a_long_sea():
    """200 km of sea: Rec. ITU-R P.1546-6, Figures 12 and 14 (600 MHz, h1 = 75 m) have -2.1 and
    53.4 dB(uV/m), 55.5 dB apart; two empirical methods, so within 10 dB of that."""
    sea = arguments(
        np.zeros(400),
        200.0,
        zone=np.ones(400, dtype=int),
        time_percent=[1, 50],
        tx_height_agl_m=75,
        tx_distance_to_coast_km=0,
        rx_distance_to_coast_km=0,
    )
    loss = basic_loss(**sea).basic_loss_db
    assert loss[1] - loss[0] == pytest.approx(55.5, abs=10)


def test_time_equal_to_beta0_joins_both_branches():
    path = basic_loss(**arguments(relief(2)))
    beta0 = float(path.beta0_percent)
    assert 1 < beta0 < 50
    around = beta0 * np.array([1 - 1e-9, 1, 1 + 1e-9])
    loss = basic_loss(**arguments(relief(2), time_percent=around)).basic_loss_db
    np.testing.assert_allclose(loss, loss[1], atol=1e-6)


@pytest.mark.parametrize("seed", range(8))
def test_path_reads_the_same_from_both_ends(seed):
    """Every term of P.1812 at 50 % of locations is reciprocal; both ends change places."""
    rng = np.random.default_rng(seed)
    terrain, cover = relief(seed), rng.uniform(0, 15, 200)
    zone = np.where(np.arange(200) < 60 * (seed % 3), 1, 4)
    there = arguments(
        terrain,
        clutter_height_m=cover,
        zone=zone,
        tx_distance_to_coast_km=2.0,
        time_percent=TIMES,
    )
    back = {
        **there,
        "terrain_amsl_m": terrain[::-1],
        "clutter_height_m": cover[::-1],
        "zone": zone[::-1],
        "tx_height_agl_m": there["rx_height_agl_m"],
        "rx_height_agl_m": there["tx_height_agl_m"],
        "tx_latitude_deg": there["rx_latitude_deg"],
        "tx_longitude_deg": there["rx_longitude_deg"],
        "rx_latitude_deg": there["tx_latitude_deg"],
        "rx_longitude_deg": there["tx_longitude_deg"],
        "tx_distance_to_coast_km": 500.0,
        "rx_distance_to_coast_km": 2.0,
    }
    np.testing.assert_allclose(basic_loss(**there).basic_loss_db, basic_loss(**back).basic_loss_db, atol=1e-6)


def test_growing_ridge_never_lowers_the_loss():
    terrain = np.zeros((40, 101))
    terrain[:, 50] = np.linspace(0, 400, 40)
    loss = basic_loss(**arguments(terrain, 30.0)).basic_loss_db
    assert (np.diff(loss) >= -1e-9).all()
    assert loss[-1] > loss[0] + 20


def test_cover_on_the_way_adds_loss():
    cover = np.zeros(200)
    bare = basic_loss(**arguments(np.zeros(200)))
    cover[5:-5] = 20
    assert basic_loss(**arguments(np.zeros(200), clutter_height_m=cover)).basic_loss_db > bare.basic_loss_db


def test_polarisation_matters_over_sea_at_low_frequency_and_not_over_land_at_uhf():
    """Rec. ITU-R P.526-16, section 3.1.1.1: over land above 20 MHz, over sea above 300 MHz, none."""
    both = {"polarisation": ["horizontal", "vertical"], "frequency_mhz": [[40.0], [600.0]]}
    sea = basic_loss(**arguments(np.zeros(200), 150.0, zone=np.ones(200, dtype=int), **both))
    land = basic_loss(**arguments(np.zeros(200), 150.0, **both))
    assert sea.spherical_earth_median_db[0, 0] > sea.spherical_earth_median_db[0, 1] + 5
    assert np.ptp(land.spherical_earth_median_db[1]) < 0.3


def test_arrays_equal_one_by_one():
    terrain = np.stack([relief(seed) for seed in range(3)])
    frequency, time = np.array([60.0, 500, 800])[:, None, None], np.array([1.0, 50])[:, None]
    polarisation = np.array(["horizontal", "vertical", "horizontal"])[:, None, None]
    batch = basic_loss(**arguments(terrain, frequency_mhz=frequency, time_percent=time, polarisation=polarisation))
    assert batch.basic_loss_db.shape == (3, 2, 3)
    for i, j, k in np.ndindex(3, 2, 3):
        single = basic_loss(
            **arguments(
                terrain[k],
                frequency_mhz=frequency[i, 0, 0],
                time_percent=time[j, 0],
                polarisation=polarisation[i, 0, 0],
            )
        )
        assert single.basic_loss_db == pytest.approx(batch.basic_loss_db[i, j, k], abs=1e-9)


def test_paths_of_any_length_go_through_one_call():
    names = ("frequency_mhz", "time_percent", "polarisation", "n0")
    whole = [arguments(relief(seed, 100 + 50 * seed), 20.0 + 30 * seed) for seed in range(3)]
    stack = stacked_paths([path_terms(**{k: v for k, v in a.items() if k not in names}) for a in whole])
    batch = loss_of_path(stack, frequency_mhz=[[500.0], [700.0]], time_percent=50, polarisation="horizontal", n0=325)
    assert batch.basic_loss_db.shape == (2, 3)
    for i, given in enumerate(whole):
        single = basic_loss(**{**given, "frequency_mhz": [500.0, 700.0]})
        np.testing.assert_allclose(single.basic_loss_db, batch.basic_loss_db[:, i], atol=1e-9)


def test_lapse_of_0_means_the_true_earth():
    result = basic_loss(**arguments(relief(3), delta_n_per_km=0.0))
    assert result.median_effective_earth_radius_km == 6371


def test_missing_value_gives_no_loss_for_its_element_alone():
    result = basic_loss(**arguments(relief(4), frequency_mhz=[[600.0], [np.nan]], tx_height_agl_m=[80.0, np.nan, 80.0]))
    assert np.isnan(result.basic_loss_db).tolist() == [[False, True, False], [True, True, True]]


def test_extreme_ground_stays_finite():
    """Walls, trenches, 8 km peaks, 1 m antennas, 30 MHz to 6 GHz: finite, never far under free space.

    10 dB is more than short-term gains (4.4 dB at 1 %) and two equal mechanisms (1.5 dB) give.
    """
    rng = np.random.default_rng(5)
    for _ in range(60):
        points = int(rng.integers(5, 80))
        terrain = rng.choice([0.0, 1.0, 300.0, 8000.0], points) * rng.uniform(0, 1, points)
        result = basic_loss(
            **arguments(
                terrain,
                float(rng.choice([0.25, 3, 80, 900, 3000])),
                zone=rng.choice([1, 3, 4], points),
                frequency_mhz=np.array([30.0, 499, 500, 6000])[:, None],
                time_percent=TIMES,
                tx_height_agl_m=float(rng.choice([1, 50, 3000])),
                rx_height_agl_m=1.0,
                delta_n_per_km=float(rng.choice([-50, 0, 45, 156])),
            )
        )
        assert np.isfinite(result.basic_loss_db).all()
        assert (result.basic_loss_db > result.loss_free_space_db - 10).all()


def test_few_locations_cannot_beat_the_line_of_sight():
    """Eq. (69): the location term comes before the floor."""
    clear = arguments(np.zeros(100), 5.0, tx_height_agl_m=200, rx_height_agl_m=200)
    result = basic_loss(**clear, location_percent=[1, 50, 99], location_sigma_db=5.5)
    assert result.basic_loss_db[0] == result.loss_los_p_db
    assert result.basic_loss_db[2] > result.basic_loss_db[1] + 10


def test_entry_into_a_building_adds_its_median():
    outdoors = basic_loss(**arguments(relief(6)))
    indoors = basic_loss(**arguments(relief(6)), building_entry_median_db=14.0, building_entry_sigma_db=6.0)
    assert indoors.basic_loss_db == pytest.approx(outdoors.basic_loss_db + 14, abs=1e-6)


def test_record_is_frozen_and_holds_the_terms_of_the_path():
    result = basic_loss(**arguments(relief(7)))
    assert {field.name for field in fields(PathTerms)} < {field.name for field in fields(result)}
    with pytest.raises(FrozenInstanceError):
        result.basic_loss_db = 0


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"frequency_mhz": 25}, r"frequency 25 MHz is outside Rec. ITU-R P.1812-7: use 30 to 6000 MHz"),
        ({"frequency_mhz": [600, 6001]}, r"frequency 6001 MHz is outside"),
        ({"time_percent": 0.5}, r"share of time 0.5 % is outside .*: use 1 to 50 %"),
        ({"time_percent": 51}, r"share of time 51 % is outside"),
        ({"location_percent": 99.5}, r"share of locations 99.5 % is outside .*: use 1 to 99 %"),
        ({"n0": 32}, r"sea-level refractivity 32 N occurs nowhere: use 200 to 500 N"),
        ({"erp_kw": 0}, r"radiated power 0 kW gives no field: use more than 0 kW"),
        (
            {"polarisation": "circular"},
            r'polarisation "circular" is not known: use "horizontal" or "vertical"',
        ),
    ],
)
def test_quantity_outside_the_recommendation_is_refused(changes, message):
    with pytest.raises(RangeError, match=message):
        basic_loss(**arguments(relief(8), **changes))
