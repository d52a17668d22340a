"""Company of an emission: properties, networks, and registers that say impossible things."""

import itertools
from dataclasses import replace

import numpy as np
import pytest

from app.air import air_of
from app.assumptions import Assumptions
from app.chain.catalogue import demo_chains
from app.company import company_of
from app.fields import EmissionField, PathFacts
from app.interferers import Interferer
from app.margins import NEVER, multiplex_chances, turn
from app.roof import Roof
from app.transmitters.model import Emission, Transmitter
from propagation import p1546
from terrain.geodesy import destination

ROOF = Roof(44.3, -37.45)
LOFT, SHORT, LONG, AMPLIFIED = demo_chains()
PATH = PathFacts("", "clear", True, 1.0, 0.0, 100.0, 0.0, 40.0, 0.0, ("bare",), 3.0)
WANTED = ("a", 20.0, 55.0)


def emission(name, channel_mhz=650.0, multiplex=None, **changes):
    made = Emission(
        name,
        f"mast-{name}",
        multiplex or f"mux-{name}",
        "",
        channel_mhz,
        8,
        "DVB-T2",
        "256-QAM 2/3",
        1.0,
        "horizontal",
        100,
    )
    return replace(made, **changes)


def received_field(one, bearing_deg, field_dbuv_m, km=40.0, fade_db=2.0, enhancement_db=6.0):
    latitude, longitude = destination(ROOF.latitude_deg, ROOF.longitude_deg, bearing_deg, km)
    mast = Transmitter(one.transmitter_id, one.transmitter_id, float(latitude), float(longitude), None, "test")
    return EmissionField(
        one, mast, km, bearing_deg, 1.0, 90.0,
        path=PATH, p1546_dbuv_m=field_dbuv_m, p1812_dbuv_m=field_dbuv_m, used_dbuv_m=field_dbuv_m, method="p1812",
        fade_db=fade_db, enhancement_db=enhancement_db,
    )  # fmt: skip


def interferer(field):
    return Interferer(
        field.emission, field.transmitter, field.distance_km, field.bearing_deg, field.used_dbuv_m,
        field.enhancement_db, 3.0, False, True,
    )  # fmt: skip


def turned(wanted, others=(), chain=SHORT, pointing_deg=20.0, **assumed):
    air = air_of(wanted, [*map(interferer, wanted), *map(interferer, others)])
    fixed = replace(chain, pointing_deg=pointing_deg, polarisation="horizontal")
    return turn(fixed, air, ROOF, [one.emission.multiplex_id for one in wanted], Assumptions(assumed)), air


def margin(wanted, others=(), **rest):
    return float(turned(wanted, others, **rest)[0].margin_db[0])


ALONE = received_field(emission("a"), 20.0, 55.0)


def test_nothing_beside_an_emission_leaves_its_margin_to_noise():
    one, _ = turned([ALONE])
    assert one.margin_db[0] == pytest.approx(one.faded.margin_db[0])
    assert one.held_back()[0].limit in ("noise", "time")
    assert one.held_back()[0].by is None


def test_margin_is_the_lower_of_both_states():
    other = received_field(emission("b"), 100.0, 50.0, enhancement_db=15.0)
    one, _ = turned([ALONE], [other])
    assert one.state(0) == "b"
    assert one.margin_db[0] == pytest.approx(min(one.faded.margin_db[0], one.raised.margin_db[0]))
    held = one.held_back()[0]
    assert (held.limit, held.by, held.next_db) == ("interference", 1, None)


def test_state_a_lowers_the_wanted_and_b_raises_the_others_by_the_stated_amounts():
    """Far above noise the margins differ by the enhancement less the fade: arithmetic of decibels."""
    strong = received_field(emission("a"), 20.0, 95.0, fade_db=2.0)
    other = received_field(emission("b"), 100.0, 95.0, enhancement_db=15.0)
    one, _ = turned([strong], [other])
    assert one.faded.margin_db[0] - one.raised.margin_db[0] == pytest.approx(15.0 - 2.0, abs=0.05)


def test_next_interferer_is_told_in_decibels():
    others = [
        received_field(emission(*one), 100.0, level, km) for one, level, km in ((("b",), 70.0, 40), (("c",), 60.0, 50))
    ]
    assert turned([ALONE], others)[0].held_back()[0].next_db == pytest.approx(10.0)


@pytest.mark.parametrize("bearing_deg", [20.0, 60.0, 200.0])
@pytest.mark.parametrize("chain", [LOFT, SHORT, LONG], ids=lambda one: one.name)
def test_less_power_of_an_interferer_never_lowers_the_margin(bearing_deg, chain):
    margins = [
        margin([ALONE], [received_field(emission("b"), bearing_deg, level)], chain=chain)
        for level in (90.0, 70.0, 50.0, 30.0, 0.0, -60.0)
    ]
    assert all(later >= before for before, later in itertools.pairwise(margins))


