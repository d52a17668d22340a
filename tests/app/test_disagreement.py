"""Why two methods stand apart: the reason is the term that makes the difference."""

import pytest

from app.disagreement import Terms, apart_reason


def terms(**given):
    none = dict.fromkeys(
        ("curves_db", "clearance_angle_db", "surroundings_db", "obstacle_db", "p1546_scatter_db", "near_edge_db",
         "diffraction_db", "brought_back_db"), 0.0
    )  # fmt: skip
    facts = {"clearance_angle_deg": -0.2, "effective_height_m": 120.0, "line_of_sight": False}
    return Terms(**(none | facts | given))


@pytest.mark.parametrize(
    ("given", "words"),
    [
        (
            {"clearance_angle_db": 15.0, "curves_db": 3.0, "clearance_angle_deg": 3.7, "line_of_sight": True},
            "P.1546 shows 18 dB less: it takes 15 dB for ground that rises 3.7° before the aerial, however high the "
            "antenna stands, where P.1812 finds the line to the antenna clear.",
        ),
        ({"curves_db": 34.0, "diffraction_db": 4.0, "effective_height_m": 12.0}, "antenna 12 m over the mean ground"),
        ({"curves_db": 80.0, "diffraction_db": 51.0, "effective_height_m": -612.0}, "612 m below the mean ground"),
        ({"surroundings_db": 17.0, "diffraction_db": 1.0}, "for the height of the aerial among what stands round it"),
        ({"near_edge_db": 24.0, "surroundings_db": 8.0}, "takes 24 dB for what stands round the roof, where P.1546"),
        ({"curves_db": 50.0, "diffraction_db": 70.0, "brought_back_db": 45.0}, "layers in the air bring back 45 dB"),
        ({"diffraction_db": 41.0, "curves_db": 14.0, "clearance_angle_db": 5.0}, "finds 41 dB of diffraction"),
        ({"diffraction_db": 60.0, "curves_db": 60.0, "p1546_scatter_db": 20.0}, "in P.1546, scatter in the air brings"),
    ],
)
def test_reason_is_the_largest_term_of_the_method_with_less_field(given, words):
    made = terms(**given)
    told = apart_reason(made.difference_db, made)
    assert words in told
    assert told.startswith("P.1546" if made.difference_db > 0 else "P.1812")
    assert f"{abs(made.difference_db):.0f} dB less" in told


def test_up_to_15_db_nothing_is_marked():
    assert apart_reason(15.0, terms(curves_db=15.0)) is None
    assert apart_reason(-15.0, terms(diffraction_db=15.0)) is None


def test_a_clear_line_is_claimed_only_in_sight():
    """Diffraction below 1 dB without line of sight (the ray grazes): no word of a clear line."""
    told = apart_reason(20.0, terms(curves_db=20.5, diffraction_db=0.5))
    assert "clear" not in told
    assert "no loss by diffraction" in told


def test_curves_are_not_blamed_for_what_diffraction_pays_too():
    """30 dB of curves against 26 dB of diffraction explain 4 dB; the angle's 18 dB make the difference of 22."""
    made = terms(curves_db=30.0, diffraction_db=26.0, clearance_angle_db=18.0, clearance_angle_deg=2.0)
    assert made.difference_db == 22
    assert "rises 2.0°" in apart_reason(22.0, made)
