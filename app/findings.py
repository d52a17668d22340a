"""What readings tell of the parts of a chain: a bad joint, an aerial better or worse than its catalogue."""

from __future__ import annotations

import itertools
from collections.abc import Sequence

import numpy as np

from app.assumptions import Assumptions
from app.chain.parts import Aerial, Chain
from app.conditioning import Posterior

TOLD_FROM_DB = 2.0  # a smaller difference is no finding
SURE_SD = 2.0  # nor one that its own spread may explain


def findings(posterior: Posterior, chains: Sequence[Chain], assumptions: Assumptions) -> tuple[str, ...]:
    """Return one sentence for each part that the readings show to differ from what it should be."""
    told = []
    feeder_sd = assumptions.value("feeder_sd_db")
    runs = {"feeder:" + "+".join(chain.part_ids_of_feeders): chain for chain in chains}
    for key, chain in runs.items():
        mean, sd = (feeder_sd * one for one in posterior.of(key))
        if abs(mean) >= TOLD_FROM_DB and abs(mean) > SURE_SD * sd:
            told.append(
                f"The run behind the aerial of {chain.title or chain.name} loses {abs(mean):.1f} ± {sd:.1f} dB "
                + (
                    "more than its parts should: look for a bad joint, plug or wet lead."
                    if mean < 0
                    else "less than its parts should."
                )
            )
    aerials = {chain.aerial.id: chain.aerial for chain in chains}
    for first, second in itertools.combinations(aerials.values(), 2):
        mean, sd = _difference(posterior, first, second, assumptions)
        told.append(
            f"Read side by side, {first.name} gives {abs(mean):.1f} ± {sd:.1f} dB "
            f"{'more' if mean >= 0 else 'less'} over {second.name} than their catalogue gains say."
        )
    return tuple(told)


def _difference(posterior: Posterior, first: Aerial, second: Aerial, assumptions: Assumptions) -> tuple[float, float]:
    """Mean and spread of the difference of two aerials' errors [dB]."""
    weights = np.zeros(len(posterior.keys))
    variance = 0.0
    for aerial, sign in ((first, 1.0), (second, -1.0)):
        sd = assumptions.value("aerial_gain_sd_db" if aerial.measured else "aerial_own_build_sd_db")
        key = f"aerial:{aerial.id}"
        if key in posterior.keys:
            weights[posterior.keys.index(key)] = sign * sd
        else:
            variance += sd**2
    return float(weights @ posterior.mean), float(np.sqrt(variance + weights @ posterior.covariance @ weights))
