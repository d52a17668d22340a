"""The decision rule on situations whose answer was reasoned first."""

import numpy as np
import pytest

from app.chain.catalogue import demo_chains
from app.chance import DRAWS
from app.verdict import Outcome, compare, nothing, ranked, wanted_multiplexes

CHAINS = {chain.name: chain for chain in demo_chains()}
SMALL, LARGE, AMPLIFIED = (CHAINS[name] for name in ("roof-yagi", "high-gain", "high-gain-masthead"))
NAMES = ("a", "b", "c")


def outcome(chain, *chances, limits=("noise",) * 3):
    """A chain whose multiplexes are received in exactly the stated share of draws, all in step."""
    draw = (np.arange(DRAWS) + 0.5) / DRAWS
    received = np.stack([draw < chance for chance in chances], axis=1)
    return Outcome(chain.name, chain, received, np.array(chances), limits)


def verdict(candidate, baseline, wanted=NAMES, worth=50.0, up=True, others=()):
    return compare(candidate, baseline, others or (baseline, candidate), NAMES, wanted, worth, up)


def test_two_more_for_less_than_their_worth_is_worth_it():
    """Two multiplexes from never to always bring 2 x 50; the new aerial costs 39 + 35, the rest is kept."""
    found = verdict(outcome(LARGE, 1, 1, 1), outcome(SMALL, 1, 0, 0))
    assert found.price_difference == 74
    assert found.expected_extra == 2
    assert (found.expected_worth, found.break_even_price, found.price_per_extra) == (26, 100, 37)
    assert found.answer == "worth it"
    assert found.gained == ("b", "c")
    assert found.now_secure == ("b", "c")


def test_gain_that_is_too_dear_is_not_worth_it():
    """One more at a worth of 50 against a price of 74."""
    found = verdict(outcome(LARGE, 1, 1, 0), outcome(SMALL, 1, 0, 0))
    assert (found.answer, found.expected_worth) == ("not worth it", -24)


def test_higher_price_and_no_gain_is_not_worth_it():
    found = verdict(outcome(LARGE, 1, 0.5, 0), outcome(SMALL, 1, 0.5, 0))
    assert (found.answer, found.expected_extra, found.price_per_extra) == ("not worth it", 0, None)


def test_no_price_is_set_against_a_gain_that_is_written_as_none():
    """The answer writes 0.000 more: 52 divided by it would be a hundred million for each."""
    found = verdict(outcome(LARGE, 1, 0.5004, 0), outcome(SMALL, 1, 0.5, 0))
    assert (round(found.expected_extra, 3), found.price_per_extra) == (0, None)


def test_one_that_works_already_is_spoken_of_as_one():
    found = verdict(outcome(LARGE, 1, 0.9, 0), outcome(SMALL, 1, 0.8, 0), wanted=("b",))
    assert found.reason.startswith("1 multiplex is in question, likely already with Short roof Yagi")


def test_an_identical_candidate_differs_by_exactly_nothing():
    same = outcome(SMALL, 0.3, 0.6, 0.9)
    found = verdict(same, outcome(SMALL, 0.3, 0.6, 0.9))
    assert (found.expected_extra, found.price_difference, found.expected_worth, found.chance_of_gain) == (
        0,
        0,
        0,
        0,
    )
    assert found.answer == "not worth it"


def test_one_gained_and_one_lost_are_both_named():
    found = verdict(outcome(LARGE, 0.1, 0.9, 1), outcome(SMALL, 0.9, 0.1, 1))
    assert (found.gained, found.lost) == (("b",), ("a",))
    assert found.expected_extra == pytest.approx(0, abs=1e-3)


def test_a_small_step_is_neither_gained_nor_lost():
    """Up by 0.15 to 0.75: less than the step of 0.2 that counts."""
    found = verdict(outcome(LARGE, 0.75, 1, 1), outcome(SMALL, 0.60, 1, 1))
    assert (found.gained, found.lost) == ((), ())


def test_nothing_up_today_makes_the_candidate_pay_in_full():
    found = verdict(outcome(SMALL, 1, 1, 1), nothing(3))
    assert found.price_difference == SMALL.price
    assert (found.expected_extra, found.answer) == (3, "worth it")


def test_a_missing_price_gives_no_answer_but_the_break_even():
    unpriced = type(LARGE)(name="unpriced", parts=LARGE.parts, labour_price=None)
    found = verdict(outcome(unpriced, 1, 1, 1), outcome(SMALL, 1, 0, 0))
    assert (found.answer, found.price_difference, found.break_even_price) == (None, None, 100)


def test_the_cheaper_chain_that_does_the_same_is_named():
    small, large, amplified = outcome(SMALL, 1, 0, 0), outcome(LARGE, 1, 1, 1), outcome(AMPLIFIED, 1, 1, 1)
    assert verdict(amplified, small, others=(small, large, amplified)).cheapest_equal == "high-gain"
    assert verdict(large, small, others=(small, large, amplified)).cheapest_equal is None


def test_everything_secure_already_leaves_nothing_wanted():
    small, large = outcome(SMALL, 1, 0.99, 0.96), outcome(LARGE, 1, 1, 1)
    assert wanted_multiplexes(NAMES, [small, large]) == []
    found = verdict(large, small, wanted=())
    assert (found.answer, found.expected_extra) == ("not worth it", 0)
    assert "No multiplex is open to change" in found.reason


def test_hopeless_multiplexes_are_not_wanted():
    assert wanted_multiplexes(NAMES, [outcome(SMALL, 0.04, 0.3, 1), outcome(LARGE, 0.049, 0.9, 1)]) == ["b"]


def test_best_verdict_comes_first():
    small = outcome(SMALL, 1, 0, 0)
    others = [verdict(outcome(AMPLIFIED, 1, 1, 1), small), verdict(outcome(LARGE, 1, 1, 1), small)]
    assert [one.candidate for one in ranked(others)] == ["high-gain", "high-gain-masthead"]


def test_reason_counts_what_holds_back():
    small = outcome(SMALL, 0.1, 0.2, 0.3, limits=("noise", "noise", "time"))
    found = verdict(outcome(LARGE, 0.9, 0.9, 0.1), small)
    assert (
        found.reason == "3 multiplexes are in question, not likely today: 2 held back by noise (gain helps), "
        "1 held back by bad nights (gain helps); High-gain roof aerial makes 2 of them likely."
    )


def test_reason_of_a_single_multiplex_speaks_of_one():
    found = verdict(outcome(LARGE, 0.99, 0.9, 0.99), outcome(SMALL, 0.99, 0.2, 0.99, limits=(None, "noise", None)))
    assert "1 held back by noise (gain helps); High-gain roof aerial makes it likely." in found.reason