def test_lower_pattern_at_the_interferer_alone_never_lowers_the_margin():
    """The wanted emission is on the axis, where front-to-back does not matter."""
    aerials = [replace(SHORT.aerial, front_to_back_db=ratio) for ratio in (10, 14, 18, 22, 26)]
    chains = [replace(SHORT, parts=(aerial, *SHORT.parts[1:])) for aerial in aerials]
    other = received_field(emission("b"), 200.0, 60.0)
    margins = [margin([ALONE], [other], chain=chain) for chain in chains]
    assert all(later >= before for before, later in itertools.pairwise(margins))
    assert margins[-1] > margins[0] + 5


@pytest.mark.parametrize("sea", [False, True])
def test_moving_an_interferer_away_over_smooth_earth_never_lowers_the_margin(sea):
    def moved(km):
        median, risen = (
            float(
                p1546.field_strength(
                    frequency_mhz=650.0, time_percent=share, path_length_km=km, h1_source_height_m=200.0,
                    land_km=0.0 if sea else km, cold_sea_km=km if sea else 0.0, rx_height_agl_m=10.0,
                    rx_environment="rural", erp_kw=10.0,
                ).field_dbuv_m
            )
            for share in (50.0, 1.0)
        )  # fmt: skip
        return received_field(emission("b"), 100.0, median, km=km, enhancement_db=max(0.0, risen - median))

    margins = [margin([ALONE], [moved(km)]) for km in (5.0, 20.0, 50.0, 80.0, 120.0, 180.0, 240.0, 400.0)]
    assert all(later >= before - 1e-9 for before, later in itertools.pairwise(margins))


def test_turning_away_from_an_interferer_lowers_what_it_does():
    other = received_field(emission("b"), 50.0, 55.0)
    _, air = turned([ALONE], [other])
    free = turn(replace(SHORT, pointing_deg=None), air, ROOF, ["mux-a"], Assumptions())
    assert (free.pointing_deg - 20.0 + 180) % 360 - 180 < 0  # beyond the wanted mast, away from the other


def test_spread_grows_with_interference_and_errors_of_one_mast_cancel():
    quiet, _ = turned([ALONE])
    elsewhere, _ = turned([ALONE], [received_field(emission("b"), 100.0, 75.0)])
    assert elsewhere.cells.sigma_db[0] > quiet.cells.sigma_db[0]
    beside = received_field(emission("c", 658.0, transmitter_id="mast-a"), 20.0, 115.0)
    together, _ = turned([ALONE], [replace(beside, transmitter=ALONE.transmitter)])
    assert together.held_back()[0].limit == "interference"
    assert together.cells.path.sd_db[0] < 0.5  # the path moves both alike


def test_equal_chains_differ_by_exactly_nothing_with_interference():
    other = received_field(emission("b"), 100.0, 60.0)
    one, two = (turned([ALONE], [other], chain=replace(SHORT, name=name))[0] for name in ("one", "two"))
    assert (one.cells.draws() == two.cells.draws()).all()


def test_interferers_summed_by_direction_are_those_summed_one_by_one():
    """Two of one direction and band, one of the other polarisation there, one elsewhere."""
    others = [
        received_field(emission("b"), 100.0, 60.0),
        received_field(emission("c"), 100.0, 57.0, km=90.0),
        received_field(emission("d", polarisation="vertical"), 100.0, 70.0, km=120.0),
        received_field(emission("e"), 200.0, 66.0),
    ]
    one, air = turned([ALONE], others)
    assert len(air.company.kinds.bearing_deg) == 4
    for effect in one.effects.values():
        assert effect.i_over_c[0] == pytest.approx(effect.brought.sum() / effect.carrier[0], rel=1e-12)
        who, over_c = effect.contributions(0)
        assert len(who) == 4
        assert over_c.sum() == pytest.approx(effect.i_over_c[0], rel=1e-12)


def test_what_is_hopeless_is_not_drawn_and_changes_no_chance():
    weak = received_field(emission("w", 690.0, multiplex="mux-a"), 20.0, -60.0, km=300.0)
    alone, air = turned([ALONE])
    both, air_of_both = turned([ALONE, weak])
    assert both.enough[1] < NEVER
    draws, by_itself = multiplex_chances(alone, air, ["mux-a"])
    again, chance = multiplex_chances(both, air_of_both, ["mux-a"])
    assert np.array_equal(draws, again)
    assert chance[0] == by_itself[0]


