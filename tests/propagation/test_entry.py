import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from propagation.entry import BUILDINGS, building_entry_loss_db, entry_loss_at_deviate_db
from propagation.errors import RangeError


@pytest.mark.parametrize("building", BUILDINGS)
@given(frequency_mhz=st.floats(80, 3000), share=st.floats(0.01, 0.98))
def test_loss_rises_with_the_share_of_rooms(building, frequency_mhz, share):
    lower, higher = building_entry_loss_db(frequency_mhz, [share, share + 0.01], building)
    assert lower < higher
    assert lower > -3 - 1e-9  # C bounds it


@pytest.mark.parametrize("building", BUILDINGS)
def test_deviate_stands_for_its_probability(building):
    assert entry_loss_at_deviate_db(600, 0, building) == building_entry_loss_db(600, 0.5, building)
    assert entry_loss_at_deviate_db(600, 1.2815515655, building) == pytest.approx(
        building_entry_loss_db(600, 0.9, building)
    )


def test_efficient_buildings_keep_more_out():
    shares = np.linspace(0.05, 0.95, 19)
    frequencies = np.array([[100.0], [200], [600], [1000]])
    assert (
        building_entry_loss_db(frequencies, shares, "thermally_efficient")
        > building_entry_loss_db(frequencies, shares, "traditional")
    ).all()


def test_ray_from_above_and_from_below_lose_the_same():
    assert building_entry_loss_db(600, 0.5, "traditional", -20) == building_entry_loss_db(600, 0.5, "traditional", 20)


def test_batch_equals_one_by_one_and_nan_stays():
    frequencies, shares = np.array([100.0, 500, np.nan]), np.array([[0.1], [0.5]])
    batch = building_entry_loss_db(frequencies, shares, "traditional")
    assert batch[1, 1] == building_entry_loss_db(500, 0.5, "traditional")
    assert np.isnan(batch[:, 2]).all()


@pytest.mark.parametrize(
    ("arguments", "message"),
    [
        ((50, 0.5, "traditional"), "frequency 50 MHz is outside Rec. ITU-R P.2109-2: use 80 to 100000 MHz"),
        ((600, 1.0, "traditional"), "leave out both ends"),
        ((600, 0.5, "tent"), 'building "tent" is not in .*: use traditional or thermally_efficient'),
        ((600, 0.5, "traditional", 91), "use -90 to 90 degrees"),
    ],
)
def test_outside_the_recommendation_is_told(arguments, message):
    with pytest.raises(RangeError, match=message):
        building_entry_loss_db(*arguments)
