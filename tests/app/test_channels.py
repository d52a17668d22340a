import itertools

import pytest

from app.channels import centre_mhz, channel_of, rasters
from app.errors import ModeError


def test_channel_text_is_taken_leniently():
    assert centre_mhz("Europe-UHF-8", " 047 ") == (682.0, 8.0)
    assert centre_mhz("australia-7", "9a") == (205.5, 7.0)


def test_historic_offset_of_a_sixth_megahertz_keeps_its_channel():
    assert channel_of("europe-uhf-8", 682 + 1 / 6) == "47"
    assert channel_of("europe-uhf-8", 682 - 1 / 6) == "47"


def test_fm_channels_are_called_by_their_frequency_and_kept_apart():
    assert centre_mhz("fm-100", "98.1") == (98.1, 0.2)
    assert channel_of("fm-100", 98.11) == "98.1"
    with pytest.raises(ModeError, match=r"98\.05 MHz is no channel's centre"):
        channel_of("fm-100", 98.05)


def test_there_and_back_on_every_channel():
    for raster in rasters():
        for name, channel in raster.channels.items():
            assert channel_of(raster.id, channel.centre_mhz) == name


def test_channels_of_a_raster_never_overlap():
    """FM channels do by design (the raster is finer than a channel), DAB's N blocks stand in for an A block."""
    for raster in rasters():
        if raster.id in ("fm-100", "fm-japan-100"):
            continue
        kept = [channel for channel in raster.channels.values() if not channel.name.endswith("N")]
        channels = sorted(kept, key=lambda channel: channel.centre_mhz)
        for low, high in itertools.pairwise(channels):
            assert high.centre_mhz - low.centre_mhz >= (low.bandwidth_mhz + high.bandwidth_mhz) / 2 - 1e-9


def test_every_channel_says_how_it_is_known():
    flags = {channel.flag for raster in rasters() for channel in raster.channels.values()}
    assert flags == {"S2", "MH", "MM"}
    assert all(channel.source for raster in rasters() for channel in raster.channels.values())


def test_unknown_raster_lists_the_known_ones():
    with pytest.raises(ModeError, match='raster "moon" is not known: use europe-uhf-8, europe-vhf-7'):
        centre_mhz("moon", "1")


def test_unknown_channel_lists_what_there_is():
    with pytest.raises(ModeError, match='raster americas-6 has no channel "37": use 2 to 36, 38 to 69'):
        centre_mhz("americas-6", "37")


@pytest.mark.parametrize("frequency_mhz", [678.0, float("nan"), 1000.0])
def test_frequency_off_the_raster_names_the_nearest_channel(frequency_mhz):
    with pytest.raises(ModeError, match="is no channel's centre in raster europe-uhf-8: the nearest is channel"):
        channel_of("europe-uhf-8", frequency_mhz)
