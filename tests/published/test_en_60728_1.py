"""Outlet levels of EN 60728-1 and of national codes, as read second-hand."""

import pytest

from app.chain.windows import MINIMUM_OVER_CN_DBUV, level_window, minimum_level_dbuv
from app.systems import mode_of
from propagation.noise import noise_power_dbm
from propagation.units import dbuv_from_dbm

# EN 60728-1, least level at the system outlet, dB(µV), quoted on a manufacturer's compendium page (S2)
LEAST = [
    ("DVB-T", "64-QAM 1/2", 29.0),
    ("DVB-T", "64-QAM 2/3", 31.6),
    ("DVB-T", "64-QAM 3/4", 33.2),
    ("DVB-T", "64-QAM 5/6", 34.9),
    ("DVB-T", "64-QAM 7/8", 36.1),
    ("DVB-T2", "64-QAM 1/2", 25.8),
    ("DVB-T2", "64-QAM 3/5", 27.9),
    ("DVB-T2", "64-QAM 2/3", 29.4),
    ("DVB-T2", "64-QAM 3/4", 31.0),
    ("DVB-T2", "64-QAM 4/5", 32.2),
    ("DVB-T2", "64-QAM 5/6", 32.8),
    ("DVB-T2", "256-QAM 1/2", 29.2),
    ("DVB-T2", "256-QAM 3/5", 31.9),
    ("DVB-T2", "256-QAM 2/3", 33.7),
    ("DVB-T2", "256-QAM 3/4", 35.9),
    ("DVB-T2", "256-QAM 4/5", 37.3),
    ("DVB-T2", "256-QAM 5/6", 38.0),
]


@pytest.mark.parametrize(("system", "mode", "printed_dbuv"), LEAST)
def test_least_level_is_outlet_cn_and_11_6(system, mode, printed_dbuv):
    assert minimum_level_dbuv(mode_of(system, mode)) == pytest.approx(printed_dbuv, abs=1e-6)


def test_every_row_of_the_standard_was_compared():
    assert len(LEAST) == 17
    assert minimum_level_dbuv(mode_of("DVB-T", "QPSK 1/2")) is None


def test_11_6_is_thermal_noise_and_a_noise_figure_of_8():
    """k T0 B in 7.61 MHz is 3.59 dB(µV), 8.0 dB of noise figure make 11.59 (D on S2)."""
    assert dbuv_from_dbm(noise_power_dbm(7.61)) + 8.0 == pytest.approx(MINIMUM_OVER_CN_DBUV, abs=0.02)


@pytest.mark.parametrize(
    ("system", "mode", "lowest", "highest"),
    [
        ("DVB-T", "16-QAM 2/3", 36, 74),
        ("DVB-T", "64-QAM 2/3", 45, 74),
        ("DVB-T2", "16-QAM 2/3", 35, 74),
        ("DVB-T2", "64-QAM 2/3", 39, 74),
        ("DAB", "PL 3", 28, 94),
        ("DAB+", "EEP 3-A", 28, 94),
        ("FM", "mono", 40, 70),
        ("FM", "stereo", 50, 70),
    ],
)
def test_window_of_en_60728_1(system, mode, lowest, highest):
    """EN 60728-1, quoted on a manufacturer's compendium page (S2)."""
    window = level_window(system, mode)
    assert (window.lowest_dbuv, window.highest_dbuv, window.flag) == (lowest, highest, "S2")


def test_window_of_spain():
    """RD 346/2011: 47 to 70 dB(µV) for terrestrial television (S2)."""
    for system, mode in (("DVB-T", "64-QAM 2/3"), ("DVB-T2", "256-QAM 2/3")):
        window = level_window(system, mode, "spain")
        assert (window.lowest_dbuv, window.highest_dbuv) == (47, 70)
