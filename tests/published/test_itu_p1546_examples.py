"""Rec. ITU-R P.1546-6: the 52 validation examples of ITU-R Study Group 3, one test for each.

Source: data/examples/p1546.source.toml. Field and loss are printed with 8 decimals, intermediates with 6
digits. No example reaches warm sea, low sources over sea, three sections, other shares of locations than
50 %, or unknown terrain: tests/propagation/test_p1546_*.py take those.
"""

import numpy as np
import pytest

from app.verify import PRINTED_DIGITS, half_of_last_digit
from app.worked_examples import packaged_sets
from propagation.p1546 import field_strength
from propagation.p1546.path import path_inputs

EXAMPLES = next(s.examples for s in packaged_sets() if s.name == "p1546")


def test_there_are_52_examples_on_24_profiles():
    assert len(EXAMPLES) == 52
    assert len({example.name.rsplit("_", 1)[0] for example in EXAMPLES}) == 24


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda example: example.name)
def test_published_inputs_give_published_results(example):
    """Derived inputs as published, so that curves and corrections are tested apart from the profile."""
    environment = example.inputs["rx_environment"].lower().replace(" ", "_")
    result = field_strength(**{**example.inputs, **example.derived, "rx_environment": environment})
    for name, value in example.expected.items():
        assert getattr(result, name) == pytest.approx(value, abs=1e-6)
    for name, printed in example.steps.items():
        ours = getattr(result, name)
        if printed is None:
            assert np.isnan(ours), name
        else:
            assert abs(ours - printed) <= half_of_last_digit(printed, PRINTED_DIGITS["p1546"]), name


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda example: example.name)
def test_profile_gives_published_inputs(example):
    """Heights, angles and lengths in full precision; coastal land counts as sea in these examples."""
    ground = path_inputs(
        example.profile["distance_km"],
        example.profile["terrain_amsl_m"],
        example.profile["zone"],
        example.inputs["tx_height_agl_m"],
        example.inputs["rx_height_agl_m"],
        coastal_land_is_sea=True,
    )
    assert ground.sea_km == pytest.approx(example.derived["cold_sea_km"], abs=1e-9)
    for name in (
        "path_length_km",
        "land_km",
        "h1_source_height_m",
        "tx_ground_amsl_m",
        "rx_ground_amsl_m",
        "tx_clearance_angle_deg",
        "rx_clearance_angle_deg",
    ):
        assert getattr(ground, name) == pytest.approx(example.derived[name], rel=1e-9, abs=1e-9), name
