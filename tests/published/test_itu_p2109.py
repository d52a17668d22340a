"""Building entry loss against figures computed from the Recommendation's coefficients by others."""

import numpy as np
import pytest

from propagation.entry import building_entry_loss_db

# Rec. ITU-R P.2109-2, coefficients by a national research laboratory's open library (S2); medians and quantiles
# computed from them outside this project, rounded to 0.1 dB (D on S2): MHz, probability, traditional, efficient
FIGURES = [
    (200, 0.5, 14.0, 35.7),
    (500, 0.5, 14.0, 32.3),
    (600, 0.5, 14.0, 31.9),
    (700, 0.5, 14.1, 31.6),
    (1000, 0.5, 14.3, 31.0),
    (600, 0.9, 24.3, 46.8),
    (600, 0.95, 27.4, 51.2),
]


@pytest.mark.parametrize(("frequency_mhz", "probability", "traditional_db", "efficient_db"), FIGURES)
def test_loss_is_that_of_the_recommendation(frequency_mhz, probability, traditional_db, efficient_db):
    got = [
        building_entry_loss_db(frequency_mhz, probability, building)
        for building in ("traditional", "thermally_efficient")
    ]
    assert got == pytest.approx([traditional_db, efficient_db], abs=0.05 + 1e-9)


def test_median_at_one_gigahertz_by_hand():
    """log 1 = 0: A = 12.64, B = 9.1: 10 log(18.365 + 8.128 + 0.501) = 14.313 dB (arithmetic on S2)."""
    assert 10 * np.log10(18.365 + 8.128 + 0.501) == pytest.approx(14.313, abs=5e-4)
    assert building_entry_loss_db(1000, 0.5, "traditional") == pytest.approx(14.313, abs=5e-4)


def test_steep_ray_by_hand():
    """30 degrees add 0.212 · 30 = 6.36 dB to A: 10 log(79.43 + 8.128 + 0.501) = 19.45 dB (arithmetic on S2)."""
    assert pytest.approx(79.43, abs=0.01) == 10 ** ((12.64 + 6.36) / 10)
    assert building_entry_loss_db(1000, 0.5, "traditional", 30) == pytest.approx(19.45, abs=0.005)
