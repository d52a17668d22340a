"""Worked examples of Rec. ITU-R P.1812, published by ITU-R Study Group 3 with edition 6.

Edition 7 leaves outdoor results as they were. The package carries the 63 cases with their
profiles (propagation/data/examples); here the model runs on them without the `verify` command.
"""

import functools

import pytest

from app.worked_examples import WorkedExample, packaged_sets
from propagation.p1812 import P1812Result, basic_loss

EXAMPLES = next(s.examples for s in packaged_sets() if s.examples[0].method == "p1812")
TOLERANCE_DB = 1e-6  # results are published with 10 digits, 5e-8 dB at 100 dB and more


def name_of(example: WorkedExample) -> str:
    return example.name


@functools.lru_cache(maxsize=1)
def result_of(position: int) -> P1812Result:
    return basic_loss(**EXAMPLES[position].profile, **EXAMPLES[position].inputs)


def test_all_63_cases_are_there_with_46_steps_each():
    assert len(EXAMPLES) == 63
    assert {len(example.steps) for example in EXAMPLES} == {46}
    assert {frozenset(example.expected) for example in EXAMPLES} == {
        frozenset({"basic_loss_db", "field_1kw_dbuv_m", "field_dbuv_m"})
    }


@pytest.mark.parametrize("position", range(len(EXAMPLES)), ids=[name_of(e) for e in EXAMPLES])
def test_loss_and_field_match_itu_validation_file(position):
    result = result_of(position)
    for name, published in EXAMPLES[position].expected.items():
        assert getattr(result, name) == pytest.approx(published, abs=TOLERANCE_DB), name


@pytest.mark.parametrize("position", range(len(EXAMPLES)), ids=[name_of(e) for e in EXAMPLES])
def test_every_step_matches_itu_validation_file(position):
    """Steps have 10 digits: half of the last is at most 5e-10 of the value; 1e-9 where 0 is printed."""
    result = result_of(position)
    for name, published in EXAMPLES[position].steps.items():
        assert getattr(result, name) == pytest.approx(published, rel=6e-10, abs=1e-9), name


def test_cases_of_one_profile_in_one_call_match_too():
    """Six cases over one urban profile: two frequencies, three times, one call."""
    cases = [e for e in EXAMPLES if e.name.startswith("rburg_urban_with_clutter_vertical")]
    assert len(cases) == 6
    inputs = {**cases[0].inputs}
    for name in ("frequency_mhz", "time_percent", "rx_height_agl_m", "erp_kw", "tx_height_agl_m"):
        inputs[name] = [case.inputs[name] for case in cases]
    losses = basic_loss(**cases[0].profile, **inputs).basic_loss_db
    for loss, case in zip(losses, cases, strict=True):
        assert loss == pytest.approx(case.expected["basic_loss_db"], abs=TOLERANCE_DB)
