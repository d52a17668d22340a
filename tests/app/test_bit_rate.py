import pytest

from app.bit_rate import GUARDS, useful_bit_rate
from app.errors import ModeError
from app.systems import systems


def test_without_a_guard_interval_the_rate_is_a_span():
    span = useful_bit_rate("DVB-T", "64-QAM 2/3", 8)
    assert span.lowest_mbit_s == useful_bit_rate("DVB-T", "64-QAM 2/3", 8, "1/4").lowest_mbit_s
    assert span.highest_mbit_s == useful_bit_rate("DVB-T", "64-QAM 2/3", 8, "1/32").highest_mbit_s
    assert span.flag == "S2"


def test_rate_scales_with_the_channel():
    for system, mode in (("DVB-T", "QPSK 1/2"), ("DVB-T2", "QPSK 1/2"), ("ISDB-T", "QPSK 1/2"), ("DTMB", "4-QAM 0.4")):
        whole = useful_bit_rate(system, mode, 8).highest_mbit_s
        assert useful_bit_rate(system, mode, 6).highest_mbit_s == pytest.approx(whole * 6 / 8)


def test_every_mode_has_a_rate_or_none():
    without = set()
    for system in systems():
        for mode in system.modes:
            rate = useful_bit_rate(system.name, mode.name, mode.bandwidths[0][0])
            if rate is None:
                without.add(system.name)
            else:
                assert 0 < rate.lowest_mbit_s <= rate.highest_mbit_s < 60
    assert without == {"DVB-T2-Lite", "ATSC 3.0", "DAB", "FM"}


def test_unknown_guard_interval_lists_the_known_ones():
    with pytest.raises(ModeError, match=r'DVB-T has no guard interval "1/3": use one of 1/4, 1/8, 1/16, 1/32'):
        useful_bit_rate("DVB-T", "QPSK 1/2", 8, "1/3")
    assert set(GUARDS) == {"DVB-T", "DVB-T2", "ISDB-T", "DTMB"}


def test_width_that_the_system_does_not_have_is_refused():
    with pytest.raises(ModeError, match=r"DVB-T has no channels of 5 MHz in the table: use 8, 7, 6 MHz"):
        useful_bit_rate("DVB-T", "QPSK 1/2", 5)
