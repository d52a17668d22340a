"""Channel rasters against single published channels, typed here one by one; sources and flags beside each."""

import numpy as np
import pytest

from app.channels import centre_mhz, channel_of, rasters

# raster, channel, centre MHz, bandwidth MHz, source, flag
POINTS = [
    ("europe-uhf-8", "21", 474.0, 8.0, "GE06: 470 to 478 MHz", "S2"),
    ("europe-uhf-8", "47", 682.0, 8.0, "GE06", "S2"),
    ("europe-uhf-8", "48", 690.0, 8.0, "GE06: 686 to 694 MHz", "S2"),
    ("europe-uhf-8", "60", 786.0, 8.0, "GE06", "S2"),
    ("europe-uhf-8", "69", 858.0, 8.0, "GE06", "S2"),
    ("europe-vhf-7", "5", 177.5, 7.0, "GE06: 174 to 181 MHz", "S2"),
    ("europe-vhf-7", "12", 226.5, 7.0, "GE06: 223 to 230 MHz", "S2"),
    ("europe-vhf-8", "6", 178.0, 8.0, "GE06: 174 to 182 MHz, from memory", "MH"),
    ("europe-vhf-8", "12", 226.0, 8.0, "GE06: 222 to 230 MHz, from memory", "MH"),
    ("americas-6", "2", 57.0, 6.0, "47 CFR 73.603: 54 to 60 MHz, from memory", "MH"),
    ("americas-6", "4", 69.0, 6.0, "47 CFR 73.603, from memory", "MH"),
    ("americas-6", "5", 79.0, 6.0, "47 CFR 73.603: 76 to 82 MHz, from memory", "MH"),
    ("americas-6", "6", 85.0, 6.0, "47 CFR 73.603, from memory", "MH"),
    ("americas-6", "7", 177.0, 6.0, "47 CFR 73.603: 174 to 180 MHz, from memory", "MH"),
    ("americas-6", "13", 213.0, 6.0, "47 CFR 73.603: 210 to 216 MHz, from memory", "MH"),
    ("americas-6", "14", 473.0, 6.0, "47 CFR 73.603: 470 to 476 MHz, from memory", "MH"),
    ("americas-6", "36", 605.0, 6.0, "47 CFR 73.603: 602 to 608 MHz, from memory", "MH"),
    ("isdb-t-americas-6", "14", 473.142857, 6.0, "ABNT NBR 15601, from memory", "MH"),
    ("isdb-t-americas-6", "27", 551.142857, 6.0, "ABNT NBR 15601, from memory", "MH"),
    ("isdb-t-japan-6", "13", 473.142857, 6.0, "ARIB STD-B31, from memory", "MH"),
    ("isdb-t-japan-6", "27", 557.142857, 6.0, "ARIB STD-B31, from memory", "MH"),
    ("isdb-t-japan-6", "52", 707.142857, 6.0, "ARIB STD-B31, from memory", "MH"),
    ("australia-7", "6", 177.5, 7.0, "ACMA, from memory", "MH"),
    ("australia-7", "9A", 205.5, 7.0, "ACMA, from memory", "MH"),
    ("australia-7", "12", 226.5, 7.0, "ACMA, from memory", "MH"),
    ("australia-7", "28", 529.5, 7.0, "ACMA: 526 to 533 MHz, from memory", "MH"),
    ("australia-7", "51", 690.5, 7.0, "ACMA: 687 to 694 MHz, from memory", "MH"),
    ("dab-band-iii", "5A", 174.928, 1.536, "Wiesbaden 1995, GE06, from memory", "MH"),
    ("dab-band-iii", "12B", 225.648, 1.536, "Wiesbaden 1995, GE06, from memory", "MH"),
    ("dab-band-iii", "13F", 239.2, 1.536, "Wiesbaden 1995, GE06, from memory", "MH"),
    ("fm-100", "87.5", 87.5, 0.2, "Rec. ITU-R BS.450, from memory", "MH"),
    ("fm-100", "108.0", 108.0, 0.2, "Rec. ITU-R BS.450, from memory", "MH"),
    ("fm-americas-200", "201", 88.1, 0.2, "47 CFR 73.201, from memory", "MH"),
    ("fm-americas-200", "300", 107.9, 0.2, "47 CFR 73.201, from memory", "MH"),
    ("fm-japan-100", "76.0", 76.0, 0.2, "Japanese FM band, from memory", "MH"),
    ("fm-japan-100", "95.0", 95.0, 0.2, "Japanese FM band, from memory", "MH"),
]
RECALLED = [
    ("south-africa-vhf-8", "4", 178.0, 8.0),
    ("south-africa-vhf-8", "11", 234.0, 8.0),
    ("china-8", "6", 171.0, 8.0),
    ("china-8", "24", 562.0, 8.0),
    ("china-8", "25", 610.0, 8.0),
    ("china-8", "36", 698.0, 8.0),
]


@pytest.mark.parametrize(("raster", "channel", "centre", "bandwidth", "source", "flag"), POINTS)
def test_centre_and_channel_agree_with_the_plan(raster, channel, centre, bandwidth, source, flag):
    """Tolerance 1e-6 MHz: the ISDB-T centres are printed to that digit."""
    assert centre_mhz(raster, channel) == pytest.approx((centre, bandwidth), abs=1e-6)
    assert channel_of(raster, centre) == channel


@pytest.mark.parametrize(("raster", "channel", "centre", "bandwidth"), RECALLED)
def test_consistency_with_national_plans_recalled_with_less_certainty(raster, channel, centre, bandwidth):
    """National plans of South Africa and China (GB 3174), from memory, flag MM."""
    assert centre_mhz(raster, channel) == (centre, bandwidth)
    assert channel_of(raster, centre) == channel


def test_every_raster_is_checked_at_one_point_or_more():
    assert {raster.id for raster in rasters()} == {point[0] for point in (*POINTS, *RECALLED)}
    assert len(POINTS) == 36


def test_dab_blocks_keep_their_distance():
    """EN 50248 and GE06, from memory (MH): 1.712 MHz between blocks of a 7 MHz channel; 38 blocks and three N."""
    (dab,) = (raster for raster in rasters() if raster.id == "dab-band-iii")
    assert len(dab.channels) == 41
    for channel in range(5, 13):
        centres = [dab.channels[f"{channel}{letter}"].centre_mhz for letter in "ABCD"]
        assert np.diff(centres) == pytest.approx(np.full(3, 1.712), abs=1e-6)
