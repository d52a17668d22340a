import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.chain.match import (
    MATCH_IS_NOT_GAIN,
    PADS,
    Measurement,
    match_over_channels,
    measured_match,
    mismatch_loss_db,
    return_loss_db,
    vswr,
)
from app.chain.touchstone import Touchstone, touchstone_from_bytes
from app.errors import ChainError

BAND = np.linspace(470, 694, 113)
CHANNELS = [("21", 474.0, 8.0), ("48", 690.0, 8.0)]


def sweep(raw, reference_ohm=50.0, frequency_mhz=BAND, name="roof.s1p"):
    raw = np.broadcast_to(np.asarray(raw, dtype=complex), np.shape(frequency_mhz)).reshape(-1, 1, 1)
    return Touchstone(name, np.asarray(frequency_mhz, dtype=float), raw, np.array([reference_ohm]))


def two_port(s21=0.5, frequency_mhz=BAND, name="pad.s2p"):
    s = np.zeros((len(frequency_mhz), 2, 2), dtype=complex)
    s[:, 0, 1] = s[:, 1, 0] = s21
    return Touchstone(name, np.asarray(frequency_mhz, dtype=float), s, np.array([50.0, 50.0]))


def at_75(raw, **kwargs):
    return measured_match(Measurement(sweep(raw), **kwargs))


def test_calibrated_behind_the_pad_nothing_is_removed():
    """Also if the pad is named: its loss went into the calibration."""
    plain = measured_match(Measurement(sweep(0.3j, 75), "behind-pad"))
    named = measured_match(Measurement(sweep(0.3j, 75), "behind-pad", "minimum-loss"))
    assert plain.reflection == pytest.approx(0.3j)
    assert named.reflection == pytest.approx(0.3j)
    assert not named.pad_loss_db.any()


def test_load_used_in_calibration_wins_over_what_the_file_says():
    match = measured_match(Measurement(sweep(0.3j, 50), "behind-pad", standard_ohm=75))
    assert match.reflection == pytest.approx(0.3j)


def test_open_and_short_come_through_every_pad():
    """Ahead of a pad of 75 ohms, an open and a short are what the pad's resistors make of them."""
    assert at_75(1, calibrated="before-pad", pad="none").reflection == pytest.approx(1)
    assert at_75(-1, calibrated="before-pad", pad="none").reflection == pytest.approx(-1)
    # minimum-loss pad, open behind it: 86.60 ohms across the analyser; short: 86.60 beside 43.30, 28.87 ohms
    for ohm, behind in ((86.6025403784, 1), (28.8675134595, -1)):
        raw = (ohm - 50) / (ohm + 50)
        assert at_75(raw, calibrated="before-pad", pad="minimum-loss").reflection == pytest.approx(behind, abs=1e-9)


@pytest.mark.parametrize("pad", ["none", "minimum-loss", "series-25", "own"])
@pytest.mark.parametrize("raw", [0.02, 0.1 + 0.1j, -0.15j, 0.2])
def test_band_holds_every_raw_reflection_within_the_uncertainty(pad, raw):
    """Against brute force: 3 600 points on the circle of 0.02 round the raw reflection."""
    own = two_port() if pad == "own" else None
    match = at_75(raw, calibrated="before-pad", pad=pad, own_pad=own)
    circle = raw + 0.02 * np.exp(1j * np.linspace(0, 2 * np.pi, 3601))
    round_it = Touchstone("c.s1p", np.linspace(470, 694, 3601), circle.reshape(-1, 1, 1), np.array([50.0]))
    brute = measured_match(Measurement(round_it, "before-pad", pad, own)).magnitude
    assert match.highest[0] == pytest.approx(brute.max(), abs=1e-5)
    # a perfect match inside the circle brings the least magnitude to 0
    assert match.lowest[0] <= brute.min() + 1e-5
    if match.lowest[0] > 0:
        assert match.lowest[0] == pytest.approx(brute.min(), abs=1e-5)


def test_floor_that_the_minimum_loss_pad_leaves():
    """The pad is passed twice, 11.44 dB: 0.02 of raw reflection stands for 0.02 · 3.732 = 0.0746, 22.5 dB."""
    match = at_75(0, calibrated="before-pad", pad="minimum-loss")
    assert match.floor == pytest.approx(0.02 * 10 ** (2 * 5.7195 / 20), abs=1e-5)
    assert return_loss_db(match.floor[0]) == pytest.approx(22.54, abs=0.01)
    assert at_75(0.2, calibrated="before-pad", pad="none").floor[0] < match.floor[0] / 3


def test_channels_tell_the_worst_and_the_mean():
    """A reflection of 0.2 all over: VSWR 1.5, 13.98 dB and 0.177 dB in every channel."""
    match = measured_match(Measurement(sweep(0.2, 75), "behind-pad"))
    for one in match_over_channels(match, CHANNELS):
        assert one.refused == ""
        assert one.vswr == pytest.approx(1.5)
        assert one.return_loss_db == pytest.approx(13.979, abs=1e-3)
        assert one.return_loss_low_db == pytest.approx(-20 * np.log10(0.22), abs=1e-6)
        assert one.return_loss_high_db == pytest.approx(-20 * np.log10(0.18), abs=1e-6)
        assert one.floor_db == pytest.approx(-20 * np.log10(0.02), abs=1e-6)
        assert one.mismatch_loss_db == pytest.approx(0.1773, abs=1e-4)


