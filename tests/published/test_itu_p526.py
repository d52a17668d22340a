"""Rec. ITU-R P.526: knife edge, Fresnel zones and horizon against the text's own figures and exact optics."""

import numpy as np
import pytest
from scipy.special import fresnel

from propagation.constants import EARTH_RADIUS_KM
from propagation.diffraction import knife_edge_loss_db
from propagation.digest import path_digest
from propagation.fresnel import clearance_ratio, first_zone_radius_m
from propagation.refraction import effective_earth_radius_km


def exact_knife_edge_loss_db(nu):
    """Rec. ITU-R P.526-16, section 4.1, eq. (30), with the Fresnel integrals of scipy."""
    s, c = fresnel(nu)
    return -20 * np.log10(np.sqrt((1 - c - s) ** 2 + (c - s) ** 2) / 2)


def test_grazing_ray_over_a_knife_edge_loses_six_decibels():
    """Half of the wavefront is left: 20 log 2 = 6.02; the approximation of eq. (31) gives 6.03."""
    assert knife_edge_loss_db(0.0) == pytest.approx(20 * np.log10(2), abs=0.02)


def test_knife_edge_follows_the_fresnel_integral():
    """P.526-16, section 4.1: eq. (31) approximates eq. (30) above -0.78, within 0.13 dB up to nu = 5."""
    nu = np.linspace(-0.7, 5, 115)
    assert np.abs(knife_edge_loss_db(nu) - exact_knife_edge_loss_db(nu)).max() < 0.13


@pytest.mark.parametrize("frequency_mhz", [50.0, 200.0, 600.0])
@pytest.mark.parametrize(("d1", "d2"), [(5, 15), (1, 99), (0.3, 0.3)])
def test_radius_matches_p526_eq3(frequency_mhz, d1, d2):
    """Rec. ITU-R P.526-16, section 2.1, eq. (3), 550 sqrt(d1 d2 / ((d1 + d2) f)).

    The text rounds 547.5 to 550, hence 0.5 %.
    """
    printed = 550 * np.sqrt(d1 * d2 / ((d1 + d2) * frequency_mhz))
    assert first_zone_radius_m(d1, d2, frequency_mhz) == pytest.approx(printed, rel=0.005)
    assert clearance_ratio(printed, d1, d2, frequency_mhz) == pytest.approx(1, rel=0.005)


def test_four_thirds_earth():
    """The usual k = 4/3 goes with a lapse of 39 to 40 N/km (Rec. ITU-R P.310 and P.453): 157/117.75 = 4/3."""
    assert effective_earth_radius_km(39.25) == pytest.approx(4 / 3 * EARTH_RADIUS_KM)


def test_radio_horizon_is_4_12_roots_of_the_heights():
    """d = 4.12 (sqrt h1 + sqrt h2) for k = 4/3, h in m: 130.3 sqrt(0.001 h), the trade's rule rounded."""
    distance = np.linspace(0, 60, 121)
    digest = path_digest(distance, np.zeros(121), np.full(121, 4), 100.0, 10.0, 4 / 3 * EARTH_RADIUS_KM)
    assert digest.smooth_horizon_km == pytest.approx(4.12 * (10 + np.sqrt(10)), rel=1e-3)
    assert digest.beyond_horizon
