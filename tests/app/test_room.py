import numpy as np
import pytest

from app.chain.room import BUILDING_WORDS, entry_loss, room_loss_db
from app.errors import ChainError
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
