import dataclasses

import numpy as np
import pytest

from app.air_at import air_at
from app.assumptions import Assumptions
from app.at_aerial import room_error_db
from app.chain.catalogue import demo_chains
from app.chain.room import BUILDING_WORDS, entry_loss, room_loss_db
from app.chance import DEVIATES, Cells, ErrorPart, PathError
from app.errors import ChainError
from app.margins import turn
from app.request import AssessRequest
from app.roof import Roof
from app.stored_chains import stored_chain
from propagation.entry import BUILDINGS


def test_median_and_quantiles_are_those_of_the_recommendation():
    """Rec. ITU-R P.2109-2 at 600 MHz: medians 14.0 and 31.9 dB (D on S2, rounded)."""
    assert entry_loss(600).median_db == pytest.approx(14.0, abs=0.05)
    assert entry_loss(600, "thermally_efficient").median_db == pytest.approx(31.9, abs=0.05)


def test_distribution_is_no_normal_one():
    """A tail to high loss: the mean lies above the median, the upper step is larger than the lower."""
    loss = entry_loss([200, 600])
    assert (loss.mean_db > loss.median_db).all()
    assert (loss.high_db - loss.median_db > loss.median_db - loss.low_db).all()
    assert ((loss.sd_db > 5) & (loss.sd_db < 10)).all()


def test_moments_agree_with_random_rooms():
    """200 000 seeded draws: mean and spread within four standard errors of each."""
    draws = room_loss_db(600, np.random.default_rng(7).standard_normal(200_000))
    loss = entry_loss(600)
    assert loss.mean_db == pytest.approx(draws.mean(), abs=4 * draws.std() / np.sqrt(200_000))
    assert loss.sd_db == pytest.approx(draws.std(), rel=0.01)


def test_one_room_keeps_its_place_at_every_frequency():
    losses = room_loss_db(np.array([200.0, 600]), np.array([[-1.0], [0], [1]]))
    assert losses.shape == (3, 2)
    assert (np.diff(losses, axis=0) > 0).all()


def test_unknown_building_is_told_with_the_known_ones():
    with pytest.raises(ChainError, match=r'building "tent" is not known: use traditional \(brick, stone or timber'):
        entry_loss(600, "tent")
    assert set(BUILDING_WORDS) == set(BUILDINGS)


@pytest.mark.parametrize("median_db", [-6.0, 0.0, 5.0, 15.0])
@pytest.mark.parametrize("building", sorted(BUILDINGS))
def test_chance_in_a_room_is_that_of_the_recommendations_own_distribution(median_db, building):
    """200 000 seeded rooms of Rec. ITU-R P.2109-2, each with a normal error of 4 dB, counted."""
    aerial = dataclasses.replace(demo_chains()[0].aerial, place="room", building=building)
    sd_db, curve_db = room_error_db(aerial, np.array([600.0]), DEVIATES)
    path = PathError(("m",), np.zeros(1), np.array([4.0]), 0.5, 20.0)
    cells = Cells(np.array([median_db]), path, (ErrorPart(("room",), sd_db, curve_db),))
    rng = np.random.default_rng(5)
    rooms = room_loss_db(600, rng.standard_normal(200_000), building) - room_loss_db(600, 0.0, building)
    counted = (median_db - rooms + 4 * rng.standard_normal(200_000) >= 0).mean()
    assert cells.chance[0] == pytest.approx(counted, abs=0.005)
    assert (cells.draws() >= 0).mean() == pytest.approx(counted, abs=0.02)


def test_errors_of_a_room_move_all_emissions_of_one_roof_together(demo_world):
    request = AssessRequest(Roof(44.3, -37.4507))
    air = air_at(request, request.roof, demo_world.store, demo_world.ground, Assumptions()).air
    chain = stored_chain(demo_world.store, "loft-dipole")
    indoors = dataclasses.replace(chain.aerial, place="room")
    room = dataclasses.replace(chain, parts=tuple(indoors if part is chain.aerial else part for part in chain.parts))
    turned = turn(room, air, request.roof, sorted(set(air.multiplex_of)), Assumptions())
    assert turned.cells.curved is not None
    degree = round(turned.pointing_deg) % 360
    assert turned.sweep.chance[degree] == pytest.approx(turned.chance, abs=0.01)
    assert (turned.cells.draws() >= 0).mean(axis=0) == pytest.approx(turned.cells.chance, abs=0.02)
