"""Rows of the CSV of transmitters held against one another: slipped positions, repetitions, one mast in two places."""

import pytest

from tests.app.template_text import only_refusal, text_of

PLACES = [("44.4", "-36.9"), ("44.5", "-37.3"), ("44.1", "-37.0"), ("43.9", "-37.4")]


def placed(*places):
    return text_of(
        *({"transmitter": f"M{n}", "latitude_deg": a, "longitude_deg": o} for n, (a, o) in enumerate(places))
    )


@pytest.mark.parametrize(
    ("position", "words"),
    [
        (("-37.0", "44.2"), "latitude and longitude swapped?"),
        (("44.2", "37.0"), "sign of the longitude lost?"),
        (("-44.2", "-37.0"), "sign of the latitude lost?"),
    ],
)
def test_a_position_that_belongs_beside_the_others_if_read_otherwise_is_refused(read, position, words):
    result = read(placed(*PLACES, position))
    refusal = only_refusal(result)
    assert (refusal.line, refusal.column) == (6, "latitude_deg")
    assert words in refusal.message
    assert len(result.transmitters) == 4


def test_a_far_position_that_no_slip_explains_is_kept(read):
    assert read(placed(*PLACES, ("30.0", "-60.0"))).refused == ()


def test_swapped_positions_are_seen_across_the_date_line(read):
    result = read(
        placed(("-16.5", "179.9"), ("-16.6", "-179.9"), ("-16.9", "179.5"), ("-17", "-179.5"), ("-16.5", "-0.1"))
    )
    assert result.refused == ()  # far off, but no slip: kept
    swapped = read(placed(("60", "20"), ("61", "21"), ("60.5", "22"), ("20", "60")))
    assert "swapped?" in only_refusal(swapped).message


def test_two_masts_are_no_neighbourhood(read):
    assert read(placed(("44", "-37"), ("-37", "44"))).refused == ()


@pytest.mark.parametrize("change", [{}, {"multiplex": "Other"}, {"transmitter": "Mast Same"}, {"polarisation": "V"}])
def test_a_repetition_is_refused_with_the_line_of_the_first(read, change):
    refusal = only_refusal(read(text_of({}, change)))
    assert refusal.line == 3
    assert "radiates 682 MHz already in line 2" in refusal.message


@pytest.mark.parametrize(
    "change",
    [
        {"channel": "48"},
        {"transmitter": "Mast Two", "latitude_deg": "44.5"},
        {"multiplex": "Other", "polarisation": "V"},
    ],
)
def test_another_channel_place_or_polarised_multiplex_is_no_repetition(read, change):
    assert read(text_of({}, change)).refused == ()


def test_the_same_channel_before_and_after_a_day_is_two_emissions_with_two_ids(read):
    result = read(text_of({"valid_to": "2026-12-31"}, {"valid_from": "2027-01-01", "erp_kw": "50"}))
    assert result.refused == ()
    assert len({e.id for e in result.emissions}) == 2


def test_one_mast_has_one_place_and_one_ground(read):
    elsewhere = only_refusal(read(text_of({}, {"channel": "48", "latitude_deg": "44.5"})))
    assert "and at 44.412, -36.905 in line 2" in elsewhere.message
    ground = only_refusal(read(text_of({"ground_amsl_m": "100"}, {"channel": "48", "ground_amsl_m": "130"})))
    assert (ground.column, ground.value) == ("ground_amsl_m", "130")
    filled = read(text_of({}, {"channel": "48", "ground_amsl_m": "130"}))
    assert filled.transmitters[0].ground_amsl_m == 130


def test_a_date_line_mast_may_be_written_from_both_sides(read):
    sides = {"longitude_deg": "180"}, {"longitude_deg": "-180", "channel": "48"}
    assert read(text_of(*sides)).refused == ()
