"""Rec. ITU-R P.372 Table 1 and thermal noise."""

import pytest

from propagation.noise import man_made_fam_db, noise_power_dbm


@pytest.mark.parametrize(
    ("environment", "c", "d"),
    [
        ("city", 76.8, 27.7),
        ("residential", 72.5, 27.7),
        ("rural", 67.2, 27.7),
        ("quiet_rural", 53.6, 28.6),
    ],
)
def test_fam_is_the_table(environment, c, d):
    """Rec. ITU-R P.372, Table 1: Fam = c - d log f; at 1 MHz it is c, at 10 MHz c - d.

    Coefficients second-hand: six independent public programs agree.
    """
    assert man_made_fam_db([1.0, 10.0], environment) == pytest.approx([c, c - d])


def test_fam_in_the_television_bands():
    """Hand arithmetic from the table, log 200 = 2.30103: 76.8 - 63.74 = 13.1 and so on."""
    environments = ["city", "residential", "rural", "quiet_rural"]
    assert man_made_fam_db(200.0, environments) == pytest.approx([13.1, 8.8, 3.5, -12.2], abs=0.05)
    assert man_made_fam_db(100.0, environments) == pytest.approx([21.4, 17.1, 11.8, -3.6], abs=0.05)
    assert man_made_fam_db(600.0, "city") == pytest.approx(-0.2, abs=0.05)


@pytest.mark.parametrize(
    ("bandwidth_mhz", "power_dbm"), [(7.61, -105.16), (6.66, -105.74), (7.77, -105.07), (6.0, -106.2)]
)
def test_thermal_noise_of_television_channels(bandwidth_mhz, power_dbm):
    """k T0 B at 290 K, -173.975 dBm in 1 Hz plus 10 log B; published with k = 1.38e-23 (0.002 dB)."""
    assert noise_power_dbm(bandwidth_mhz) == pytest.approx(power_dbm, abs=0.03)
