"""Readings as they are given: what is taken, what is refused and how."""

import math
from datetime import date

import pytest

from app.errors import ReadingError
from app.readings import KINDS, Reading, reading_from_document, reading_to_document
from app.statements import cn_of_mer


def test_a_reading_survives_the_way_there_and_back():
    document = {
        "kind": "level", "emission": "48", "value_db": 43.0, "day": "2026-10-31", "chain": "roof-yagi",
        "pointing_deg": 57.0, "point": "Bedroom", "instrument": "analyser", "confirmed": True,
    }  # fmt: skip
    reading = reading_from_document(document)
    assert reading.day == date(2026, 10, 31)
    assert reading_to_document(reading) == document


@pytest.mark.parametrize(
    ("document", "message"),
    [
        ({}, "has no kind: use level, cn"),
        ({"kind": "smell"}, '"smell" is not known: use level'),
        ({"kind": "level", "emission": "48"}, "has no value_db: give it in dB"),
        ({"kind": "level", "emission": "48", "value_db": 300}, "300 is not possible: use -20 to 130 dB"),
        ({"kind": "level", "emission": "48", "value_db": math.nan}, "nan is not possible"),
        ({"kind": "level", "emission": "48", "value_db": "43"}, "write a number"),
        ({"kind": "level", "value_db": 43}, "does not say of what"),
        ({"kind": "level", "emission": "48", "value_db": 43, "sd_db": 0}, "sd_db 0 is not possible: use 0.1 to 20 dB"),
        ({"kind": "level", "emission": "48", "value_db": 43, "sd_db": -2}, "sd_db -2 is not possible"),
        ({"kind": "mer", "emission": "48", "value_db": 99}, "use 0 to 60 dB"),
        ({"kind": "seen", "emission": "48"}, "has no state: use perfect, breaks up, not found"),
        ({"kind": "seen", "emission": "48", "state": "lovely"}, "use perfect, breaks up, not found"),
        ({"kind": "seen", "emission": "48", "state": "perfect", "day": "31.10.2026"}, "write it as 2026-10-31"),
        ({"kind": "count"}, "say in `count` how many"),
        ({"kind": "count", "count": -1}, "use 0 to 1000"),
        ({"kind": "count", "count": 2.5}, "write a whole number"),
        ({"kind": "order", "stronger": ["48"]}, "at least two"),
        ({"kind": "order", "stronger": "48"}, "list channels, strongest first"),
        ({"kind": "neighbour", "works": True}, "needs pointing_deg"),
        ({"kind": "neighbour", "works": True, "pointing_deg": 400}, "use 0 to 360 degrees"),
        ({"kind": "level", "emission": "48", "value_db": 43, "instrument": "nose"}, "use meter, analyser"),
        ({"kind": "level", "emission": "48", "value_db": 43, "colour": "red"}, '"colour" is not known of a reading'),
        ({"kind": "level", "emission": "48", "value_db": 43, "confirmed": "yes"}, "use true or false"),
        ({"kind": "level", "emission": 48, "value_db": 43}, "write it as text"),
    ],
)
def test_what_nobody_can_have_read_is_refused_with_what_is_allowed(document, message):
    with pytest.raises(ReadingError, match=message):
        reading_from_document(document)


def test_mer_and_instrument_noise_add_as_powers():
    """A signal of 30 dB on an instrument of 30 dB shows 30 − 3.01 = 26.99 dB."""
    cn, factor, at_limit = cn_of_mer(30 - 10 * math.log10(2), 30.0)
    assert (cn, at_limit) == (pytest.approx(30.0), False)
    assert factor == pytest.approx(2.0)  # d(C/N)/d(MER) = 1 / (1 − 1/2)


@pytest.mark.parametrize("mer_db", [35.2, 36.0, 41.0])
def test_mer_near_its_limit_is_only_a_lower_bound(mer_db):
    assert cn_of_mer(mer_db, 36.0) == (mer_db, 1.0, True)


def test_every_kind_is_named_once():
    assert len(set(KINDS)) == len(KINDS)
    assert Reading(kind="neighbour", pointing_deg=57.0, works=False).of == "neighbour's aerial"
