"""Nuisance fields and their sums, as plans reckon them (GE06; Rec. ITU-R BT.1368), worked by hand in the tests."""

import math

import numpy as np
import pytest

from app.assumptions import Assumptions
from app.chain.parts import Aerial
from app.interference import Pairs, Spectra, degradation_db, nuisance_power, pairs_between, spectral_share
from app.rejection import rejection_db

# Wide enough a beam and strong enough a back that BT.419 alone decides at 30° and at 140°.
AERIAL = Aerial(
    id="a", name="a", gain_dbd=((470, 10), (694, 10)), beamwidth_deg=120, front_to_back_db=16, polarisation="horizontal"
)


def sum_db(*levels):
    return 10 * math.log10(sum(10 ** (level / 10) for level in levels))


def nuisance_dbuv(levels_dbuv, ratios_db, required_cn_db):
    """Sum for one wanted emission by the function that every margin goes through."""
    count = len(levels_dbuv)
    relative = ratios_db - required_cn_db
    pairs = Pairs(np.arange(count), np.zeros(count, dtype=int), relative, relative, ("",) * count, (count, 1))
    return 10 * math.log10(nuisance_power(10 ** (levels_dbuv / 10), pairs.weights(tropospheric=False))[0])


def test_two_equal_powers_add_up_to_3_01_db():
    """10 log 2 = 3.0103: arithmetic."""
    assert nuisance_dbuv(np.array([40.0, 40.0]), np.array([20.0, 20.0]), 20.0) == pytest.approx(43.0103, abs=1e-4)


def test_two_interferers_worked_by_hand():
    """Wanted 60 dB(µV), noise 20, required C/N 20.1, all on one channel.

    First interferer: 55 dB(µV) if pointed at, 30° off in Bands IV/V: BT.419-3 gives 0.4 x 10 = 4 dB -> 51.
    Second: 58 dB(µV), 140° off and the other polarisation: 16 dB, not 16 + 16 -> 42.
    I = 10 log(10^5.1 + 10^4.2) = 10 log(125893 + 15849) = 51.51; noise 20 adds 0.003.
    C/(N + I) = 60 - 51.51 = 8.48; margin without reserve 8.48 - 20.1 = -11.62.
    """
    rejected = rejection_db(
        AERIAL,
        np.array([650.0, 650.0]),
        np.array([30.0, 140.0]),
        "horizontal",
        ["horizontal", "vertical"],
        Assumptions(),
    )
    # The class pattern of a 120° beam loses 0.7 dB at 30° and never more than 16 dB.
    assert rejected == pytest.approx([4.0, 16.0], abs=1e-9)
    levels = np.array([55.0, 58.0]) - rejected
    total = nuisance_dbuv(levels, np.array([20.1, 20.1]), 20.1)
    assert total == pytest.approx(51.515, abs=0.005)
    i_over_c = np.array(10 ** ((total - 60) / 10))
    cn = 40.0 - float(degradation_db(np.array(40.0), i_over_c))
    assert cn - 20.1 == pytest.approx(-11.62, abs=0.01)


def test_usable_field_of_one_wanted_and_three_interferers_step_by_step():
    """GE06 style: nuisance field = interfering field + protection ratio - discrimination; the usable field is
    the power sum of the minimum field and the nuisance fields (method from memory, high confidence).

    Minimum field 47.2 for 20 dB C/N. Interferers: 35 co-channel (+20, 4 dB off axis) -> 51; 70 on the next
    channel (-30, on the axis) -> 40; 45 co-channel (+20, 16 dB behind) -> 49. Sum of 47.2, 51, 40, 49:
    52481 + 125893 + 10000 + 79433 = 267807 -> 54.28.
    """
    nuisance = nuisance_dbuv(np.array([35 - 4.0, 70.0, 45 - 16.0]), np.array([20.0, -30.0, 20.0]), 20.0)
    assert nuisance + 20.0 == pytest.approx(sum_db(51, 40, 49), abs=1e-9)
    usable = sum_db(47.2, nuisance + 20.0)
    assert usable == pytest.approx(54.28, abs=0.005)
    # At the usable field our sum leaves a margin of exactly nothing: noise-equivalent field 47.2 - 20.
    cn = usable - (47.2 - 20.0)
    i_over_c = np.array(10 ** ((nuisance - usable) / 10))
    assert cn - float(degradation_db(np.array(cn), i_over_c)) == pytest.approx(20.0, abs=1e-9)


