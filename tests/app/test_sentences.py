"""The sentence of a path, one per kind, and where kind and terms could contradict each other."""

import pytest

from app.sentences import path_kind, path_sentence


@pytest.mark.parametrize(
    ("clearance_ratio", "beyond", "kind"),
    [
        (0.6, False, "clear"),
        (0.59, False, "grazing"),
        (0.0, False, "grazing"),
        (-0.01, False, "obstructed"),
        (0.7, True, "beyond the horizon"),
        (-3.0, True, "beyond the horizon"),
    ],
)
def test_kind_follows_clearance_and_the_horizon_comes_first(clearance_ratio, beyond, kind):
    """0.6 of the first Fresnel radius: Rec. ITU-R P.526, section on clearance criteria."""
    assert path_kind(clearance_ratio, beyond) == kind


def test_clear_path_says_by_how_much():
    told = path_sentence("clear", 24.2, 9.1, -61.0, 1.2, 0.0)
    assert told == "24 km, a clear line: it passes 61 m over the ground at its tightest, 9.1 km away."


def test_grazing_path_says_how_little_is_left():
    told = path_sentence("grazing", 8.04, 3.0, -7.0, 0.3, 0.0)
    assert told == "8.0 km, in sight but tight: only 7 m over the ground at 3.0 km, 0.3 of the first Fresnel radius."


def test_blocked_path_names_the_place_and_the_height():
    told = path_sentence("obstructed", 40, 14, 22.0, -0.8, 0.62)
    assert told == "40 km, 62% of the way over sea, blocked: the ground at 14 km stands 22 m into the line."


def test_path_beyond_the_horizon_names_the_curve_of_the_earth():
    told = path_sentence("beyond the horizon", 96, 31, 140.0, -2, 0.0)
    assert "beyond the horizon: ground and the Earth's curve at 31 km stand 140 m into the line" in told


def test_beyond_the_smooth_horizon_but_in_sight_is_not_called_blocked():
    """A mast on a peak seen from a peak: the smooth Earth would hide it, the real ground does not."""
    told = path_sentence("beyond the horizon", 140, 60, -12.0, 0.2, 0.0)
    assert "at the edge of the horizon: the line passes 12 m over the ground" in told
