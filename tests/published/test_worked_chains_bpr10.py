"""Planning chains of ATSC 1.0: ISED BPR-10, Appendix 8, Table 1 (inputs read there, flag S).

E = C/N − Kd − Ka − G + L + Nt + Ns, with the dipole factor Kd, Nt = −106.2 dBm in 6 MHz and
Ka = 20 log(615 / f) at UHF. The rounded thresholds 28, 36 and 41 dB(µV/m) are those of 47 CFR 73.622(e), from
memory (MH).
"""

import math

import pytest

from app.levels import level_dbuv
from app.planning_field import minimum_field
from propagation.units import dbm_from_dbuv

# frequency MHz, Kd dB, gain dBd, downlead loss dB, system noise figure dB, Pn dBm, E by hand, threshold
ROWS = [
    pytest.param(69, -111.8, 4, 1, 10, -96.2, 27.6, 28, id="F1"),
    pytest.param(194, -120.8, 6, 2, 10, -96.2, 35.6, 36, id="F2"),
    pytest.param(615, -130.8, 10, 4, 7, -99.2, 40.6, 41, id="F3"),
]


def chain(frequency_mhz, gain_dbd, loss_db, figure_db):
    return minimum_field(
        frequency_mhz=frequency_mhz,
        noise_bandwidth_mhz=6,
        noise_figure_db=figure_db,
        required_cn_db=15,
        gain_dbd=gain_dbd,
        feeder_loss_db=loss_db,
    )


@pytest.mark.parametrize(("frequency", "kd", "gain", "loss", "figure", "pn", "by_hand", "threshold"), ROWS)
def test_bpr10_table_1(frequency, kd, gain, loss, figure, pn, by_hand, threshold):
    """Pn and Kd are printed to 0.1 dB, so each is within 0.05; E by hand joins both roundings, within 0.1."""
    got = chain(frequency, gain, loss, figure)
    assert dbm_from_dbuv(level_dbuv(0, 0, frequency)) == pytest.approx(kd, abs=0.05)
    assert got.noise_dbw + 30 == pytest.approx(pn, abs=0.05)
    assert got.minimum_power_dbw + 30 == pytest.approx(pn + 15, abs=0.05)
    assert got.minimum_field_dbuv_m == pytest.approx(by_hand, abs=0.1)
    assert got.minimum_field_dbuv_m == pytest.approx(threshold, abs=0.5)


@pytest.mark.parametrize(
    ("frequency", "ka", "by_hand"),
    [pytest.param(605, 0.142, 40.46, id="F4"), pytest.param(473, 2.280, 38.32, id="F5")],
)
def test_bpr10_dipole_adjusted_thresholds(frequency, ka, by_hand):
    """Formula S, arithmetic D, with the printed Kd = −130.8 of 615 MHz.

    Ka within its printed digits; E within 0.1 as it carries the roundings of Kd and Nt.
    """
    got = chain(frequency, 10, 4, 7)
    assert chain(615, 10, 4, 7).minimum_field_dbuv_m - got.minimum_field_dbuv_m == pytest.approx(ka, abs=5e-4)
    assert ka == pytest.approx(20 * math.log10(615 / frequency), abs=5e-4)
    assert got.minimum_field_dbuv_m == pytest.approx(by_hand, abs=0.1)
