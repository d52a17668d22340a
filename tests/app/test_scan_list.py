"""Scan lists in many forms: what is recognised is shown, the rest is listed, nothing is lost."""

import pytest

from app.errors import ReadingError
from app.scan_list import OnAir, read_scan_list

AIR = [
    OnAir("hill-21", "news", "News Mux", "21", 474.0),
    OnAir("hill-24", "films", "Film Mux", "24", 498.0),
    OnAir("isle-48", "sport", "Sport Mux", "48", 690.0),
    OnAir("far-45", "music", "Music Mux", "45", 666.0),
]


def states(text, **wishes):
    return {one.emission or one.multiplex: one.state for one in read_scan_list(text, AIR, **wishes).readings
            if one.kind == "seen"}  # fmt: skip


@pytest.mark.parametrize(
    "line", ["21", "ch 21", "CH21", "E21", "UHF 21 ok", "474 MHz", "474,0 MHz", "474000 kHz", "News Mux", "hill-21",
             "21;News Mux;474.0;good", "  21\tNews  85%"],
)  # fmt: skip
def test_one_channel_in_many_ways_of_writing(line):
    scan = read_scan_list(line, AIR)
    assert [one.of for one in scan.recognised] in (["hill-21"], ["news"])
    assert scan.readings[0].state == "perfect"
    assert scan.rest == ()


def test_words_say_how_well():
    text = "21 perfect\n24 breaks up in wind\n48 no signal\n45 pixelated"
    assert states(text) == {
        "hill-21": "perfect", "hill-24": "breaks up", "isle-48": "not found", "far-45": "breaks up",
    }  # fmt: skip


def test_figures_are_an_order_only():
    scan = read_scan_list(
        "21 strength 90% quality 100%\n24 strength 60% quality 100%\n48 strength 71% quality 40%", AIR
    )
    orders = [one.stronger for one in scan.readings if one.kind == "order"]
    assert orders[0] == ("hill-21", "isle-48", "hill-24")
    assert orders[1][-1] == "isle-48"
    assert all(one.value_db is None for one in scan.readings)


def test_bars_are_an_order_too():
    scan = read_scan_list("News Mux 5/5\nFilm Mux 2/5", AIR)
    assert [one.stronger for one in scan.readings if one.kind == "order"] == [("news", "films")]


def test_a_complete_list_says_what_was_not_found():
    assert states("21\n24", complete=True) == {
        "hill-21": "perfect", "hill-24": "perfect", "sport": "not found", "music": "not found",
    }  # fmt: skip


def test_many_programmes_of_one_multiplex_count_once():
    assert len(read_scan_list("\n".join(["21 programme"] * 40), AIR).readings) == 1


def test_a_form_never_seen_is_listed_line_by_line():
    text = "<<LCN|??>>\n\nzap zap\n21 News Mux\n999 radio\n\x00\x01"
    scan = read_scan_list(text, AIR)
    assert [one.line for one in scan.recognised] == [4]
    assert [line for line, _ in scan.rest] == [1, 3, 5, 6]
    assert scan.rest[1] == (3, "zap zap")


def test_a_channel_that_is_not_on_the_air_is_among_the_rest():
    assert read_scan_list("ch 60 perfect", AIR).rest == ((1, "ch 60 perfect"),)


@pytest.mark.parametrize(
    ("text", "message"), [("", "is empty"), (" \n\t", "is empty"), ("21\n" * 6000, "at most 5000")]
)
def test_no_list_and_a_book_are_refused(text, message):
    with pytest.raises(ReadingError, match=message):
        read_scan_list(text, AIR)
