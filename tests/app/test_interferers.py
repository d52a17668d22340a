"""Which emissions are counted as interferers at a roof, and how."""

from dataclasses import replace

import numpy as np
import pytest

from app.assumptions import Assumptions
from app.chain.parts import Aerial, Amplifier, Chain, Filter, MastheadAmplifier, Outlet, Receiver
from app.demo.scenario import emissions, ensure_demo, transmitters
from app.fields import fields_at
from app.interferers import LAND_REACH_KM, interferers_at
from app.link_budget import Signals, receive
from app.loads import Beside, that_load
from app.planner import assess
from app.request import AssessRequest
from app.roof import Roof
from app.stored_chains import stored_chain
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


STEEP = Filter(id="guard", name="filter", loss_db=((470, 1), (693, 1), (695, 25), (703, 40), (900, 40)))


def with_filter(store, guard):
    """Return the demo's chain with a masthead amplifier that has a rating, a filter ahead of it or none."""
    chain = stored_chain(store, "high-gain-masthead")
    parts = []
    for part in chain.parts:
        parts += [replace(part, rated_output_dbuv=103.0)] if isinstance(part, Amplifier) else [part]
        parts += [guard] if guard is not None and isinstance(part, Aerial) else []
    return replace(chain, name="guarded" if guard else "bare", parts=tuple(parts))


def answered(store, ground):
    chains = [with_filter(store, guard) for guard in (None, STEEP)]
    answer = assess(AssessRequest(ROOF, chains=chains), store, ground)
    return next(row for row in answer["emissions"] if row["id"] == "far-island-48")["chains"]


def test_filter_saves_a_channel_from_a_mobile_block_beside_it_by_selectivity(store, demo_world):
    """Channel 48 ends at 694 MHz; a block of 694 to 704 MHz on the axis, too weak to load the amplifier."""
    quiet = answered(store, demo_world.ground)
    block = far("a", 5.0, 57, 0.05, 699.0, system="mobile", mode="", bandwidth_mhz=10.0, antenna_agl_m=30)
    on_the_air(store, block)
    cells = answered(store, demo_world.ground)
    assert cells["bare"]["held_back_by"]["emission"] == "a-1"
    assert cells["bare"]["margin_db"] < quiet["bare"]["margin_db"] - 10
    assert cells["guarded"]["margin_db"] > cells["bare"]["margin_db"] + 10
    assert cells["bare"]["outlets"][0]["headroom_db"] > 10


def test_filter_saves_the_amplifier_from_a_stored_mobile_block_far_beside(store, demo_world):
    """758 to 788 MHz is beside no channel: it acts through the amplifier alone, and a filter ahead helps."""
    quiet = answered(store, demo_world.ground)
    block = far("a", 0.08, 57, 4.0, 773.0, system="mobile", mode="", bandwidth_mhz=30.0, antenna_agl_m=30)
    on_the_air(store, block)
    cells = answered(store, demo_world.ground)
    assert cells["bare"]["outlets"][0]["headroom_db"] < 0 < cells["guarded"]["outlets"][0]["headroom_db"]
    assert cells["bare"]["held_back_by"]["limit"] == "overload"
    assert cells["bare"]["chance"] < 0.05
    assert cells["guarded"]["chance"] == pytest.approx(quiet["guarded"]["chance"], abs=0.15)


def test_unwanted_interferer_loads_the_amplifier_as_a_wanted_one_does():
    """Fields of the same emission, once among the signals and once beside them: the same products and headroom."""
    amplifier = MastheadAmplifier(id="m", name="m", gain_db=25, noise_figure_db=2, rated_output_dbuv=100)
    aerial = Aerial(id="a", name="a", gain_dbd=((470, 10), (700, 10)), beamwidth_deg=40, front_to_back_db=20)
    outlet, behind = Outlet(id="o", name="o"), Receiver(id="r", name="r")
    chain = Chain("c", (aerial, amplifier, outlet, behind))

    def signals(count):
        return Signals(
            np.array([490.0, 650.0])[:count], np.full(count, 7.77), np.full(count, 20.0), np.full(count, 6.0),
            np.array([0.0, 70.0])[:count], ("horizontal", "vertical")[:count],
        )  # fmt: skip

    beside = Beside(np.array([650.0]), np.array([115.0]), np.array([70.0]), ("vertical",))
    both = receive(chain, signals(2), np.array([60.0, 115.0]), 0.0, "horizontal", Assumptions())
    apart = receive(chain, signals(1), np.array([60.0]), 0.0, "horizontal", Assumptions(), beside=beside)
    alone = receive(chain, signals(1), np.array([60.0]), 0.0, "horizontal", Assumptions())
    assert apart.headroom_db[0] == pytest.approx(both.headroom_db[0], abs=1e-9)
    assert apart.margin_db[0] == pytest.approx(both.margin_db[0], abs=1e-9)
    assert apart.headroom_db[0] < alone.headroom_db[0] - 10


def test_what_is_left_out_loads_nothing():
    """All together at most 45 dB(µV) in a large aerial; 33.68 dB is a dipole's figure at 75 ohms."""
    field = np.array([90.0, 40.0, 20.0, -10.0])
    frequency = np.full(4, 650.0)
    kept = that_load(field, frequency)
    left = field[~kept] + 14 + 33.68 - 20 * np.log10(650.0)
    assert kept.tolist() == [True, False, False, False]
    assert 10 * np.log10((10 ** (left / 10)).sum()) < 45