@pytest.mark.parametrize(("sn_db", "published_db"), [(16.0, 23.0), (28.0, 15.0), (40.0, 15.0)])
def test_ratio_of_atsc_at_the_edge_comes_out_of_the_sum(sn_db, published_db):
    """OET Bulletin 69 (second-hand): co-channel D/U 15 dB at S/N 28 and above rises to 23 dB at S/N 16.

    The table follows 15 + 10 log(1 / (1 - 10^(-(S/N - 15.19)/10))), rounded to whole dB and starting from 15
    instead of 15.19: hence 0.5 dB. Nothing is applied on top of C/(N + I) >= 15.19.
    """
    needed = [
        du for du in np.arange(10.0, 30.0, 0.01) if sn_db - degradation_db(np.array(sn_db), 10 ** (-du / 10)) >= 15.19
    ]
    assert needed[0] == pytest.approx(published_db, abs=0.5)


def spectra(system, frequency_mhz, channel_mhz, occupied_mhz):
    return Spectra((system,), np.array([frequency_mhz]), np.array([channel_mhz]), np.array([occupied_mhz]))


def test_noise_like_signal_on_the_same_channel_counts_with_all_its_power():
    """PR = C/N required: Rec. ITU-R BT.1368 for noise-like interferers, a definition here."""
    pairs = pairs_between(spectra("DVB-T2", 650, 8, 7.77), np.array([20.1]), spectra("DVB-T", 650, 8, 7.61))
    power = nuisance_power(np.array([1000.0]), pairs.weights(tropospheric=False))
    assert power == pytest.approx([1000.0])


def test_rasters_of_different_width_count_by_spectral_share():
    """A 6 MHz signal of 5.57 MHz centred 5 MHz off an 8 MHz one of 7.61 MHz: (7.61 + 5.57) / 2 - 5 = 1.59 MHz."""
    assert float(spectral_share(np.array(5.0), np.array(7.61), np.array(5.57))) == pytest.approx(1.59 / 5.57)


@pytest.mark.parametrize(("offset_mhz", "ratio_db"), [(6.0, -26), (-6.0, -28), (12.0, -44), (-12.0, -44)])
def test_atsc_neighbours_take_their_own_ratios(offset_mhz, ratio_db):
    """OET Bulletin 69, Table 5A, from memory with high confidence: D/U of the upper and lower neighbours."""
    pairs = pairs_between(
        spectra("ATSC 1.0", 599, 6, 5.38), np.array([15.19]), spectra("ATSC 1.0", 599 + offset_mhz, 6, 5.38)
    )
    assert pairs.steady_db + 15.19 == pytest.approx([ratio_db])


@pytest.mark.parametrize(("offset", "ratio_db"), [(1, -30), (2, -40)])
def test_consistency_neighbours_of_dvb_t2(offset, ratio_db):
    """Rec. ITU-R BT.2033, planning values from memory, medium confidence: a consistency check only."""
    pairs = pairs_between(
        spectra("DVB-T2", 650, 8, 7.77), np.array([20.1]), spectra("DVB-T2", 650 + 8.0 * offset, 8, 7.77)
    )
    assert pairs.steady_db + 20.1 == pytest.approx([ratio_db])


def test_fm_stereo_takes_less_from_what_comes_and_goes():
    """Rec. ITU-R BS.412, from memory with high confidence: 45 dB steady, 37 dB tropospheric, on one frequency."""
    pairs = pairs_between(spectra("FM", 98.0, 0.2, 0.2), np.array([40.0]), spectra("FM", 98.0, 0.2, 0.2))
    assert (pairs.steady_db[0] + 40, pairs.tropospheric_db[0] + 40) == (45, 37)
