"""Array factors and the directivity of groups against closed forms and figures of the trade's texts."""

import numpy as np
import pytest

from app.chain.parts import Aerial
from app.chain.stacking import Stack, directivity_increase_db, null_spacing_m, stacked_gain_db, stacked_loss_db
from propagation.units import wavelength_m

MHZ = np.array([600.0])


def aerial(beamwidth_deg, front_to_back_db, pattern="class"):
    return Aerial(
        id="a",
        name="a",
        gain_dbd=((470, 6), (694, 10)),
        beamwidth_deg=beamwidth_deg,
        front_to_back_db=front_to_back_db,
        pattern=pattern,
    )


ROUND = aerial(360, 0)


@pytest.mark.parametrize("spacing_m", [0.1, 0.3, 0.5, 0.9, 2.0, 15.0])
def test_two_round_sources_have_the_directivity_of_the_textbook(spacing_m):
    """Two isotropic sources in phase: D = 2 / (1 + sin(k d) / (k d)); antenna texts, closed form (D)."""
    kd = 2 * np.pi * spacing_m / wavelength_m(MHZ)
    closed = 10 * np.log10(2 / (1 + np.sin(kd) / kd))
    assert directivity_increase_db(Stack(2, "horizontal", spacing_m), ROUND, MHZ) == pytest.approx(closed, abs=1e-9)


@pytest.mark.parametrize("layout", ["horizontal", "vertical"])
@pytest.mark.parametrize("spacing_m", [0.1, 0.3, 0.5, 0.9, 2.0])
def test_two_short_dipoles_have_the_directivity_of_their_mutual_resistance(layout, spacing_m):
    """Radiated power of a pair is 1 + R12 / R11 of a single one's two.

    Short dipoles, closed forms from antenna texts (D), with x = k d: end to end R12 / R11 is
    3 (sin x − x cos x) / x³, side by side 3/2 (sin x / x + cos x / x² − sin x / x³).
    """
    x = 2 * np.pi * spacing_m / wavelength_m(MHZ)
    mutual = {
        "horizontal": 3 * (np.sin(x) - x * np.cos(x)) / x**3,
        "vertical": 1.5 * (np.sin(x) / x + np.cos(x) / x**2 - np.sin(x) / x**3),
    }[layout]
    got = directivity_increase_db(Stack(2, layout, spacing_m), aerial(78, 0, "dipole"), MHZ)
    assert got == pytest.approx(10 * np.log10(2 / (1 + mutual)), abs=1e-9)


@pytest.mark.parametrize(
    ("count", "layout", "wide_db"), [(2, "horizontal", 3.0), (2, "vertical", 3.0), (4, "square", 6.0)]
)
@pytest.mark.parametrize("one", [ROUND, aerial(40, 20), aerial(78, 0, "dipole")])
def test_wide_spacing_gives_one_decibel_figure_for_all(count, layout, wide_db, one):
    """Stacking theory: 3.0 dB for two, 6.0 dB for four, before the combiner (D); 0.05 is its rounding."""
    stack = Stack(count, layout, 15, combiner_loss_db=0.5)
    assert directivity_increase_db(stack, one, MHZ) == pytest.approx(wide_db, abs=0.05)
    assert stacked_gain_db(stack, one, 600) == pytest.approx(wide_db - 0.5, abs=0.05)


def test_pair_is_the_array_factor_of_two():
    """cos²(π d sin φ / λ): half a wavelength apart, 6.02 dB where sin φ is 2/3 (arithmetic)."""
    half_wave = float(wavelength_m(600)) / 2
    angle = np.degrees(np.arcsin(2 / 3))
    assert stacked_loss_db(Stack(2, "horizontal", half_wave), angle, 600) == pytest.approx(20 * np.log10(2), abs=1e-9)


def test_four_in_a_row_is_the_array_factor_of_four():
    """|sin(4u) / (4 sin u)|² with u = π d sin φ / λ, as texts write it."""
    angles = np.array([3.0, 7, 12, 20, 45])
    u = np.pi * 0.6 * np.sin(np.radians(angles)) / wavelength_m(600)
    expected = -20 * np.log10(np.abs(np.sin(4 * u) / (4 * np.sin(u))))
    got = stacked_loss_db(Stack(4, "horizontal", 0.6), angles, 600, null_db=200)
    assert got == pytest.approx(expected, abs=1e-9)


def test_pair_that_turns_its_null_to_an_interferer():
    """d = λ / (2 sin φ): 20° at 600 MHz, 0.73 m (D)."""
    spacing = null_spacing_m(600, 20)
    assert spacing == pytest.approx(0.73, abs=0.005)
    assert stacked_loss_db(Stack(2, "horizontal", float(spacing)), [20, -20], 600, null_db=60) == pytest.approx(60)