def test_channel_outside_the_sweep_is_refused_and_the_others_answered():
    match = measured_match(Measurement(sweep(0.2), "before-pad"))
    first, second = match_over_channels(match, [("60", 786.0, 8.0), ("30", 546.0, 8.0)])
    assert first.vswr is None
    assert "roof.s1p: channel 60: 782 to 790 MHz is not in the sweep of 470 to 694 MHz" in first.refused
    assert "measure the whole channel" in first.refused
    assert second.vswr is not None


def test_channel_between_two_points_is_refused():
    match = measured_match(Measurement(sweep(0.2, frequency_mhz=[470.0, 580.0, 694.0]), "before-pad"))
    (one,) = match_over_channels(match, [("30", 546.0, 8.0)])
    assert "no point between 542 and 550 MHz: measure with more points" in one.refused


def test_more_than_can_be_after_removal_is_refused_in_its_channel_only():
    """A pad that was not there is removed: at total reflection the result is no aerial."""
    raw = np.where(BAND < 480, 0.95, 0.1)
    match = measured_match(Measurement(sweep(raw), "before-pad", "minimum-loss"))
    first, last = match_over_channels(match, CHANNELS)
    assert "after removal of the pad, no aerial does that: check which pad it was" in first.refused
    assert first.mismatch_loss_db is None
    assert last.refused == ""
    assert np.isnan(mismatch_loss_db(match.pairs, 474))
    assert np.isfinite(mismatch_loss_db(match.pairs, 690))


def test_total_reflection_is_a_large_but_finite_loss():
    match = measured_match(Measurement(sweep(1.0, 75), "behind-pad"))
    (one,) = match_over_channels(match, CHANNELS[:1])
    assert one.return_loss_db == 0
    assert one.mismatch_loss_db == pytest.approx(-10 * np.log10(1 - 0.999**2))
    assert vswr(1.0) == np.inf


def test_loss_beyond_the_sweep_is_not_known():
    assert np.isnan(mismatch_loss_db([(470, 0.2), (694, 0.2)], [469, 700])).all()


@given(st.floats(0, 0.9), st.floats(0, 2 * np.pi), st.floats(0, 0.9), st.floats(0, 2 * np.pi))
def test_better_match_never_loses_more(one, turn_one, other, turn_other):
    losses = [
        float(mismatch_loss_db(measured_match(Measurement(sweep(m * np.exp(1j * t), 75), "behind-pad")).pairs, 600))
        for m, t in ((min(one, other), turn_one), (max(one, other), turn_other))
    ]
    assert losses[0] <= losses[1] + 1e-12


def test_match_says_that_it_is_not_gain():
    assert MATCH_IS_NOT_GAIN.startswith("Match is not gain")


def test_raw_reflection_above_one_is_refused_with_its_frequency():
    raw = np.where(np.abs(BAND - 600) < 0.1, 1.01, 0.2)
    with pytest.raises(ChainError, match=r"roof.s1p: a raw reflection of 1\.010 at 600 MHz.*calibrate the analyser"):
        at_75(raw, calibrated="before-pad")


@pytest.mark.parametrize(
    ("changes", "message"),
    [
        ({"calibrated": "there"}, "use behind-pad or before-pad"),
        ({"calibrated": "before-pad", "pad": "box"}, f"use {', '.join(PADS)}"),
        (
            {"calibrated": "before-pad", "pad": "own"},
            r"through a pad of your own: give its \.s2p",
        ),
        ({"calibrated": "behind-pad", "standard_ohm": 0}, "give the load used, 50 or 75 ohms"),
        ({"calibrated": "before-pad", "pad": "own", "own_pad": sweep(0.1, name="pad.s1p")}, "pad.s1p: has one port"),
        ({"calibrated": "before-pad", "pad": "own", "own_pad": two_port(0)}, "pad.s2p: lets nothing through"),
        (
            {"calibrated": "before-pad", "pad": "own", "own_pad": two_port(frequency_mhz=np.linspace(500, 600, 9))},
            "pad.s2p: covers 500 to 600 MHz, the aerial was swept over 470 to 694: measure the pad over",
        ),
    ],
)
def test_what_cannot_be_removed_is_told(changes, message):
    with pytest.raises(ChainError, match=message):
        at_75(0.1, **changes)


def test_two_port_is_no_sweep():
    with pytest.raises(ChainError, match=r"pad.s2p: has two ports: give the sweep of the aerial as \.s1p"):
        measured_match(Measurement(two_port(), "before-pad"))


def test_file_to_channels():
    """The whole way, from the text of a file: 0.2 at 75 ohms is VSWR 1.5."""
    text = "! invented\n# MHz S DB R 75\n" + "".join(f"{f:g} -13.9794 30\n" for f in range(470, 702, 4))
    match = measured_match(Measurement(touchstone_from_bytes("own.s1p", text.encode()), "behind-pad"))
    (one,) = match_over_channels(match, [("47", 682.0, 8.0)])
    assert one.vswr == pytest.approx(1.5, abs=1e-4)
