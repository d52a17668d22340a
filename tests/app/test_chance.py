"""The joint error model against the normal distribution and itself."""

import numpy as np
import pytest

from app.chance import DRAWS, Cells, ErrorPart, PathError, bearing_field, exceedance, grade, normals, received


def cells(median_db, path_sd_db=5.0, masts=("a", "b"), bearings=(10.0, 200.0), parts=()):
    path = PathError(masts, np.array(bearings), np.full(len(masts), path_sd_db), 0.5, 20.0)
    return Cells(np.array(median_db, dtype=float), path, tuple(parts))


@pytest.mark.parametrize(("percent", "quantile"), [(50, 0.0), (70, 0.5244), (90, 1.2816), (95, 1.6449), (99, 2.3263)])
def test_chance_is_the_normal_distribution(percent, quantile):
    """Quantiles of the standard normal, any handbook (Abramowitz and Stegun, table 26.5); four digits."""
    assert exceedance(np.array(quantile * 5.5), np.array(5.5)) == pytest.approx(percent / 100, abs=2e-5)


def test_no_spread_decides_by_sign():
    assert exceedance(np.array([-0.1, 0.0, 0.1]), np.zeros(3)).tolist() == [0, 1, 1]


def test_spreads_add_by_squares():
    part = ErrorPart(("roof", "roof"), np.array([12.0, 0.0]))
    assert cells([0, 0], parts=[part]).sigma_db.tolist() == [13.0, 5.0]


def test_draws_have_the_stated_median_and_spread():
    drawn = cells([3.0, -2.0], parts=[ErrorPart(("roof", "roof"), np.array([2.0, 2.0]))]).draws()
    assert drawn.shape == (DRAWS, 2)
    assert drawn.mean(axis=0) == pytest.approx([3.0, -2.0], abs=0.02)
    assert drawn.std(axis=0) == pytest.approx(np.sqrt(29), rel=0.03)


@pytest.mark.parametrize(("apart_deg", "expected"), [(0.0, 0.5), (20.0, 0.5 / np.e), (180.0, 0.0), (340.0, 0.5 / np.e)])
def test_masts_correlate_by_their_difference_of_bearing(apart_deg, expected):
    """0.5 exp(-difference / 20 degrees), the shorter way round; sampling error 1 / sqrt(4096) = 0.016."""
    drawn = cells([0, 0], bearings=(30.0, (30.0 + apart_deg) % 360)).draws()
    assert np.corrcoef(drawn.T)[0, 1] == pytest.approx(expected, abs=0.05)


def test_one_mast_moves_all_its_emissions_alike():
    drawn = cells([0, 1], masts=("a", "a"), bearings=(30.0, 30.0)).draws()
    assert np.ptp(drawn[:, 1] - drawn[:, 0]) < 1e-9


def test_another_emission_leaves_the_draws_as_they_were():
    alone = cells([1.0], masts=("a",), bearings=(10.0,)).draws()
    beside = cells([1.0, -30.0], masts=("a", "z")).draws()
    assert np.array_equal(alone[:, 0], beside[:, 0])


def test_some_of_the_margins_have_the_draws_that_they_have_among_all():
    every = cells([1.0, -30.0], parts=[ErrorPart(("roof", "roof"), np.array([2.0, 1.0]))])
    assert np.array_equal(every.of([1]).draws()[:, 0], every.draws()[:, 1])


def test_a_key_always_has_the_same_sample_of_the_normal():
    assert np.array_equal(normals("roof"), normals("roof"))
    assert not np.array_equal(normals("roof"), normals("mast"))
    assert abs(np.corrcoef(normals("roof"), normals("mast"))[0, 1]) < 0.06
    assert normals("roof").std() == pytest.approx(1, abs=1e-9)


def test_field_over_bearing_has_unit_spread():
    assert bearing_field(123.0, 20.0).std() == pytest.approx(1, abs=0.05)


def test_a_multiplex_is_received_if_one_of_its_emissions_is():
    draws = np.array([[1.0, -1.0, -1.0], [-1.0, 1.0, -1.0], [-1.0, -1.0, 1.0]])
    assert received(draws, ("m", "m", "n"), ("m", "n")).tolist() == [
        [True, False],
        [True, False],
        [False, True],
    ]


def test_grades_begin_at_the_location_classes_of_ge06():
    """GE06 plans with 70 and 95 % of locations (from memory)."""
    assert [grade(p) for p in (1.0, 0.95, 0.949, 0.70, 0.699, 0.30, 0.299, 0.0)] == [
        "secure", "secure", "likely", "likely", "open", "open", "doubtful", "doubtful",
    ]  # fmt: skip