# Networks


def member(name, bearing_deg, field_dbuv_m, km, **changes):
    return received_field(
        emission(name, multiplex="net", guard="32K 1/128", static_delay_us=0.0, **changes),
        bearing_deg,
        field_dbuv_m,
        km,
    )


def test_members_inside_the_guard_interval_add_and_do_not_disturb():
    """Equal powers from one direction at equal distance: 3.01 dB, and no rise for a 0 dB echo."""
    alone = margin([member("a", 20.0, 55.0, 40.0)])
    both = margin([member("a", 20.0, 55.0, 40.0), member("b", 20.0, 55.0, 40.0)])
    assert both == pytest.approx(alone, abs=1e-6)  # one mast stated twice is no network


def test_two_masts_of_a_network_add_3_db():
    wanted = [member("a", 20.0, 50.0, 40.0), member("b", 20.0, 50.0, 40.02)]  # 0.07 µs apart
    one, air = turned(wanted)
    assert one.margin_db[0] == pytest.approx(margin(wanted[:1]) + 3.01, abs=0.01)
    assert one.margin_db[0] == pytest.approx(one.margin_db[1])
    assert air.company.acting.tolist() == [True, False]


def test_members_far_apart_in_time_disturb_each_other():
    late = [member("a", 20.0, 60.0, 20.0), member("b", 20.0, 60.0, 140.0)]  # 400 µs, guard 28 µs
    one, air = turned(late)
    assert one.margin_db[0] < 0
    assert one.held_back()[0].limit == "interference"
    assert air.company.pairs.disturber.size == 0  # no pair: it is self-interference


def test_network_of_one_member_is_no_network():
    assert turned([member("a", 20.0, 50.0, 40.0)])[1].company.networks == ()


def test_members_with_different_modes_disturb_each_other_and_it_is_said():
    wanted = [member("a", 20.0, 60.0, 40.0), member("b", 20.0, 60.0, 41.0, mode="64-QAM 2/3")]
    one, air = turned(wanted)
    assert one.held_back()[0].limit == "interference"
    assert any("do not send the same mode" in caution for caution in air.company.cautions)


def test_what_a_network_does_not_state_is_taken_and_said():
    wanted = [
        received_field(emission(name, multiplex="net"), 20.0, 60.0, km) for name, km in (("a", 40.0), ("b", 41.0))
    ]
    (caution,) = turned(wanted)[1].company.cautions
    assert "static delays taken as 0" in caution
    assert "guard interval taken as the usual 448 µs" in caution


def test_same_content_on_one_channel_without_guard_interval_disturbs_itself():
    atsc = {"system": "ATSC 1.0", "mode": "8-VSB", "bandwidth_mhz": 6.0}
    wanted = [
        received_field(emission(name, multiplex="net", **atsc), 20.0, 60.0, km)
        for name, km in (("a", 40.0), ("b", 41.0))
    ]
    one, air = turned(wanted)
    assert one.held_back()[0].limit == "interference"
    assert any("has no guard interval" in caution for caution in air.company.cautions)


# Registers that say impossible things


def test_frequency_and_place_claimed_twice_count_once():
    other = received_field(emission("b"), 100.0, 60.0)
    again = replace(other, emission=replace(other.emission, id="b2", erp_kw=0.5))
    assert margin([ALONE], [other, again]) == pytest.approx(margin([ALONE], [other]))
    twin = replace(ALONE, emission=replace(ALONE.emission, id="a2", multiplex_id="mux-a2"))
    assert margin([ALONE, twin]) == pytest.approx(margin([ALONE]))
    assert any("stated twice" in caution for caution in turned([ALONE, twin])[1].company.cautions)


def test_pair_without_a_figure_takes_the_fallback_and_says_so():
    unknown = received_field(emission("b", 658.0, system="unheard-of", mode="any"), 20.0, 110.0)
    company = turned([replace(ALONE, emission=emission("a", system="ISDB-T", mode="64-QAM 3/4"))], [unknown])[1].company
    assert any("no figure for this pair" in rule for rule in company.pairs.rule)


def test_no_wanted_emission_needs_no_company():
    company = company_of([], [])
    assert company.pairs.disturber.size == 0


def test_margins_are_finite_whatever_the_interferer():
    extreme = [received_field(emission(str(k)), 100.0, level) for k, level in enumerate((-400.0, 0.0, 190.0))]
    one, _ = turned([ALONE], extreme)
    assert np.isfinite(one.margin_db).all()
    assert np.isfinite(one.cells.sigma_db).all()
    assert np.isfinite(one.sweep_count).all()
