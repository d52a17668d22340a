"""Which emissions are counted as interferers at a roof, and how."""

from dataclasses import replace

import numpy as np
import pytest

from app.assumptions import Assumptions
from app.demo.scenario import emissions, ensure_demo, transmitters
from app.fields import fields_at
from app.interferers import LAND_REACH_KM, interferers_at
from app.planner import assess
from app.request import AssessRequest
from app.roof import Roof
from app.transmitters.model import Emission, Multiplex, Transmitter
from app.transmitters.rows import Source
from app.transmitters.store import DEMO_SOURCE, Store
from terrain.geodesy import destination

ROOF = Roof(44.3, -37.4507)


@pytest.fixture
def store(tmp_path):
    made = Store.open(tmp_path)
    ensure_demo(made)
    return made


def on_the_air(store, *others):
    """Put the demo's masts with others in the place of the demo; what is found within 500 km."""
    masts = [replace(one, source=DEMO_SOURCE) for one in transmitters()] + [mast for _, mast in others]
    sent = [*emissions(), *(emission for emission, _ in others)]
    names = sorted({one.multiplex_id for one in sent})
    store.replace_source(Source(DEMO_SOURCE, "all"), masts, sent, [Multiplex(name, name) for name in names])
    return store.emissions_within(ROOF.latitude_deg, ROOF.longitude_deg, 500)


def far(name, km, bearing_deg=59.0, erp_kw=100.0, channel_mhz=642.0, **changes):
    latitude, longitude = destination(ROOF.latitude_deg, ROOF.longitude_deg, bearing_deg, km)
    mast = Transmitter(name, name, float(latitude), float(longitude), 200.0, DEMO_SOURCE)
    sent = Emission(
        f"{name}-1", name, f"mux-{name}", "", channel_mhz, 8, "DVB-T2", "256-QAM 2/3", erp_kw, "horizontal", 200
    )
    return replace(sent, **changes), mast


def found_beyond(store, ground, *others):
    rows = on_the_air(store, *others)
    wanted = [row for row in rows if row[2] <= 150]
    fields = fields_at(ROOF, wanted, ground, Assumptions(), 99)
    known = {field.emission.id for field in fields if field.path is not None}
    ones = interferers_at(ROOF, fields, rows, ground, Assumptions(), 99)
    assert [one.emission.id for one in ones[: len(known)]] == [f.emission.id for f in fields if f.path is not None]
    return {one.emission.id: one for one in ones[len(known) :]}


def test_interferer_without_ground_counts_without_terrain(store, demo_world):
    one = found_beyond(store, demo_world.ground, far("a", 200))["a-1"]
    assert not one.over_ground
    assert np.isfinite(one.field_dbuv_m)
    assert one.enhancement_db > 0
    answer = assess(AssessRequest(ROOF), store, demo_world.ground)
    assert any("without the ground on its way" in caution for caution in answer["cautions"])


def test_reach_over_land_ends_at_250_km(store, demo_world):
    """Outside all rasters nothing is known to be sea, so the shorter reach holds."""
    near, beyond = far("a", LAND_REACH_KM - 10, 270), far("b", LAND_REACH_KM + 30, 270)
    assert set(found_beyond(store, demo_world.ground, near, beyond)) == {"a-1"}


def test_channel_that_no_wanted_emission_is_near_is_left_out(store, demo_world):
    assert found_beyond(store, demo_world.ground, far("a", 200, channel_mhz=794.0)) == {}


def test_what_stays_far_below_noise_is_left_out(store, demo_world):
    assert found_beyond(store, demo_world.ground, far("a", 240, erp_kw=1e-6)) == {}


def test_interferer_on_the_roof_itself_counts_as_standing_50_m_away(store, demo_world):
    """Free space over 50 m from 1 W: 106.92 - 30 + 26.02 = 102.94 dB(µV/m), Rec. ITU-R P.525."""
    one = found_beyond(store, demo_world.ground, far("a", 0.0, erp_kw=1e-3))["a-1"]
    assert one.field_dbuv_m <= 102.95
    answer = assess(AssessRequest(ROOF), store, demo_world.ground)
    disturbed = next(row for row in answer["emissions"] if row["id"] == "far-island-42")
    assert disturbed["chains"]["roof-yagi"]["margin_db"] < -20


def test_block_of_a_mobile_network_disturbs_and_is_never_wanted(store, demo_world):
    block = far("a", 2.0, 140, 1.0, 699.0, system="mobile", mode="", bandwidth_mhz=10.0)
    on_the_air(store, block)
    answer = assess(AssessRequest(ROOF), store, demo_world.ground)
    assert "a-1" not in {row["id"] for row in answer["emissions"]}
    disturbed = next(row for row in answer["emissions"] if row["id"] == "far-island-48")["chains"]["roof-yagi"]
    assert disturbed["held_back_by"]["emission"] == "a-1"
