import numpy as np
import pytest

from propagation.errors import RangeError
from propagation.noise import man_made_fam_db, noise_power_dbm, system_noise_factor


def test_quiet_outside_leaves_the_receiver_alone():
    """Fam -12 dB counts as an aerial at 290 K: 1 + frx - 1 = frx."""
    assert system_noise_factor(-12.2, 5.0) == pytest.approx(5.0)


def test_loud_outside_adds_to_the_receiver():
    """Fam 10 dB is a factor of 10; 10 + 5 - 1 = 14."""
    assert system_noise_factor(10.0, 5.0) == pytest.approx(14.0)


def test_allowance_for_man_made_noise_follows():
    """As an allowance: 10 log((frx + fext - 1) / frx), frx 7 dB = 5.012, Fam 3.46 dB = 2.218: 0.94 dB."""
    frx = 10**0.7
    assert 10 * np.log10(system_noise_factor(3.46, frx) / frx) == pytest.approx(0.944, abs=0.002)


def test_town_is_noisier_than_country():
    levels = man_made_fam_db(200.0, ["city", "residential", "rural", "quiet_rural"])
    assert (np.diff(levels) < 0).all()


def test_noise_falls_with_frequency():
    assert (np.diff(man_made_fam_db(np.array([50.0, 200.0, 600.0]), "city")) < 0).all()


def test_noise_grows_with_bandwidth_and_noise_figure():
    assert noise_power_dbm(8.0) - noise_power_dbm(4.0) == pytest.approx(3.01, abs=0.01)
    assert noise_power_dbm(8.0, 10.0) - noise_power_dbm(8.0) == pytest.approx(10.0)


@pytest.mark.parametrize(
    ("call", "message"),
    [
        (lambda: man_made_fam_db(0.1, "city"), r"use 0\.3 MHz or more"),
        (lambda: man_made_fam_db(100.0, "village"), "use city, residential, rural, quiet_rural"),
        (lambda: system_noise_factor(0.0, 0.5), "use 1 or more"),
        (lambda: noise_power_dbm(0.0), "use more than 0 MHz"),
    ],
)
def test_impossible_values_are_refused(call, message):
    with pytest.raises(RangeError, match=message):
        call()
