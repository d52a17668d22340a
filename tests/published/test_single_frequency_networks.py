"""Single-frequency networks: guard distances and weights of echoes."""

import numpy as np
import pytest

from app.network import LIGHT_KM_PER_US, echo_rise_db, rise_at_0_db, shares_by_start, split, symbol_of, useful_share

FIRST = "first above the threshold"


@pytest.mark.parametrize(
    ("system", "guard", "channel_mhz", "published_km"),
    [
        ("DVB-T", "8K 1/4", 8, 67.2),
        ("DVB-T", "8K 1/8", 8, 33.6),
        ("DVB-T", "8K 1/16", 8, 16.8),
        ("DVB-T", "8K 1/32", 8, 8.4),
        ("DVB-T", "8K 1/4", 7, 67.2 * 8 / 7),
        ("DVB-T2", "32K 1/128", 8, 8.4),
        ("DVB-T2", "32K 19/128", 8, 159.5),
    ],
)
def test_guard_distance_matches_the_standards(system, guard, channel_mhz, published_km):
    """EN 300 744 and EN 302 755, intervals from memory with high confidence; c = 0.2998 km/µs, rounded to 0.1 km."""
    symbol = symbol_of(system, channel_mhz, guard)
    assert symbol.guard_us * LIGHT_KM_PER_US == pytest.approx(published_km, abs=0.06)


def test_consistency_weight_beyond_the_guard_interval():
    """Rec. ITU-R BT.1368 and EBU practice, from memory, medium confidence: 8K, 28 µs, an echo at 50 µs: 0.951."""
    symbol = symbol_of("DVB-T", 8, "8K 1/32")
    assert float(useful_share(50.0, symbol)) == pytest.approx(0.951, abs=5e-4)
    assert float(useful_share(28.0, symbol)) == 1.0
    assert float(useful_share(262.0, symbol)) == 0.0  # beyond 7 Tu / 24 = 261.3 µs


def test_identical_twin_adds_3_01_db_of_power_and_no_interference():
    """10 log 2: arithmetic; equal delays are one signal to the set, so the required C/N does not rise."""
    symbol = symbol_of("DVB-T", 8, "8K 1/4")
    power, arrival = np.array([5.0, 5.0]), np.array([100.0, 100.0])
    share = split(power, arrival, shares_by_start(arrival, symbol), FIRST, 10.0)
    assert 10 * np.log10((share * power).sum() / 5.0) == pytest.approx(3.0103, abs=1e-4)
    assert ((1 - share) * power).sum() == 0
    assert float(echo_rise_db(power, arrival, 8.0, 2.0, 10.0)) == 0


def test_echo_raises_the_required_cn_only_when_it_is_later_than_one_over_the_bandwidth():
    """1 / 8 MHz = 0.125 µs: closer echoes are not resolved (definition)."""
    power = np.array([5.0, 5.0])
    rises = [float(echo_rise_db(power, np.array([0.0, late]), 8.0, 2.0, 10.0)) for late in (0.1, 0.2)]
    assert rises == [0.0, 2.0]


def test_consistency_rise_by_an_echo_of_0_db():
    """ETSI TS 102 831, Table 44, from memory, medium confidence: 256-QAM 2/3 20.3 less 18.1 dB."""
    assert rise_at_0_db("DVB-T2", "256-QAM 2/3") == pytest.approx(2.2)


def test_outside_the_window_all_power_disturbs_before_and_after():
    symbol = symbol_of("DVB-T", 8, "8K 1/32")
    power = np.array([1.0, 10.0, 1.0])
    arrival = np.array([0.0, 400.0, 900.0])
    shares = shares_by_start(arrival, symbol)
    assert split(power, arrival, shares, "strongest", 10.0) == pytest.approx([0, 1, 0])  # a pre-echo and a late one
    assert split(power, arrival, shares, FIRST, 15.0) == pytest.approx([1, 0, 0])  # the window starts at the first


def test_delay_of_hours_is_only_interference():
    symbol = symbol_of("DVB-T2", 8)
    arrival = np.array([0.0, 3.6e9])
    assert split(np.array([1.0, 0.5]), arrival, shares_by_start(arrival, symbol), FIRST, 10.0) == pytest.approx([1, 0])


def test_networks_reckoned_together_are_as_each_alone():
    symbols = [symbol_of("DVB-T", 8, "8K 1/32"), symbol_of("DVB-T2", 8)]
    arrival = np.array([[0.0, 20.0, 300.0], [5.0, 460.0, 2.0]])
    power = np.random.default_rng(3).uniform(0.1, 10, (7, 2, 3))
    shares = np.stack([shares_by_start(one, symbol) for one, symbol in zip(arrival, symbols, strict=True)])
    together = split(power, arrival, shares, FIRST, 10.0)
    rise = echo_rise_db(power, arrival, np.array([8.0, 7.0]), np.array([2.0, 1.0]), 10.0)
    for n, (width, most) in enumerate(((8.0, 2.0), (7.0, 1.0))):
        assert np.array_equal(together[:, n], split(power[:, n], arrival[n], shares[n], FIRST, 10.0))
        assert np.array_equal(rise[:, n], echo_rise_db(power[:, n], arrival[n], width, most, 10.0))
