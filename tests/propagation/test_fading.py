"""Two time states: the rule's own limits; what it is built of is checked with its models."""

import numpy as np
import pytest

from propagation.constants import EARTH_RADIUS_KM
from propagation.digest import path_digest
from propagation.errors import RangeError
from propagation.fading import enhancement_db, fade_db, subrefraction_db

OURS = {"least_fade_99_db": 1.5, "sea_fade_99_db": 3.0, "fade_share_90": 0.55}


def fade(availability=99.0, x=4.0, up=8.0, sight=False, sea_km=0.0):
    return fade_db(
        availability,
        subrefraction_db=x,
        enhancement_1_db=up,
        line_of_sight=sight,
        sea_km=sea_km,
        **OURS,
    )


def flat(length_km, antenna=100.0, aerial=10.0):
    x = np.linspace(0, length_km, 101)
    return path_digest(x, np.zeros(101), np.full(101, 4), antenna, aerial, 4 / 3 * EARTH_RADIUS_KM)


def test_fade_is_the_lesser_of_its_two_causes():
    assert fade(x=4.0, up=8.0) == 4
    assert fade(x=9.0, up=8.0) == 8


def test_every_path_fades_a_little():
    assert fade(x=0.0) == 1.5
    assert fade(x=-2.0, up=-1.0) == 1.5


def test_sea_in_sight_beyond_20_km_fades_by_its_reflection():
    assert fade(x=0.0, sight=True, sea_km=21.0) == 3
    assert fade(x=0.0, sight=True, sea_km=20.0) == 1.5
    assert fade(x=0.0, sight=False, sea_km=90.0) == 1.5
    assert fade(x=5.0, sight=True, sea_km=90.0) == 5


def test_less_availability_fades_less():
    """0.55 is the ratio of the normal quantiles, 1.2816 / 2.3263."""
    assert fade(90.0) == pytest.approx(0.55 * 4)
    assert fade(50.0) == 0
    assert OURS["fade_share_90"] == pytest.approx(1.2816 / 2.3263, abs=0.002)


def test_sea_fade_shrinks_with_the_availability_too():
    assert fade(90.0, x=0.0, sight=True, sea_km=50.0) == pytest.approx(0.55 * 3)


def test_fades_broadcast_and_keep_no_value():
    result = fade(x=np.array([2.0, np.nan, 9.0]))
    assert result[[0, 2]].tolist() == [2, 8]
    assert np.isnan(result[1])


def test_other_availability_is_refused():
    with pytest.raises(RangeError, match="use 50, 90 or 99 %"):
        fade(95.0)


def test_rise_of_an_interferer_is_never_a_fall():
    assert enhancement_db([50.0, 40.0], 42.0).tolist() == [8, 0]


def test_path_high_above_the_ground_loses_nothing_to_straight_rays():
    assert subrefraction_db(flat(15.0, 400.0, 200.0), 600.0, "horizontal", 325.0) == pytest.approx(0, abs=1e-6)


def test_path_at_its_horizon_loses_most_to_straight_rays():
    """Out of sight diffraction grows by several dB; far beyond, scatter takes over and only its angle grows.

    Angle d/a - sqrt(2 h1/a) - sqrt(2 h2/a), 0.573 dB per mrad (P.1812 eq. 44); from k = 4/3 to 1 over
    300 km, 100 and 10 m: 11.77 - 0.134 (5.60 + 1.77) = 10.78 mrad.
    """
    near, horizon, far = (float(subrefraction_db(flat(d), 600.0, "horizontal", 325.0)) for d in (20.0, 60.0, 300.0))
    assert near < 3 < horizon
    assert far == pytest.approx(0.573 * 10.78, abs=0.1)  # horizons lie on points of the profile


def test_subrefraction_broadcasts_over_emissions():
    path = flat(60.0)
    f = np.array([100.0, 200.0, 600.0])
    batch = subrefraction_db(path, f, ["horizontal", "vertical", "vertical"], 325.0)
    assert batch[2] == subrefraction_db(path, 600.0, "vertical", 325.0)
