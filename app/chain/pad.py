"""What hangs between a 50 ohm analyser and a 75 ohm aerial, as chain matrices, port 1 at the analyser."""

from __future__ import annotations

import numpy as np

from app.chain.touchstone import ComplexArray, FloatArray, Touchstone, refuse
from propagation.constants import RECEIVER_IMPEDANCE_OHM

ANALYSER_OHM = 50.0


def pad_loss_db(chain: ComplexArray, source_ohm: float, load_ohm: float) -> FloatArray:
    """Power lost in a two-port between matched source and load [dB], from chain matrices (…, 2, 2).

    Available power of the source over the power in the load, |A Rl + B + C Rs Rl + D Rs|² / (4 Rs Rl).
    """
    a, b, c, d = (chain[..., i, j] for i in (0, 1) for j in (0, 1))
    total = np.abs(a * load_ohm + b + c * source_ohm * load_ohm + d * source_ohm)
    return np.asarray(20 * np.log10(total) - 10 * np.log10(4 * source_ohm * load_ohm))


def minimum_loss_pad() -> ComplexArray:
    """Chain matrix of the minimum-loss pad, analyser first: 86.6 ohms across 50, then 43.3 in series to 75.

    Series √(75 · 25) and shunt 50 √(75 / 25) ohms: matched both ways, 5.72 dB.
    """
    high, low = RECEIVER_IMPEDANCE_OHM, ANALYSER_OHM
    series, shunt = np.sqrt(high * (high - low)), low * np.sqrt(high / (high - low))
    return np.array([[1, series], [1 / shunt, 1 + series / shunt]], dtype=np.complex128)


def series_pad() -> ComplexArray:
    """Chain matrix of 25 ohms in series, matched as seen from the 75 ohm side only, 1.76 dB."""
    return np.array([[1, RECEIVER_IMPEDANCE_OHM - ANALYSER_OHM], [0, 1]], dtype=np.complex128)


def chain_matrix(two_port: Touchstone) -> ComplexArray:
    """Chain matrices (n, 2, 2) of a two-port's S-parameters, each port with its own resistance.

    Pozar, Table 4.2, extended to unequal resistances by scaling the voltages with √R.
    """
    s11, s12, s21, s22 = (two_port.s[:, i, j] for i in (0, 1) for j in (0, 1))
    if (np.abs(s21) < 1e-6).any() or (np.abs(s12) < 1e-6).any():
        refuse(two_port.name, "lets nothing through (S21 or S12 is 0)", "measure the pad in both directions")
    r1, r2 = two_port.reference_ohm
    a = ((1 + s11) * (1 - s22) + s12 * s21) / (2 * s21) * np.sqrt(r1 / r2)
    b = ((1 + s11) * (1 + s22) - s12 * s21) / (2 * s21) * np.sqrt(r1 * r2)
    c = ((1 - s11) * (1 - s22) - s12 * s21) / (2 * s21) / np.sqrt(r1 * r2)
    d = ((1 - s11) * (1 + s22) + s12 * s21) / (2 * s21) * np.sqrt(r2 / r1)
    return np.stack([np.stack([a, b], axis=-1), np.stack([c, d], axis=-1)], axis=-2)
