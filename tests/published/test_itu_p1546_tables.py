"""Rec. ITU-R P.1546-6, Figures 1 to 24: the tabulated fields against the text's own rules."""

import csv
from importlib.resources import files

import numpy as np
import pytest

from propagation.p1546.tables import DISTANCES_KM, FREQUENCIES_MHZ, HEIGHTS_M, TIMES_PERCENT, field_tables

ROWS = list(
    csv.DictReader(files("propagation").joinpath("data/p1546_tables.csv").read_text(encoding="utf-8").splitlines())
)


def test_all_figures_are_there():
    """24 figures of 78 distances, 8 heights and the maximum: 16 848 numbers."""
    assert {int(row["figure"]) for row in ROWS} == set(range(1, 25))
    assert len(ROWS) == 24 * 78
    assert sum(len(row) - 5 for row in ROWS) == 16848


@pytest.mark.parametrize(
    ("figure", "distance", "column", "value"),
    [
        (1, "1", "field_10_m_dbuv_m", 89.9759),
        (1, "1", "field_300_m_dbuv_m", 103.1205),
        (1, "3", "field_20_m_dbuv_m", 77.5296),
        (1, "2", "maximum_dbuv_m", 100.8794),
    ],
)
def test_figures_as_published(figure, distance, column, value):
    """Numbers read by eye in the digital supplement's table of Figure 1."""
    row = next(r for r in ROWS if r["figure"] == str(figure) and r["distance_km"] == distance)
    assert float(row[column]) == value


def test_maximum_is_free_space_and_sea_enhancement():
    """Annex 5, eqs. (2) and (3); the tables print 4 decimals."""
    d, t = DISTANCES_KM, TIMES_PERCENT[:, None, None]
    free = 106.9 - 20 * np.log10(d)
    sea = free + 2.38 * (1 - np.exp(-d / 8.94)) * np.log10(50 / t)
    maximum = field_tables().maximum_dbuv_m
    assert np.abs(maximum[0] - free).max() < 5.1e-5
    assert np.abs(maximum[1:] - sea).max() < 5.1e-5


def test_no_curve_lies_above_its_maximum():
    tables = field_tables()
    assert (tables.field_dbuv_m <= tables.maximum_dbuv_m[..., None]).all()


def test_curves_fall_with_distance_and_rise_with_height():
    field = field_tables().field_dbuv_m
    assert field.shape == (3, 3, 3, 78, 8)
    assert not np.isnan(field).any()
    assert (np.diff(field, axis=3) <= 0).all()
    assert (np.diff(field, axis=4) >= 0).all()


def test_both_seas_share_the_curves_at_half_of_the_time():
    """Figures 4, 12 and 20 serve cold and warm sea."""
    field = field_tables().field_dbuv_m
    assert (field[1, 2] == field[2, 2]).all()
    assert (field[1, 0] != field[2, 0]).any()


def test_nominal_values_are_those_of_the_text():
    assert list(FREQUENCIES_MHZ) == [100, 600, 2000]
    assert list(TIMES_PERCENT) == [1, 10, 50]
    assert list(HEIGHTS_M) == [10, 20, 37.5, 75, 150, 300, 600, 1200]
    assert sorted({float(row["distance_km"]) for row in ROWS}) == list(DISTANCES_KM)
