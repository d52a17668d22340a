"""Channels that closed or are not yet on the air: left out of an answer, and named in it."""

from datetime import date

import pytest

from app.cautions import SHOWN_NAMES
from app.demo.scenario import ensure_demo
from app.planner import assess
from app.request import AssessRequest
from app.roof import Roof
from app.transmitters.store import Store
from app.transmitters.template import import_template

TODAY = date(2026, 12, 1)
HEAD = (
    "transmitter,latitude_deg,longitude_deg,multiplex,channel,raster,system,mode,erp_kw,polarisation,antenna_agl_m,"
    "valid_from,valid_to"
)


@pytest.fixture
def told(demo_world, tmp_path):
    """Cautions about what is off the air, for rows of multiplex, channel, first and last day."""

    def ask(*rows, reach_km=150.0):
        lines = [
            f"Old Mast,44.35,-37.30,{name},{channel},europe-uhf-8,DVB-T2,64-QAM 2/3,1,horizontal,60,{first},{last}"
            for name, channel, first, last in rows
        ]
        path = tmp_path / "mine.csv"
        path.write_text("\n".join([HEAD, *lines]))
        store = Store.open(tmp_path / "data")
        ensure_demo(store)
        import_template(path, store)
        request = AssessRequest(Roof(44.3, -37.4507), now="roof-yagi", reach_km=reach_km)
        answer = assess(request, store, demo_world.ground, TODAY)
        channels = {one["channel"] for one in answer["emissions"]}
        return [one for one in answer["cautions"] if "Not on the air" in one], channels

    return ask


def test_what_closed_and_what_is_yet_to_come_is_named_with_its_day(told):
    cautions, channels = told(
        ("Blue", 30, "", ""),
        ("Green", 33, "", "2026-11-30"),
        ("Red", 36, "2027-03-01", ""),
        ("Grey", 39, "", "2026-12-01"),
    )
    assert cautions == [
        "Not on the air on 2026-12-01 and left out: Green on channel 33 from Old Mast (closed on 2026-11-30), "
        "Red on channel 36 from Old Mast (not on the air before 2027-03-01)."
    ]
    assert channels == {"30", "39"}  # the last day is a day on the air


def test_a_row_that_another_one_follows_is_not_told(told):
    assert told(("Blue", 30, "", "2026-06-30"), ("Blue", 30, "2026-07-01", ""))[0] == []


def test_nothing_is_told_of_what_lies_out_of_reach(told):
    assert told(("Blue", 30, "", ""), ("Green", 33, "", "2026-11-30"), reach_km=2)[0] == []


def test_many_are_counted(told):
    rows = [(f"M{k}", k, "", "2025-12-31") for k in range(21, 29)]
    (caution,) = told(("Blue", 30, "", ""), *rows)[0]
    assert caution.count("closed on") == SHOWN_NAMES
    assert caution.endswith("and 3 more.")
