"""Attenuation of coaxial cable against the figures the coefficients were fitted to and typical values."""

import pytest

from app.chain.feeder import feeder_loss_db, splitter_loss_db
from app.chain.parts import Feeder, Splitter

# ANSI/SCTE 74, greatest attenuation of Series 6, dB per 100 m, from memory (MH); 5.25 at 55 MHz and so on
SERIES_6 = [(55, 5.25), (211, 10.0), (500, 15.29), (750, 18.54), (870, 20.04), (1000, 21.49)]


def per_100_m(cable, frequency_mhz):
    return feeder_loss_db(Feeder(id="f", name="f", cable=cable, length_m=100), frequency_mhz)


@pytest.mark.parametrize(("frequency_mhz", "published_db"), SERIES_6)
def test_series_6_is_near_its_greatest_attenuation(frequency_mhz, published_db):
    """Two coefficients for six figures: within 0.3 dB per 100 m."""
    assert per_100_m("series-6", frequency_mhz) == pytest.approx(published_db, abs=0.3)


def test_splitters_lose_more_than_their_even_share():
    """Two stored installers' pages, US type, 5 to 1000 MHz (S2): 3.5, 7.0, 9 dB; European ones lose more."""
    for ports, us_type_db in ((2, 3.5), (4, 7.0), (6, 9.0)):
        loss_db = splitter_loss_db(Splitter(id="s", name="s", ports=ports))
        assert us_type_db <= loss_db <= us_type_db + 2
