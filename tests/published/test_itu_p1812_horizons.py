"""Horizon angles of the worked examples of Rec. ITU-R P.1812 (ITU-R Study Group 3) against terrain/skyline.py.

The examples give both antennas' horizon angle and distance on 63 paths. On paths beyond the horizon
these are those of the ground; on the others both are the angle to the other antenna's side, which is no
skyline, and are left out here.
"""

import numpy as np
import pytest

from app.worked_examples import WorkedExample, packaged_sets
from terrain.skyline import horizon

EXAMPLES = next(s.examples for s in packaged_sets() if s.examples[0].method == "p1812")
# The requirement is 0.02 mrad; the examples print ten digits.
TOLERANCE_MRAD = 1e-6


def seen_from(example: WorkedExample, end: str) -> tuple[float, float]:
    """Horizon angle [mrad] and distance [km] over the example's own samples, seen from one end."""
    distance_km, ground_m = example.profile["distance_km"], example.profile["terrain_amsl_m"]
    if end == "rx":
        distance_km, ground_m = (distance_km[-1] - distance_km)[::-1], ground_m[::-1]
    eye_m = example.steps[f"{end}_antenna_amsl_m"]
    radius_km = example.steps["median_effective_earth_radius_km"]
    tangent, at_km = horizon(distance_km[1:-1], ground_m[1:-1], eye_m, radius_km)
    return float(1e3 * np.arctan(tangent)), float(at_km)


def beyond_the_horizon(example: WorkedExample) -> bool:
    """The highest ground seen from the transmitter hides the receiver (P.1812-7, section 4.2, step 2)."""
    across_km = example.steps["path_length_km"]
    other_m = example.steps["rx_antenna_amsl_m"] - example.steps["tx_antenna_amsl_m"]
    radius_km = example.steps["median_effective_earth_radius_km"]
    to_other_mrad = 1e3 * np.arctan(other_m / (1e3 * across_km) - across_km / (2 * radius_km))
    return bool(seen_from(example, "tx")[0] > to_other_mrad)


HIDDEN = [example for example in EXAMPLES if beyond_the_horizon(example)]


def test_most_examples_are_beyond_the_horizon():
    assert (len(EXAMPLES), len(HIDDEN)) == (63, 48)


@pytest.mark.parametrize("end", ["tx", "rx"])
@pytest.mark.parametrize("example", HIDDEN, ids=[example.name for example in HIDDEN])
def test_horizon_angle_and_distance_match_the_published(example, end):
    angle_mrad, at_km = seen_from(example, end)
    assert angle_mrad == pytest.approx(example.steps[f"{end}_horizon_angle_mrad"], abs=TOLERANCE_MRAD)
    assert at_km == pytest.approx(example.steps[f"{end}_horizon_distance_km"], abs=1e-6)
