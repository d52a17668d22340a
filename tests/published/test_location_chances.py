"""Chances against the location statistics of coverage planning.

GE06 and Rec. ITU-R BT.1368 plan with a standard deviation of 5.5 dB over locations; "acceptable" reception is 70 % and
"good" reception 95 % of locations, with location factors of 0.52 and 1.64 (2.33 for 99 %), as tests/data/itu/
planning_chains/worked_chains.csv tells (MH).
"""

import csv
from pathlib import Path

import numpy as np
import pytest

from app.chance import exceedance
from app.planning_field import minimum_field

TABLE = Path(__file__).parents[1] / "data" / "itu" / "planning_chains" / "worked_chains.csv"
ROWS = [row for row in csv.DictReader(TABLE.read_text(encoding="utf-8").splitlines()) if row["flag"] in ("MH", "D")]
INPUTS = (
    "frequency_mhz", "noise_bandwidth_mhz", "noise_figure_db", "required_cn_db", "gain_dbd", "feeder_loss_db",
    "location_percent", "location_sd_db", "entry_loss_sd_db", "man_made_allowance_db", "height_loss_db",
    "entry_loss_db",
)  # fmt: skip


@pytest.mark.parametrize(("factor", "percent"), [(0.52, 70), (1.64, 95), (2.33, 99)])
def test_location_factors_of_planning_give_their_share_of_places(factor, percent):
    """Printed with two digits: 0.005 in the factor is at most 0.2 points at 70 %."""
    assert 100 * exceedance(np.array(factor * 5.5), np.array(5.5)) == pytest.approx(percent, abs=0.2)


@pytest.mark.parametrize("percent", [70, 95])
@pytest.mark.parametrize("row", ROWS, ids=lambda row: row["id"])
def test_a_roof_at_the_planned_median_field_has_the_planned_chance(row, percent):
    """At the median field that a plan asks for, the margin above the least field has the plan's chance."""
    got = minimum_field(**{key: float(row[key]) for key in INPUTS} | {"location_percent": percent})
    margin = got.location_correction_db
    spread = np.hypot(float(row["location_sd_db"]), float(row["entry_loss_sd_db"]))
    assert exceedance(np.array(margin), np.array(spread)) == pytest.approx(percent / 100, abs=1e-9)
    table = float(row["median_field_dbuv_m"]) if percent == float(row["location_percent"]) else None
    if table is not None:
        others = got.man_made_allowance_db + got.height_loss_db + got.entry_loss_db
        chance = exceedance(np.array(table - others - got.minimum_field_dbuv_m), np.array(spread))
        assert chance == pytest.approx(percent / 100, abs=0.004)  # the table's factors have two digits


def test_both_location_classes_are_compared():
    assert len(ROWS) == 11
    assert {float(row["location_percent"]) for row in ROWS} >= {95.0}
