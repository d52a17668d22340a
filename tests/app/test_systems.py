import pytest

from app.errors import ModeError
from app.systems import mode_of, system_of, systems


@pytest.mark.parametrize(
    "text", ["256-QAM 2/3", "256QAM 2/3", "256qam2/3", "QAM256 2/3", "qam-256, 2/3", " 256 QAM  2/3 "]
)
def test_mode_text_is_taken_leniently(text):
    assert mode_of("dvbt2", text).name == "256-QAM 2/3"


@pytest.mark.parametrize("text", ["DVB-T2", "dvb t2", "DVBT2", "dvb_t2"])
def test_system_text_is_taken_leniently(text):
    assert system_of(text).name == "DVB-T2"


@pytest.mark.parametrize(
    ("system", "mode", "name"),
    [
        ("dab plus", "eep-3a", "EEP 3-A"),
        ("DAB+", "EEP 3-A", "EEP 3-A"),
        ("DAB", "pl3", "PL 3"),
        ("ATSC-3.0", "qam256 10/15", "256-QAM 10/15"),
        ("atsc 3.0", "QPSK 2/15", "QPSK 2/15"),
        ("dtmb", "qam4-nr 0.8", "4-QAM-NR 0.8"),
        ("DVB-T2 Lite", "qam16 2/5", "16-QAM 2/5"),
        ("fm", "Stereo", "stereo"),
    ],
)
def test_newer_systems_are_found_by_their_usual_names(system, mode, name):
    assert mode_of(system, mode).name == name


def test_dab_plus_is_not_dab():
    assert system_of("DAB+").name != system_of("DAB").name


def test_leniency_confuses_no_two_modes():
    for system in systems():
        for mode in system.modes:
            assert mode_of(system.name, mode.name) is mode


def test_planning_value_is_the_raw_figure_and_what_planning_adds():
    """We plan with: DVB-T Ricean + 3 dB, DVB-T2 raw Ricean + 2 dB, ATSC 1.0 as it is, ISDB-T + 2 dB."""
    added = {system.name: {mode.added_cn_db for mode in system.modes} for system in systems()}
    pinned = {"DVB-T": {3.0}, "DVB-T2": {2.0}, "ATSC 1.0": {0.0}, "ISDB-T": {2.0}}
    assert {name: added[name] for name in pinned} == pinned
    assert {mode.added_cn_db for mode in system_of("DAB").modes} == {0.0}  # planned as stated
    assert mode_of("DVB-T", "64-QAM 2/3").required_cn_db == pytest.approx(20.1)
    assert mode_of("DVB-T2", "256-QAM 2/3").required_cn_db == pytest.approx(20.1)
    assert mode_of("ISDB-T", "64-QAM 3/4").required_cn_db == pytest.approx(22.1)


def test_table_holds_every_mode():
    assert {system.name: len(system.modes) for system in systems()} == {
        "DVB-T": 15,
        "DVB-T2": 24,
        "ATSC 1.0": 1,
        "ISDB-T": 20,
        "DVB-T2-Lite": 22,
        "ATSC 3.0": 14,
        "DTMB": 9,
        "DAB": 1,
        "DAB+": 1,
        "FM": 2,
    }


def test_noise_figure_belongs_to_the_system():
    figures = {system.name: {mode.noise_figure_db for mode in system.modes} for system in systems()}
    pinned = {"DVB-T": {7.0}, "DVB-T2": {6.0}, "ATSC 1.0": {7.0}, "ISDB-T": {7.0}}
    assert {name: figures[name] for name in pinned} == pinned
    assert all(len(figure) == 1 for figure in figures.values())


def test_more_code_rate_needs_more():
    for system in systems():
        for modulation in {mode.name.split()[0] for mode in system.modes}:
            needed = [mode.required_cn_db for mode in system.modes if mode.name.split()[0] == modulation]
            assert needed == sorted(needed)


def test_noise_bandwidth_scales_with_the_channel():
    """Clocks of DVB-T, DVB-T2 and ISDB-T scale with the channel; 0.01 MHz is the rounding of the table."""
    for name, mode in (("DVB-T", "QPSK 1/2"), ("DVB-T2", "QPSK 1/2"), ("ISDB-T", "QPSK 1/2")):
        known = mode_of(name, mode)
        for width in (6, 7):
            scaled = known.noise_bandwidth_mhz(8) * width / 8
            assert known.noise_bandwidth_mhz(width) == pytest.approx(scaled, abs=0.011)


def test_every_figure_says_where_it_is_from():
    for system in systems():
        for mode in system.modes:
            assert mode.flag in {"S", "S2", "MH", "MM", "ML"}
            assert mode.source
    assert "EN 300 744" in mode_of("DVB-T", "QPSK 1/2").source
    assert "3 dB to planning" in mode_of("DVB-T", "QPSK 1/2").source


def test_unknown_system_lists_the_known_ones():
    with pytest.raises(ModeError, match=r'system "DVB-X" is not known: use DVB-T, DVB-T2, ATSC 1\.0, ISDB-T'):
        mode_of("DVB-X", "QPSK 1/2")


def test_unknown_mode_lists_those_of_the_system():
    with pytest.raises(ModeError, match='DVB-T has no mode "256-QAM 2/3": use one of QPSK 1/2, QPSK 2/3'):
        mode_of("DVB-T", "256-QAM 2/3")


def test_channel_width_outside_the_table_lists_those_in_it():
    with pytest.raises(ModeError, match=r"ATSC 1\.0 has no channels of 8 MHz in the table: use 6 MHz"):
        mode_of("ATSC 1.0", "8-VSB").noise_bandwidth_mhz(8)
