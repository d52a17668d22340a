"""Useful bit rates against the standards' tables, typed here row by row."""

import pytest

from app.bit_rate import GUARDS, useful_bit_rate

# EN 300 744, Annex, Mbit/s in 8 MHz at guard intervals 1/4, 1/8, 1/16, 1/32; device manual and public code (S2)
DVB_T = {
    "QPSK 1/2": (4.976, 5.529, 5.855, 6.032),
    "QPSK 2/3": (6.635, 7.373, 7.806, 8.043),
    "QPSK 3/4": (7.465, 8.294, 8.782, 9.048),
    "QPSK 5/6": (8.294, 9.216, 9.758, 10.053),
    "QPSK 7/8": (8.709, 9.676, 10.246, 10.556),
    "16-QAM 1/2": (9.953, 11.059, 11.709, 12.064),
    "16-QAM 2/3": (13.271, 14.745, 15.612, 16.086),
    "16-QAM 3/4": (14.929, 16.588, 17.564, 18.096),
    "16-QAM 5/6": (16.588, 18.431, 19.516, 20.107),
    "16-QAM 7/8": (17.418, 19.353, 20.491, 21.112),
    "64-QAM 1/2": (14.929, 16.588, 17.564, 18.096),
    "64-QAM 2/3": (19.906, 22.118, 23.419, 24.128),
    "64-QAM 3/4": (22.394, 24.882, 26.346, 27.144),
    "64-QAM 5/6": (24.882, 27.647, 29.273, 30.16),
    "64-QAM 7/8": (26.126, 29.029, 30.737, 31.668),
}


@pytest.mark.parametrize("mode", DVB_T)
def test_dvb_t_has_the_rates_of_its_table(mode):
    """Rounded to 1 kbit/s as printed, largest difference 0.5 kbit/s."""
    for guard, printed in zip(GUARDS["DVB-T"], DVB_T[mode], strict=True):
        rate = useful_bit_rate("DVB-T", mode, 8, guard)
        assert rate.lowest_mbit_s == rate.highest_mbit_s == pytest.approx(printed, abs=0.0006)


def test_dvb_t_in_seven_megahertz():
    """EN 300 744, table for 7 MHz: 64-QAM 3/4, 1/16: 23.053 Mbit/s (S2)."""
    assert useful_bit_rate("DVB-T", "64-QAM 3/4", 7, "1/16").lowest_mbit_s == pytest.approx(23.053, abs=0.0006)


# EN 302 755, greatest rates, 32K extended, 1/128, PP7, Mbit/s in 8 MHz, from memory (MH)
DVB_T2 = {
    "QPSK": (7.444, 8.946, 9.954, 11.198, 11.949, 12.457),
    "16-QAM": (15.037, 18.07, 20.107, 22.62, 24.136, 25.162),
    "64-QAM": (22.482, 27.016, 30.061, 33.818, 36.085, 37.619),
    "256-QAM": (30.075, 36.141, 40.215, 45.24, 48.273, 50.324),
}


@pytest.mark.parametrize(
    ("modulation", "off"), [("QPSK", 0.0101), ("16-QAM", 1e-4), ("64-QAM", 0.0034), ("256-QAM", 1e-4)]
)
def test_dvb_t2_is_near_the_greatest_rates_of_its_table(modulation, off):
    """One share of data cells, 0.9837 with four digits (5e-5), for 24 rates.

    The formula does not count whole FEC frames: up to a frame in 50 for QPSK, one in 151 for 64-QAM.
    """
    for rate, printed in zip(("1/2", "3/5", "2/3", "3/4", "4/5", "5/6"), DVB_T2[modulation], strict=True):
        got = useful_bit_rate("DVB-T2", f"{modulation} {rate}", 8, "1/128").highest_mbit_s
        assert printed * (1 - 5e-5) <= got <= printed * (1 + off)


def test_isdb_t_carries_its_usual_rate_in_twelve_segments():
    """ARIB STD-B31: 12 of 13 segments, 64-QAM 3/4, 1/8: 16.85 Mbit/s, from memory (MH)."""
    rate = useful_bit_rate("ISDB-T", "64-QAM 3/4", 6, "1/8").lowest_mbit_s
    assert rate * 12 / 13 == pytest.approx(16.85, abs=0.005)


def test_atsc_carries_19_39_megabits():
    """ATSC A/53 and Rec. ITU-R BT.1306-6: 19.39 Mbit/s (S)."""
    assert useful_bit_rate("ATSC 1.0", "8-VSB", 6).lowest_mbit_s == pytest.approx(19.39, abs=0.005)


def test_dab_plus_multiplex_of_equal_protection_3a():
    """EN 300 401: 864 capacity units, 6 for 8 kbit/s at EEP 3-A: 1152 kbit/s, from memory (MH)."""
    assert useful_bit_rate("DAB+", "EEP 3-A", 1.712).lowest_mbit_s == pytest.approx(1.152)


@pytest.mark.parametrize(
    ("mode", "guard", "printed"),
    [
        ("4-QAM-NR 0.8", "1/9", 5.414),
        ("4-QAM 0.4", "1/9", 5.414),
        ("16-QAM 0.4", "1/9", 10.829),
        ("16-QAM 0.6", "1/9", 16.243),
        ("16-QAM 0.8", "1/9", 21.658),
        ("32-QAM 0.8", "595/3780", 25.989),
        ("64-QAM 0.4", "1/9", 16.243),
        ("64-QAM 0.6", "1/9", 24.365),
        ("64-QAM 0.8", "1/9", 32.486),
    ],
)
def test_consistency_of_dtmb_with_its_rates_as_recalled(mode, guard, printed):
    """GB 20600, from memory with medium confidence (MM)."""
    assert useful_bit_rate("DTMB", mode, 8, guard).lowest_mbit_s == pytest.approx(printed, abs=0.0006)
