"""Reflection, match and pads against their definitions and against scikit-rf, an independent library."""

import numpy as np
import pytest
import skrf

from app.chain.match import Measurement, measured_match, mismatch_loss_db, return_loss_db, vswr
from app.chain.pad import chain_matrix, minimum_loss_pad, pad_loss_db, series_pad
from app.chain.touchstone import Touchstone
from propagation.units import wavelength_m

FREQUENCY_MHZ = np.linspace(470, 694, 57)


def touchstone(s, reference_ohm, name="a.s1p"):
    s = np.asarray(s, dtype=complex)
    return Touchstone(name, FREQUENCY_MHZ, s, np.broadcast_to(reference_ohm, (s.shape[1],)).astype(float))


def aerial():
    """A made-up aerial of 40 to 300 ohms with reactance, as scikit-rf's network at 75 ohms."""
    x = np.linspace(0, 1, FREQUENCY_MHZ.size)
    impedance = 40 + 260 * x**2 + 60j * np.sin(9 * x)
    reflection = ((impedance - 75) / (impedance + 75)).reshape(-1, 1, 1)
    return skrf.Network(s=reflection, z0=75, f=FREQUENCY_MHZ, f_unit="MHz")


def skrf_pad(series_ohm, shunt_ohm):
    """Shunt at the analyser, series towards the aerial, as scikit-rf's network between 50 and 75 ohms."""
    chain = np.array([[1, series_ohm], [1 / shunt_ohm, 1 + series_ohm / shunt_ohm]], dtype=complex)
    chains = np.broadcast_to(chain, (FREQUENCY_MHZ.size, 2, 2))
    s = skrf.network.a2s(chains, z0=np.array([50, 75]))
    return skrf.Network(s=s, z0=np.broadcast_to([50, 75], (FREQUENCY_MHZ.size, 2)), f=FREQUENCY_MHZ, f_unit="MHz")


def lossy_line():
    """A pad of one's own: 10 dB, a little reactive, both ports at 50 ohms."""
    turn = np.exp(-1j * FREQUENCY_MHZ / 120)
    s = np.empty((FREQUENCY_MHZ.size, 2, 2), dtype=complex)
    s[:, 0, 0], s[:, 1, 1] = 0.05 * turn, -0.03j * turn
    s[:, 0, 1] = s[:, 1, 0] = 10 ** (-10 / 20) * turn
    return skrf.Network(s=s, z0=50, f=FREQUENCY_MHZ, f_unit="MHz")


@pytest.mark.parametrize(
    ("ratio", "magnitude", "loss_db", "mismatch_db"),
    [  # definition (D): Γ = (S − 1)/(S + 1), −20 log Γ, −10 log(1 − Γ²), rounded as printed
        (1.1, 0.0476, 26.44, 0.010),
        (1.3, 0.1304, 17.69, 0.075),
        (1.5, 0.2, 13.98, 0.177),
        (2, 0.3333, 9.54, 0.512),
        (3, 0.5, 6.02, 1.249),
        (6, 0.7143, 2.92, 3.100),
    ],
)
def test_return_and_mismatch_loss_of_a_standing_wave_ratio(ratio, magnitude, loss_db, mismatch_db):
    exact = (ratio - 1) / (ratio + 1)
    assert exact == pytest.approx(magnitude, abs=5e-5)
    assert vswr(exact) == pytest.approx(ratio, abs=1e-12)
    assert return_loss_db(exact) == pytest.approx(loss_db, abs=0.005)
    assert mismatch_loss_db([(470, exact), (694, exact)], 600) == pytest.approx(mismatch_db, abs=5e-4)


def test_straight_junction_of_75_and_50_ohms():
    """A perfect 50 ohm load on a 75 ohm feeder: VSWR 1.5, 13.98 dB (D)."""
    match = measured_match(Measurement(touchstone(np.zeros((57, 1, 1)), 50), "before-pad", "none"))
    assert vswr(match.magnitude) == pytest.approx(1.5, abs=1e-12)
    assert return_loss_db(match.magnitude) == pytest.approx(13.98, abs=0.005)
    assert match.pad_loss_db == pytest.approx(0)


def test_minimum_loss_pad():
    """43.30 ohms in series, 86.60 across 50 ohms, 20 log(√1.5 + √0.5) = 5.72 dB, matched both ways (D)."""
    pad = minimum_loss_pad()
    series = pad[0, 1].real
    shunt = 1 / pad[1, 0].real
    assert (series, shunt) == pytest.approx((43.30, 86.60), abs=0.005)
    assert pad_loss_db(pad, 50, 75) == pytest.approx(20 * np.log10(np.sqrt(1.5) + np.sqrt(0.5)), abs=1e-12)
    assert pad_loss_db(pad, 50, 75) == pytest.approx(5.72, abs=0.005)
    assert 1 / (1 / shunt + 1 / (series + 75)) == pytest.approx(50)
    assert series + 1 / (1 / shunt + 1 / 50) == pytest.approx(75)


def test_series_resistor():
    """25 ohms in series: 10 log(75/50) = 1.76 dB, matched as seen from the 75 ohm side (D)."""
    assert pad_loss_db(series_pad(), 50, 75) == pytest.approx(10 * np.log10(75 / 50), abs=1e-12)
    assert pad_loss_db(series_pad(), 50, 75) == pytest.approx(1.76, abs=0.005)
    assert series_pad()[0, 1] + 50 == 75


@pytest.mark.parametrize(
    ("pad", "network"),
    [("minimum-loss", skrf_pad(43.30127018922193, 86.60254037844386)), ("series-25", skrf_pad(25, 1e30))],
)
def test_aerial_behind_a_pad_is_recovered(pad, network):
    """scikit-rf cascades the pad and the aerial; removing our pad gives the aerial back within 1e-9."""
    through = network ** aerial()
    match = measured_match(Measurement(touchstone(through.s, 50), "before-pad", pad))
    assert np.abs(match.reflection - aerial().s[:, 0, 0]).max() < 1e-9


def test_aerial_behind_a_pad_of_ones_own_is_recovered():
    """As above with a two-port whose S-parameters are at 50 ohms; scikit-rf also inverts it: the same."""
    pad = lossy_line()
    seen = aerial()
    seen.renormalize(50)
    through = pad**seen
    own = touchstone(pad.s, 50, "pad.s2p")
    match = measured_match(Measurement(touchstone(through.s, 50), "before-pad", "own", own))
    assert np.abs(match.reflection - aerial().s[:, 0, 0]).max() < 1e-9
    by_skrf = pad.inv**through
    by_skrf.renormalize(75)
    assert np.abs(match.reflection - by_skrf.s[:, 0, 0]).max() < 1e-9


def test_change_of_impedance_is_that_of_scikit_rf():
    seen = aerial()
    seen.renormalize(50)
    match = measured_match(Measurement(touchstone(seen.s, 50), "behind-pad"))
    assert np.abs(match.reflection - aerial().s[:, 0, 0]).max() < 1e-12


@pytest.mark.parametrize("resistances", [(50, 50), (50, 75), (75, 75)])
def test_chain_matrix_is_that_of_scikit_rf(resistances):
    network = lossy_line()
    network.renormalize(list(resistances))
    ours = chain_matrix(touchstone(network.s, resistances, "pad.s2p"))
    assert np.abs(ours - network.a).max() < 1e-9 * np.abs(network.a).max()


def test_wavelength_of_channel_47():
    """λ = 299.792458 / 682 = 0.4396 m (D)."""
    assert wavelength_m(682) == pytest.approx(0.4396, abs=5e-5)
