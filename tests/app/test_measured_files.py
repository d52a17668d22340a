"""Whatever a file holds: it is read, or refused by a ChainError that names it. Never anything else."""

import contextlib

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.chain.match import Measurement, match_over_channels, measured_match
from app.chain.pattern_files import pattern_from_bytes
from app.chain.touchstone import touchstone_from_bytes
from app.errors import ChainError

NUMBERS = st.one_of(
    st.integers(-400, 800), st.floats(width=32), st.sampled_from(["", "x", "1e400", "-0", "0x1", "1_0"])
)
LINES = st.one_of(
    st.lists(NUMBERS, max_size=9).map(lambda row: " ".join(map(str, row))),
    st.lists(NUMBERS, max_size=9).map(lambda row: ",".join(map(str, row))),
    st.sampled_from(
        [
            "# MHz S RI R 50",
            "# R 50 75 DB",
            "#",
            "! note",
            "[Version] 2.0",
            "[Network Data]",
            "[Reference] 75",
            "[End]",
            "REVNUM:,NSMA WG16.99.050",
            "GUNITS:,DBI/DBR",
            "PATCUT:,AZ",
            "POLARI:,H/H",
            "POLARI:",
            "PATFRE:,",
            "LOWFRQ:,470",
            "ENDFIL:,EOF",
            "angle_deg,loss_db",
            "angle_deg;gain_dbd;frequency_mhz;polarisation",
            '"',
        ]
    ),
    st.text(max_size=30),
)
FILES = st.one_of(st.binary(max_size=200), st.lists(LINES, max_size=20).map(lambda lines: "\n".join(lines).encode()))


@given(FILES, st.sampled_from(["a.s1p", "a.s2p", "a", "a.S1P"]))
def test_any_sweep_is_read_or_refused(content, name):
    with contextlib.suppress(ChainError):
        sweep = touchstone_from_bytes(name, content)
        for pad in ("none", "minimum-loss", "series-25"):
            with contextlib.suppress(ChainError):
                match_over_channels(measured_match(Measurement(sweep, "before-pad", pad)), [("21", 474.0, 8.0)])


@given(FILES)
def test_any_pattern_is_read_or_refused(content):
    with contextlib.suppress(ChainError):
        pattern_from_bytes("a.csv", content)


@given(st.lists(st.tuples(st.floats(-1, 1), st.floats(-1, 1)), min_size=2, max_size=40))
def test_any_reflection_gives_figures_or_a_reason(parts):
    """Also resonances, poles of the pad's removal and sparse sweeps."""
    rows = "".join(f"{470 + 3 * i} {real!r} {imaginary!r}\n" for i, (real, imaginary) in enumerate(parts))
    with contextlib.suppress(ChainError):
        sweep = touchstone_from_bytes("a.s1p", f"# MHz S RI R 50\n{rows}".encode())
        for pad in ("none", "minimum-loss", "series-25"):
            for one in match_over_channels(
                measured_match(Measurement(sweep, "before-pad", pad)), [("21", 474.0, 8.0), ("25", 506.0, 8.0)]
            ):
                assert (one.vswr is None) == bool(one.refused)
                if one.vswr is not None:
                    assert one.vswr >= 1
                    assert one.mismatch_loss_db >= 0
                    assert one.return_loss_low_db <= one.return_loss_db + 1e-9
                    assert one.return_loss_high_db >= one.return_loss_db - 1e-9


def test_fuzz_meets_good_files_too():
    assert touchstone_from_bytes("a.s1p", b"# MHz S RI R 50\n470 .1 0\n480 .1 0\n").frequency_mhz.size == 2
    with pytest.raises(ChainError):
        pattern_from_bytes("a.csv", b"")
