"""The words of the command line are those of the page: both are held to one table."""

import json

import pytest

from app.chance import grade
from app.telling import chance_words, change_words, count_words, none_is_worth_it, sentence


@pytest.fixture(scope="module")
def wording(repository):
    return json.loads((repository / "tests" / "static" / "wording.json").read_text())


def multiplexes(pairs):
    def cell(chance):
        return {"chance": chance, "grade": grade(chance)}

    return [
        {
            "chains": {
                name: cell(chance) for name, chance in zip(("now", "idea"), pair, strict=True) if chance is not None
            }
        }
        for pair in pairs
    ]


def test_chances_and_counts(wording):
    assert [chance_words(chance) for chance, _ in wording["chances"]] == [words for _, words in wording["chances"]]
    assert [count_words(count) for count, _ in wording["counts"]] == [words for _, words in wording["counts"]]


def test_what_a_candidate_changes_in_all(wording):
    for case in wording["changes"]:
        pairs = case["pairs"]
        verdict = {
            "baseline": "nothing" if pairs[0][0] is None else "now",
            "candidate": "idea",
            "expected_extra": sum(after - (before or 0) for before, after in pairs),
        }
        assert change_words(multiplexes(pairs), verdict) == case["words"]


def test_a_fraction_never_contradicts_the_grade_beside_it():
    for step in range(10_001):
        top, bottom = map(int, chance_words(step / 10_000).split(" in "))
        assert grade(top / bottom) == grade(step / 10_000), step


def test_none_is_worth_it_only_where_several_were_tried_and_none_pays():
    no, yes = {"answer": "not worth it"}, {"answer": "worth it"}
    assert none_is_worth_it([no, no])
    assert not none_is_worth_it([no])
    assert not none_is_worth_it([no, yes])
    assert not none_is_worth_it([no, {"answer": None}])


@pytest.mark.parametrize(
    ("price", "limit", "told"),
    [
        (52.0, 100.0, "for 52 EUR: not worth it, break-even 100 EUR."),
        (52.0, -20.0, "for 52 EUR: not worth it at any price."),
        (0.2, -20.0, "at no cost: not worth it at any price."),
        (-112.0, -160.0, "and saves 112 EUR: not worth it."),
    ],
)
def test_what_costs_less_saves(price, limit, told):
    """In the page's words; what saves money can hardly be said not to pay at any price."""
    verdict = {"baseline": "now", "candidate": "idea", "expected_extra": -3.2, "answer": "not worth it"}
    chains = {name: {"currency": "EUR", "expected_count": 5.0} for name in ("now", "idea")}
    answer = {"multiplexes": multiplexes([[0.9, 0.1]]), "chains": chains}
    assert sentence(answer, verdict | {"price_difference": price, "break_even_price": limit}).endswith(told)
