"""Delta-Bullington against pycraf's independent program of Rec. ITU-R P.452-16, section 4.2.

Land paths only; P.452 and P.1812 share this part. pycraf takes 0.3 m GHz where P.1812 prints 0.2998,
hence 0.01 dB.
"""

import numpy as np
import pytest

from propagation.diffraction import delta_bullington_loss_db
from propagation.refraction import effective_earth_radius_km

u = pytest.importorskip("astropy.units")
pathprof = pytest.importorskip("pycraf.pathprof")

CASES = 40


def pycraf_loss_db(x, ground, antenna_m, aerial_m, frequency_mhz, lapse, vertical):
    properties = pathprof.PathProp(
        frequency_mhz / 1000 * u.GHz,
        290 * u.K,
        1013 * u.hPa,
        11 * u.deg,
        50 * u.deg,
        11.5 * u.deg,
        50.2 * u.deg,
        antenna_m * u.m,
        aerial_m * u.m,
        x[1] * 1000 * u.m,
        50 * u.percent,
        omega=0 * u.percent,
        polarization=int(vertical),
        version=16,
        delta_N=lapse / u.km,
        N0=325 * u.dimensionless_unscaled,
        hprof_dists=x * u.km,
        hprof_heights=ground * u.m,
        hprof_bearing=0 * u.deg,
        hprof_backbearing=0 * u.deg,
    )
    return pathprof.loss_diffraction(properties)[0].value


def test_delta_bullington_matches_pycraf_on_land():
    draw = np.random.default_rng(20261201)
    ours, theirs = [], []
    for _ in range(CASES):
        points = int(draw.integers(50, 400))
        x = np.linspace(0, draw.uniform(2, 150), points)
        steps = np.cumsum(draw.normal(size=points)) / np.sqrt(points)
        ground = np.maximum(200 + draw.uniform(6, 360) * steps, 0)
        antenna, aerial = draw.uniform(10, 300), draw.uniform(3, 20)
        frequency, lapse, vertical = draw.uniform(100, 860), draw.uniform(30, 70), bool(draw.integers(2))
        theirs.append(pycraf_loss_db(x, ground, antenna, aerial, frequency, lapse, vertical))
        ours.append(
            delta_bullington_loss_db(
                x,
                ground,
                ground[0] + antenna,
                ground[-1] + aerial,
                frequency,
                effective_earth_radius_km(lapse),
                0.0,
                "vertical" if vertical else "horizontal",
            )
        )
    assert len(ours) == CASES
    assert min(theirs) < 1  # clear and blocked paths are both among them
    assert max(theirs) > 50
    assert np.abs(np.subtract(ours, theirs)).max() <= 0.01
