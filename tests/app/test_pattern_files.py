import pytest

from app.chain.pattern_files import pattern_from_bytes, read_pattern
from app.errors import ChainError

ANGLES = range(0, 360, 15)


def table(header="angle_deg,loss_db", row=lambda angle: f"{angle},{min(angle, 360 - angle) / 10}"):
    return "\n".join([header, *(row(angle) for angle in ANGLES)])


def read(text, name="own.csv"):
    return pattern_from_bytes(name, text.encode())


def test_losses_are_read():
    assert read(table()).loss_db([0, 90, 187.5], [600.0], "horizontal") == pytest.approx([0, 9, 17.25])


@pytest.mark.parametrize("unit", ["gain_dbd", "gain_dbi"])
def test_of_gains_only_the_differences_count(unit):
    gains = table(f"angle_deg,{unit}", lambda angle: f"{angle},{11.5 - min(angle, 360 - angle) / 10}")
    assert read(gains).loss_db([0, 90], [600.0], "horizontal") == pytest.approx([0, 9])


def test_semicolons_and_decimal_commas_are_read():
    text = table("Angle_deg; Loss_dB", lambda angle: f"{angle};{min(angle, 360 - angle) / 10}".replace(".", ","))
    assert read("\ufeff" + text.replace("\n", "\r\n")).cuts == read(table()).cuts


def test_frequency_polarisation_and_emission_make_cuts_of_their_own():
    rows = []
    for frequency, slope in ((500, 10), (600, 20)):
        rows += [f"{a},{-min(a, 360 - a) / slope},{frequency},horizontal,horizontal" for a in ANGLES]
        rows += [f"{a},-20,{frequency},H,v" for a in ANGLES]
    pattern = read("angle_deg,gain_dbd,frequency_mhz,polarisation,emission\n" + "\n".join(rows))
    assert len(pattern.cuts) == 4
    assert pattern.loss_db(90, [500.0, 550, 600], "horizontal") == pytest.approx([9, 6.75, 4.5])
    assert pattern.cross_loss_db(90, [500.0], "horizontal") == pytest.approx([20])


def test_least_loss_may_be_a_little_off_zero():
    """Measured, not drawn: 0.4 dB at the strongest direction is counted as 0."""
    raised = table(row=lambda angle: f"{angle},{0.4 + min(angle, 360 - angle) / 10}")
    assert read(raised).loss_db(0, [600.0], "horizontal") == pytest.approx(0)


def test_file_on_disk_is_read(tmp_path):
    path = tmp_path / "own.csv"
    path.write_text(table())
    assert read_pattern(path).name == "own.csv"


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", "own.csv: is empty: save it again"),
        (" ;;\n", "holds no more than separators: begin with a line such as angle_deg,loss_db"),
        ("\x00\x01", "is binary, not text"),
        ("bearing,loss\n0,1", 'the first line has a column "bearing": use angle_deg, loss_db'),
        (
            "angle_deg,frequency_mhz\n0,1",
            'first line is "angle_deg,frequency_mhz": one angle_deg and one of loss_db',
        ),
        ("angle_deg,loss_db,gain_dbd\n0,1,2", "one angle_deg and one of"),
        ("angle_deg,loss_db,loss_db\n0,1,2", "one angle_deg and one of"),
        ("angle_deg,loss_db", "has no cut round the horizon"),
        (table() + "\n7", "line 26 has 1 cells, the header 2: give one for each"),
        (table() + "\n7,deep", 'line 26: loss_db is "deep": write a number'),
        (table() + "\n7,nan", 'line 26: loss_db is "nan": write a number'),
        (table() + "\n7,1,5", "line 26 has 3 cells"),
        (table(row=lambda a: f"{a},{3 + a / 100}"), "its least loss is 3 dB: count it from the strongest direction"),
        ("angle_deg,loss_db,polarisation\n0,0,slant", 'line 2: polarisation is "slant": use horizontal or vertical'),
        ("angle_deg,loss_db,frequency_mhz\n0,0,7", 'line 2: frequency_mhz is "7": use 30 to 6000 MHz'),
        ("angle_deg,loss_db,emission\n0,0,h", "line 2: emission .*say the polarisation of the aerial as well"),
        (
            "angle_deg,loss_db,polarisation,emission\n0,0,h,v",
            "has the vertical emission only: measure the horizontal one as well",
        ),
        ("\n".join(table().splitlines()[:12]), "has a gap from 150° to 0°"),
    ],
)
def test_what_is_wrong_is_told_with_the_mend(text, message):
    with pytest.raises(ChainError, match=message) as caught:
        read(text)
    assert str(caught.value).startswith("own.csv")


def test_huge_file_is_refused_by_its_size(tmp_path):
    path = tmp_path / "huge.csv"
    with path.open("wb") as file:
        file.truncate(2_000_000_000)
    with pytest.raises(ChainError, match=r"huge.csv: has 2,000 MB, the limit is 10 MB"):
        read_pattern(path)
