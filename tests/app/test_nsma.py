import numpy as np
import pytest

from app.chain.pattern_files import pattern_from_bytes
from app.errors import ChainError

HEAD = (
    "REVNUM:,NSMA WG16.99.050\nREVDAT:,19990520\nCOMNT1:,Invented for a test\nANTMAN:,Nobody\nMODNUM:,Two-sided\n"
    "LOWFRQ:,470\nHGHFRQ:,694\nGUNITS:,{units} ! gain, levels\n"
    "LWGAIN:,8.15\nMDGAIN:,10.15,0.5\nHGGAIN:,12.15\nPATTYP:,{kind}\nNOFREQ:,2\n"
)


def cut(plane, polarisation, level):
    rows = "".join(f"{angle},{level(angle):.2f}\n" for angle in range(-180, 181, 5))
    return f"PATCUT:,{plane}\nPOLARI:,{polarisation}\nNUPOIN:,73\nFSTLST:,-180,180\n{rows}"


def lobe(width_deg):
    """Falls as a parabola to -20 dB, with a side lobe to the right."""
    return lambda angle: max(-12 * (angle / width_deg) ** 2, -20) + (12 if 90 <= angle <= 100 else 0)


def invented(units="DBI/DBR", kind="TYPICAL", end="ENDFIL:,EOF\n", top=0.0):
    """Two frequencies; of each a co-polar, a cross-polar and an upright cut."""
    text = HEAD.format(units=units, kind=kind)
    for frequency, width in ((470, 60), (694, 30)):
        text += f"PATFRE:,{frequency}\nNUMCUT:,3\n"
        text += cut("AZ", "H/H", lambda angle, width=width: lobe(width)(angle) + top)
        text += cut("AZ", "H/V", lambda _: -22 + top)
        text += cut("EL", "H/H", lambda _: -5 + top)
    return text + end


def read(text):
    return pattern_from_bytes("own.nsm", text.encode())


def test_invented_file_is_read_whole():
    pattern = read(invented())
    assert pattern.polarisations == ("horizontal",)
    assert [(one.frequency_mhz, one.emission) for one in pattern.cuts] == [
        (470, None),
        (470, "vertical"),
        (694, None),
        (694, "vertical"),
    ]
    # dBd = dBi − 2.15
    assert np.array(pattern.gain_dbd) == pytest.approx(np.array([(470, 6.0), (582, 8.0), (694, 10.0)]))
    assert pattern.loss_db([0, 30, -30], [470, 470, 694], "horizontal") == pytest.approx([0, 3, 12])
    assert pattern.cross_loss_db(0, [470.0], "horizontal") == pytest.approx([22])


def test_sides_differ_clockwise():
    """The side lobe stands to the right of the axis, at 95°."""
    assert read(invented()).loss_db([95, -95], [470.0], "horizontal") == pytest.approx([8, 20])


def test_absolute_levels_mean_the_same():
    """Levels in dBi instead of relative ones: only their differences count."""
    relative, absolute = read(invented()), read(invented("DBI/DBI", top=10.15))
    angles = np.arange(-180, 180, 7)
    assert absolute.loss_db(angles, 580.0, "horizontal") == pytest.approx(
        relative.loss_db(angles, 580.0, "horizontal"), abs=0.011
    )
    assert read(invented("DBD/DBR")).gain_dbd[0] == pytest.approx((470, 8.15))


def test_field_names_in_lower_case_tabs_and_carriage_returns_are_no_obstacle():
    text = invented().replace("PATCUT:,AZ", "patcut:,az").replace("H/H", "HH").replace("\n", "\r\n")
    assert read(text.replace("0,0.00", "0\t0.00")).cuts == read(invented()).cuts


def test_envelope_may_have_far_corners():
    """An envelope is a line by its corners, here with 90° between them."""
    corners = "PATCUT:,AZ\nPOLARI:,V/V\nNUPOIN:,6\n-180,-30\n-90,-30\n-20,0\n20,0\n90,-30\n180,-30\n"
    text = HEAD.format(units="DBD/DBR", kind="ENVELOPE") + corners + "ENDFIL:,EOF\n"
    pattern = read(text)
    assert pattern.loss_db([0, 55, -55, 135], [600.0], "vertical") == pytest.approx([0, 15, 15, 30])
    with pytest.raises(ChainError, match=r"own\.nsm: has 5 bearings: measure all round, every 15° or closer"):
        read(text.replace("ENVELOPE", "TYPICAL"))


@pytest.mark.parametrize(
    ("text", "message"),
    [
        (invented(end=""), "ends without ENDFIL: it was cut short: get the file again"),
        (invented("DBI/LIN"), 'GUNITS is "DBI/LIN": use DBD or DBI for the gain'),
        (invented(units=""), 'GUNITS is "": use'),
        (invented(top=3), "has a level of 3 dBr: levels relative to the strongest are 0 or less"),
        (invented().replace("AZ", "EL"), r"has no cut round the horizon in linear polarisation \(EL H/H"),
        (invented().replace("H/H", "RCP/RCP").replace("H/V", "RCP/LCP"), "no cut round the horizon in linear"),
        (invented().replace("H/H", "V/V"), "a H/V cut without the aerial's own: add H/H or V/V"),
        (
            invented().replace("-95,-20.00\n-90,-20.00\n-85,-20.00\n", ""),
            "own.nsm at 470 MHz: has a gap from 260° to 280°: measure every 15° or closer, all round",
        ),
        (invented().replace("0,0.00", "0,x"), 'line .*: the level is "x": write a number'),
        (invented().replace("LWGAIN:,8.15", "LWGAIN:,high"), 'LWGAIN is "high": write a number'),
        (invented().replace("PATCUT:,AZ", "what is this"), 'line .*: "what is this" is no field and no point'),
        (invented().replace("-45,", "-45,-3.0\n-45,"), "own.nsm at 470 MHz: says both"),
        (invented().replace("PATFRE:,694", "PATFRE:,470"), "has two cuts for the same frequency and polarisation"),
    ],
)
def test_what_is_wrong_is_told_with_the_mend(text, message):
    with pytest.raises(ChainError, match=message) as caught:
        read(text)
    assert caught.value.field == "pattern"
