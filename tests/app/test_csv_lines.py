"""Cells with line breaks, and a file that is imported twice: rows and line numbers stay right."""

import csv
import io

import pytest

from app.errors import TransmitterFileError
from app.transmitters.csv_text import read_table
from app.transmitters.store import Store
from app.transmitters.template import import_template

COLUMNS = ("transmitter", "multiplex", "channel")
GOOD = "latitude_deg,longitude_deg,raster,system,mode,erp_kw,polarisation,antenna_agl_m"
MAST = "44.412,-36.905,europe-uhf-8,DVB-T2,256-QAM 2/3,20,horizontal,150"


@pytest.fixture
def table(tmp_path):
    def read(text):
        path = tmp_path / "mine.csv"
        path.write_text(text, newline="")
        return read_table(path, COLUMNS)

    return read


def told(found):
    return [(row.line, *row.cells.values()) for row in found.rows], [one.line for one in found.refused]


@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_a_quoted_cell_with_line_breaks_is_one_row_and_the_lines_below_keep_their_numbers(table, end):
    """The same rows as Python's own reader finds; only where a row starts is ours."""
    text = end.join(
        ["transmitter,multiplex,channel", '"Mast', 'One",First,30', 'Two,"a', "", 'b, ""c""",31', "Three,Third,32", ""]
    )
    rows, refused = told(table(text))
    theirs = [[" ".join(cell.split()) for cell in row] for row in csv.reader(io.StringIO(text, newline=""))][1:]
    assert [list(row[1:]) for row in rows] == theirs
    assert [row[0] for row in rows] == [2, 4, 7]
    assert refused == []


def test_a_quote_left_open_spoils_its_own_line_and_no_other(table):
    rows, refused = told(table('transmitter,multiplex,channel\n"One,First,30\nTwo,Second,31\nThree,Third,32\n'))
    assert rows == [(3, "Two", "Second", "31"), (4, "Three", "Third", "32")]
    assert refused == [2]


def test_the_end_of_a_torn_row_is_never_taken_for_a_row_of_its_own(table):
    """Line 3 has three cells by itself, but its first belongs to the quote opened in line 2, which makes four."""
    rows, refused = told(table('transmitter,multiplex,channel\nOne,"Fi\nrst",30,31\nTwo,Second,31\n'))
    assert rows == [(4, "Two", "Second", "31")]
    assert refused == [2, 3]


def test_an_inch_mark_in_a_name_stays_a_letter(table):
    rows, refused = told(table('transmitter,multiplex,channel\nMast 12",First,30\n'))
    assert (rows, refused) == ([(2, 'Mast 12"', "First", "30")], [])


def test_a_quote_that_closes_hundreds_of_lines_below_does_not_swallow_them(table):
    lines = [f"M{k},First,30" for k in range(300)]
    rows, refused = told(table("\n".join(["transmitter,multiplex,channel", '"One', *lines, 'x",First,30'])))
    assert len(rows) == 301
    assert refused == [2]
    assert rows[-1][0] == 303


def file_of(path, good, bad):
    rows = [f"Mast,M{k},{k},{MAST}" for k in range(21, 21 + good)]
    rows += [f"Mast,N{k},{k},{MAST.replace('horizontal', 'sideways')}" for k in range(bad)]
    path.write_text("\n".join([f"transmitter,multiplex,channel,{GOOD}", *rows]))
    return path


def test_the_same_file_is_kept_the_second_time_as_it_was_the_first(tmp_path):
    """Half of its rows are refused; that loses nothing that is stored."""
    store = Store.open(tmp_path / "data")
    path = file_of(tmp_path / "mine.csv", good=5, bad=5)
    first = import_template(path, store)
    second = import_template(path, store)
    assert (len(first.added), len(second.added), len(second.changed), len(second.gone)) == (5, 0, 0, 0)
    assert second.result.rows_refused == first.result.rows_refused == 5


def test_a_spoilt_file_does_not_replace_more_rows_than_it_brings(tmp_path):
    store = Store.open(tmp_path / "data")
    import_template(file_of(tmp_path / "mine.csv", good=6, bad=0), store)
    with pytest.raises(TransmitterFileError, match=r"5 of 10 rows are refused, too many to replace the 6 rows stored"):
        import_template(file_of(tmp_path / "mine.csv", good=5, bad=5), store)
    assert len(store.emissions()) == 6
