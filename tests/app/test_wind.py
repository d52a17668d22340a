import re
from dataclasses import replace

import pytest

from app.chain.wind import CAUTION, WIND_CLASSES, Mast, Mounted, area_from_load_m2, check_mast, wind_load_n
from app.errors import ChainError

MAST = Mast(diameter_mm=50, wall_mm=2, free_m=2.5, clamped_m=0.8)
YAGI = Mounted("Yagi", 0.08, 2.3)


def test_sound_mast_has_no_finding_and_still_the_caution():
    check = check_mast(MAST, [YAGI], 9)
    assert check.findings == ()
    assert check.caution == CAUTION
    assert "Local building codes" in CAUTION


def test_brackets_carry_load_and_moment():
    """Statics: the forces balance, and so do the moments about the lower clamp."""
    check = check_mast(MAST, [YAGI], 9)
    load = sum(check.loads_n) + check.mast_load_n
    assert check.upper_bracket_n - check.lower_bracket_n == pytest.approx(load)
    about_lower = check.loads_n[0] * (2.3 + 0.8) + check.mast_load_n * (1.25 + 0.8)
    assert check.upper_bracket_n * 0.8 == pytest.approx(about_lower)


def test_moment_rises_with_height_area_and_a_tall_house():
    plain = check_mast(MAST, [YAGI], 9).moment_n_m
    assert check_mast(MAST, [replace(YAGI, above_clamp_m=2.5)], 9).moment_n_m > plain
    assert check_mast(MAST, [replace(YAGI, wind_area_m2=0.1)], 9).moment_n_m > plain
    assert check_mast(MAST, [YAGI], 25).moment_n_m == pytest.approx(plain * 1100 / 800)


def test_bare_mast_bends_too():
    assert check_mast(MAST, [], 9).moment_n_m == pytest.approx(1.2 * 800 * 0.05 * 2.5 * 1.25)


@pytest.mark.parametrize(
    ("mast", "area", "finding"),
    [
        (Mast(32, 1.5, 3, 0.8), 0.15, "the tube bears .* take a stronger tube"),
        (Mast(60, 2.9, 6.5, 2), 0.05, r"6.5 m of free mast are above 6 m: shorten or guy it"),
        (Mast(60, 2.9, 6, 2), 0.4, r"is above 1650 N·m: have the structure proved"),
        (Mast(50, 2, 3, 0.3), 0.05, r"less than a sixth of the mast: set them 0.60 m apart"),
        (Mast(50, 2, 3, 0.6, bracket_n=300), 0.05, "its maker allows 300 N: set the brackets further apart"),
    ],
)
def test_what_goes_beyond_a_limit_is_told_with_the_mend(mast, area, finding):
    found = check_mast(mast, [Mounted("a", area, mast.free_m)], 9).findings
    assert any(re.search(finding, text) for text in found), found


def test_area_and_load_are_two_ways_to_say_it():
    assert wind_load_n(area_from_load_m2(70), 800) == pytest.approx(70)


def test_classes_give_a_span_each():
    assert set(WIND_CLASSES) == {"uhf-yagi-small", "uhf-yagi-long", "uhf-panel", "fm-yagi", "vhf-yagi"}
    assert all(one.lowest_n < one.highest_n and one.flag == "T" for one in WIND_CLASSES.values())


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: Mounted("Yagi", -0.1, 1), 'aerial "Yagi": wind_area_m2 -0.1 is not possible: use 0 to 10 m²'),
        (lambda: Mast(40, 21, 2, 1), "mast: wall_mm 21 is not possible: use 0.5 to 20 mm"),
        (lambda: Mast(40, 2, 2, 0), "clamped_m 0 is not possible"),
        (lambda: Mast(40, 2, float("nan"), 1), "free_m nan is not possible"),
        (lambda: check_mast(MAST, [Mounted("Yagi", 0.1, 3)], 9), "is above the mast of 2.5 m: lower it"),
        (lambda: check_mast(MAST, [], -1), "top_agl_m -1 is not possible"),
    ],
)
def test_impossible_is_refused_with_the_mend(make, message):
    with pytest.raises(ChainError, match=message):
        make()
