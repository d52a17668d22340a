"""Chances stay within 0 and 1 and move the way that physics does."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.assumptions import Assumptions
from app.chain.parts import Feeder, Outlet
from app.chance import exceedance
from app.demo.scenario import DEMO_ROOFS
from app.fields import fields_at
from app.interferers import interferers_at
from app.margins import air_of, expected_count, turn
from app.roof import Roof
from app.stored_chains import stored_chain

ROOF = Roof(DEMO_ROOFS[3].latitude_deg, DEMO_ROOFS[3].longitude_deg)
ASSUMED = Assumptions()


@given(margin=st.floats(-200, 200), spread=st.floats(0, 30))
def test_a_chance_stays_within_0_and_1(margin, spread):
    assert 0 <= float(exceedance(np.array(margin), np.array(spread))) <= 1


@given(margin=st.floats(0, 100), loss=st.floats(0, 60), spread=st.floats(0.1, 20))
def test_more_loss_interference_or_noise_never_raises_a_chance(margin, loss, spread):
    """Each of them lowers C/(N+I) and so the margin, at the same spread."""
    chances = exceedance(np.array([margin, margin - loss]), np.full(2, spread))
    assert chances[1] <= chances[0]


@pytest.fixture(scope="module")
def air(demo_world):
    found = demo_world.store.emissions_within(ROOF.latitude_deg, ROOF.longitude_deg, 150)
    fields = fields_at(ROOF, found, demo_world.ground, ASSUMED, 99)
    return air_of(fields, interferers_at(ROOF, fields, found, demo_world.ground, ASSUMED, 99))


def count(chain, air):
    turned = turn(chain, air, ROOF, sorted(set(air.multiplex_of)), ASSUMED)
    return float(expected_count(turned.chance, air.multiplex_of, sorted(set(air.multiplex_of))))


@settings(max_examples=15, deadline=None)
@given(gain=st.floats(0, 6), length=st.floats(0, 1), loss=st.floats(0, 1))
def test_a_part_that_is_better_in_every_figure_never_lowers_the_expected_count(demo_world, air, gain, length, loss):
    """More gain with the same pattern, a shorter run of the same feeder, a better outlet."""
    chain = stored_chain(demo_world.store, "roof-yagi")
    aerial = replace(chain.aerial, gain_dbd=tuple((f, g + gain) for f, g in chain.aerial.gain_dbd))
    better = [aerial]
    for part in chain.parts[1:]:
        if isinstance(part, Feeder):
            part = replace(part, length_m=part.length_m * length)
        if isinstance(part, Outlet):
            part = replace(part, loss_db=part.loss_db * loss)
        better.append(part)
    assert count(replace(chain, parts=tuple(better)), air) >= count(chain, air) - 1e-9


@settings(max_examples=10, deadline=None)
@given(figure=st.floats(0, 4))
def test_a_quieter_amplifier_never_lowers_the_expected_count(demo_world, air, figure):
    chain = stored_chain(demo_world.store, "high-gain-masthead")
    noisy = replace(chain.parts[1], noise_figure_db=4.0)
    quiet = replace(chain.parts[1], noise_figure_db=figure)
    one, other = (replace(chain, parts=(chain.parts[0], part, *chain.parts[2:])) for part in (noisy, quiet))
    assert count(other, air) >= count(one, air) - 1e-9
