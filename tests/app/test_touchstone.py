import subprocess
import sys

import numpy as np
import pytest

from app.chain.files import LARGEST_BYTES
from app.chain.touchstone import read_touchstone, touchstone_from_bytes
from app.errors import ChainError

ROWS = "470 0.1 20\n480 0.2 30\n"


def read(text, name="roof.s1p"):
    return touchstone_from_bytes(name, text if isinstance(text, bytes) else text.encode())


def test_the_three_formats_say_the_same():
    by_angle = read(f"# MHz S MA R 50\n{ROWS}")
    in_db = read("# MHz S DB R 50\n470 -20 20\n480 -13.979400086720377 30\n")
    parts = read("# GHz S RI R 50\n0.47 0.0939692621 0.0342020143\n0.48 0.1732050808 0.1\n")
    assert np.abs(by_angle.s - in_db.s).max() < 1e-12
    assert np.abs(by_angle.s - parts.s).max() < 1e-9
    assert by_angle.frequency_mhz.tolist() == in_db.frequency_mhz.tolist() == [470, 480]
    assert parts.frequency_mhz == pytest.approx([470, 480])


def test_parts_of_the_option_line_may_stand_in_any_order_or_be_left_out():
    """Touchstone 1.1: the order is free; left out are GHz, S, MA and R 50."""
    assert np.allclose(read(f"# r 75 s ma mhz ! x\n{ROWS}").s, read(f"# MHz S MA R 75\n{ROWS}").s)
    bare = read("#\n0.47 0.1 20\n0.48 0.2 30\n")
    assert bare.frequency_mhz == pytest.approx([470, 480])
    assert bare.reference_ohm.tolist() == [50]


def test_comments_byte_order_mark_and_old_code_pages_are_no_obstacle():
    text = f"! gemessen für Dach\r\n# MHz S MA R 50\r\n{ROWS}"
    plain = read(text)
    assert np.array_equal(read(text.encode("utf-8-sig")).s, plain.s)
    assert np.array_equal(read(text.encode("latin-1")).s, plain.s)


def test_version_two_brings_its_reference_along():
    text = "[Version] 2.0\n# MHz S MA\n[Number of Ports] 1\n[Number of Frequencies] 2\n[Reference] 75\n[Network Data]\n"
    assert read(f"{text}{ROWS}[End]\n").reference_ohm.tolist() == [75]


def test_two_port_has_s21_before_s12_and_leaves_noise_figures_aside():
    """Touchstone 1.1: the order of a two-port's row is S11 S21 S12 S22; noise follows at a lower frequency."""
    two = read(
        "# MHz S RI R 50\n470 .1 0 .5 0 .4 0 .2 0\n480 .1 0 .5 0 .4 0 .2 0\n400 1 .3 20 .3\n500 1 .3 20 .3\n", "pad.s2p"
    )
    assert two.s[0].real.tolist() == [[0.1, 0.4], [0.5, 0.2]]
    assert two.frequency_mhz.tolist() == [470, 480]


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "roof.s1p: is empty: save it again"),
        (" \n\n", "is empty"),
        (b"\x89PNG\x00\x00", "is binary, not text: export it as text"),
        ("# MHz S MA R 50\n", "has 0 points: measure the band with at least 2, better 201"),
        ("# MHz S MA R 50\n470 0.1 20\n", "has 1 points"),
        (ROWS, "line 1: data before the option line: begin it with"),
        (f"# MHz S XX R 50\n{ROWS}", 'line 1: option line "# MHz S XX R 50" with "XX" is wrong: write it as'),
        (f"# MHz Z MA R 50\n{ROWS}", "line 1: holds Z-parameters .*: export S-parameters"),
        (f"# MHz S MA R ohm\n{ROWS}", 'line 1: "OHM" is no resistance'),
        (f"# MHz S MA R\n{ROWS}", 'with "R" is wrong'),
        (f"# MHz S MA R -50\n{ROWS}", "has a reference of -50 ohms"),
        (f"# MHz S MA R 50\n{ROWS}490 nan 3\n", 'line 4: "490 nan 3" is not a point: give 3 finite numbers a line'),
        (f"# MHz S MA R 50\n{ROWS}490 1e999 3\n", "line 4.*is not a point"),
        (f"# MHz S MA R 50\n{ROWS}490 0.1\n", "line 4.*is not a point"),
        (f"# MHz S MA R 50\n{ROWS}490 0.1 3 4 5\n", "line 4.*is not a point"),
        (f"# MHz S MA R 50\n{ROWS}475 0.1 3\n", "475 MHz follows 480 MHz: sort it by rising frequency"),
        (f"# MHz S MA R 50\n{ROWS}480 0.1 3\n", "480 MHz follows 480 MHz"),
        ("<html>not here</html>\n", "data before the option line"),
        (f"[Version] 2.0\n# MHz S MA\n[Network Data]\n[Rubbish] 3\n{ROWS}", "is not a Touchstone file of 1 port"),
    ],
)
def test_file_that_is_none_is_refused_by_name_and_mend(text, message):
    with pytest.raises(ChainError, match=message) as caught:
        read(text)
    assert str(caught.value).startswith("roof.s1p: ")
    assert caught.value.field == "match"


def test_other_kinds_of_file_are_refused():
    with pytest.raises(ChainError, match=r"roof.csv: is no \.s1p or \.s2p file: export it"):
        read("1,2,3", "roof.csv")


def test_huge_file_is_refused_without_being_read(tmp_path):
    """2 GB on disk, but sparse: reading it would take seconds and memory, the size takes neither."""
    path = tmp_path / "huge.s1p"
    with path.open("wb") as file:
        file.truncate(2_000_000_000)
    with pytest.raises(ChainError, match=r"huge.s1p: has 2,000 MB, the limit is 10 MB: export the measurement alone"):
        read_touchstone(path)
    with pytest.raises(ChainError, match="the limit is 10 MB"):
        read(b"!" * (LARGEST_BYTES + 1))


def test_missing_file_and_folder_are_told(tmp_path):
    with pytest.raises(ChainError, match=r"none\.s1p: there is no such file"):
        read_touchstone(tmp_path / "none.s1p")
    with pytest.raises(ChainError, match="cannot be read"):
        read_touchstone(tmp_path)


def test_file_on_disk_is_read(tmp_path):
    path = tmp_path / "Roof.S1P"
    path.write_text(f"# MHz S MA R 50\n{ROWS}")
    assert read_touchstone(path).name == "Roof.S1P"


def test_reader_is_imported_only_when_a_file_is_read():
    """scikit-rf costs a tenth of a second: a run without measured files does not pay it."""
    code = "import sys, app.chain.match, app.chain.touchstone; sys.exit('skrf' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
