"""The sentence of a path, one per kind, and where kind and terms could contradict each other."""

from dataclasses import replace

import pytest

from app.sentences import PathStory, path_kind, path_sentence

CLEAR = PathStory(
    kind="clear",
    distance_km=24.2,
    worst_point_km=9.1,
    into_line_m=-61.0,
    clearance_ratio=1.2,
    sea_share=0.0,
    standing="ground",
    near="ground",
    near_km=0.0,
    near_edge_db=0.0,
    bulge_m=8.0,
    diffraction_loss_db=0.0,
    curve_loss_db=0.0,
    brought_back_db=0.0,
)
BLOCKED = replace(
    CLEAR,
    kind="obstructed",
    distance_km=40,
    worst_point_km=14,
    into_line_m=62.0,
    clearance_ratio=-0.8,
    bulge_m=21.0,
    diffraction_loss_db=19.6,
)


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
    told = "24 km, a clear line: it passes 61 m over the ground at 9.1 km at its tightest."
    assert path_sentence(CLEAR) == told


def test_a_grazing_path_is_never_rounded_up_to_a_clear_one():
    """0.55 to 0.6 of the first radius would round to the 0.6 from which a line counts as clear."""
    for ratio, told in ((0.5999, "0.59"), (0.55, "0.55"), (0.0, "0")):
        story = replace(CLEAR, kind="grazing", into_line_m=-7.0, clearance_ratio=ratio)
        assert f", {told} of the first Fresnel radius" in path_sentence(story)


def test_grazing_path_says_how_little_is_left_and_what_it_costs():
    story = replace(
        CLEAR,
        kind="grazing",
        distance_km=8.04,
        worst_point_km=3.0,
        into_line_m=-7.0,
        clearance_ratio=0.3,
        diffraction_loss_db=4.4,
    )
    assert path_sentence(story) == (
        "8.0 km, in sight but tight: only 7 m over the ground at 3.0 km, "
        "0.3 of the first Fresnel radius, which costs 4 dB."
    )


def test_blocked_path_names_the_place_the_height_and_the_loss():
    assert path_sentence(replace(BLOCKED, sea_share=0.62)) == (
        "40 km, 62% of the way over sea, blocked: the ground at 14 km stands 62 m into the line, which costs 20 dB."
    )


def test_path_beyond_the_horizon_tells_ground_from_the_curve_of_the_earth():
    """Of 140 m in the line, 90 m of bulge leave a hill of 50 m; with 150 m of bulge the ground alone is clear."""
    story = replace(BLOCKED, kind="beyond the horizon", distance_km=96, worst_point_km=31, into_line_m=140.0)
    hill, curve = replace(story, bulge_m=90.0), replace(story, bulge_m=150.0)
    assert "beyond the horizon: the ground at 31 km stands 140 m into the line" in path_sentence(hill)
    assert "the Earth's curve lifts the ground at 31 km 140 m into the line" in path_sentence(curve)


def test_beyond_the_smooth_horizon_but_in_sight_is_not_called_blocked():
    """A mast on a peak seen from a peak: the smooth Earth would hide it, the real ground does not."""
    story = replace(
        BLOCKED,
        kind="beyond the horizon",
        distance_km=140,
        worst_point_km=60,
        into_line_m=-12.0,
        clearance_ratio=0.2,
        diffraction_loss_db=7.0,
        curve_loss_db=2.0,
    )
    told = path_sentence(story)
    assert "at the edge of the horizon: the line passes 12 m over the ground" in told
    assert "blocked" not in told


def test_clear_line_on_which_the_smooth_earth_costs_says_so():
    """A high ray over a valley between low ends: no ground near it, but the fitted smooth Earth is."""
    told = path_sentence(replace(CLEAR, diffraction_loss_db=5.2, curve_loss_db=5.2))
    assert told.endswith("at its tightest; the curve of the Earth still takes 5 dB.")


def test_house_in_front_is_not_called_ground():
    story = replace(
        BLOCKED, worst_point_km=0.03, near_km=0.03, into_line_m=5.0, bulge_m=0.0, diffraction_loss_db=0, near_edge_db=18
    )
    near = path_sentence(replace(story, standing="obstacle", near="obstacle"))
    assert near.endswith("blocked: the obstacle 30 m from the aerial stands 5 m into the line, which costs 18 dB.")
    assert "blocked: what stands round the roof reaches 5 m into" in path_sentence(
        replace(story, standing="surroundings", near="surroundings")
    )


def test_scatter_that_carries_most_of_it_is_told():
    told = path_sentence(replace(BLOCKED, kind="beyond the horizon", diffraction_loss_db=71, brought_back_db=22))
    assert told.endswith("which costs 71 dB; scatter and layers in the air bring back 22 dB.")


def test_small_terms_are_left_out():
    told = path_sentence(replace(BLOCKED, brought_back_db=0.5))
    assert "scatter" not in told
    assert "curve" not in path_sentence(replace(CLEAR, diffraction_loss_db=1.0, curve_loss_db=1.0))


def test_a_hill_is_not_charged_with_the_house_before_the_aerial():
    told = path_sentence(replace(BLOCKED, near="obstacle", near_km=0.02, near_edge_db=20.4))
    assert told.endswith("which costs 20 dB; the obstacle 20 m from the aerial takes 20 dB more.")
    house = replace(BLOCKED, standing="obstacle", near="obstacle", near_km=0.02, near_edge_db=31, into_line_m=9)
    assert path_sentence(house).endswith(
        "9 m into the line, which costs 31 dB; the ground on the way takes 20 dB more."
    )
