"""Noise of stages in a row against worked examples."""

import numpy as np
import pytest

from app.chain.cascade import cascade_noise_factor


def figure_db(gain_db, noise_figure_db):
    return 10 * np.log10(cascade_noise_factor(gain_db, noise_figure_db))


def test_receiver_front_end_of_a_textbook():
    """D. M. Pozar, Microwave Engineering, 4th ed., chapter 10, example of a receiver; from memory.

    Amplifier 10 dB gain, 2 dB noise figure; filter of 1 dB loss; mixer of 3 dB loss, 4 dB noise figure.
    By hand, with the book's rounding: 1.58 + (1.26 − 1) / 10 + (2.51 − 1) / (10 · 0.79) = 1.80, 2.55 dB.
    The book's two digits give 2.55; unrounded factors 2.549.
    """
    assert pytest.approx(1.80, abs=0.005) == 1.58 + (1.26 - 1) / 10 + (2.51 - 1) / (10 * 0.79)
    assert cascade_noise_factor([10, -1, -3], [2, 1, 4]) == pytest.approx(1.80, abs=0.005)
    assert figure_db([10, -1, -3], [2, 1, 4]) == pytest.approx(2.55, abs=0.01)


def test_masthead_amplifier_ahead_of_a_long_feeder():
    """2 dB amplifier of 20 dB ahead of 8 dB loss and a 7 dB set; arithmetic shown (D).

    8 dB and 7 dB in a row are 15 dB, 31.62; 1.585 + 30.62 / 100 = 1.891, 2.77 dB, against 15.0 dB without.
    """
    assert pytest.approx(10 ** (2.77 / 10), abs=0.005) == 1.585 + 30.62 / 100
    assert figure_db([20, -8, 0], [2, 8, 7]) == pytest.approx(2.77, abs=0.005)
    assert figure_db([-8, 0], [8, 7]) == pytest.approx(15.0, abs=1e-9)


def test_loss_adds_to_the_figure_of_what_follows():
    """Friis 1944: an attenuator at 290 K ahead of a receiver adds its decibels, for any of them."""
    loss_db, set_db = np.meshgrid([0, 0.5, 3, 20], [0, 3, 7, 12])
    assert figure_db([-loss_db, 0], [loss_db, set_db]) == pytest.approx(loss_db + set_db)


def test_alone_a_stage_keeps_its_figure_whatever_its_gain():
    for gain_db in (-10, 0, 30):
        assert figure_db([gain_db], [5]) == pytest.approx(5)
