"""The CSV of transmitters: what is kept, what is refused and with which words."""

from datetime import date

import pytest

from app.errors import TransmitterFileError
from app.systems import systems
from app.transmitters import csv_text, template
from app.transmitters.model import Multiplex
from app.transmitters.template import COLUMNS, read_template, template_example
from tests.app.template_text import MOBILE, PLAIN, only_refusal, text_of

# What is kept


def test_the_example_is_kept_whole(read):
    result = read(template_example(), "example.csv")
    assert result.refused == ()
    assert [e.id for e in result.emissions] == [
        "example:mast-one:first-multiplex:634",
        "example:mast-one:second-multiplex:658",
        "example:mast-two:first-multiplex:530",
    ]
    first, second, third = result.emissions
    assert [t.ground_amsl_m for t in result.transmitters] == [182.0, None]
    assert result.multiplexes[0] == Multiplex("example:first-multiplex", "First Multiplex")
    assert third.multiplex_id == first.multiplex_id  # one multiplex from two masts
    assert first.flags == ("frequency-from-channel",)
    assert second.flags == ("erp-unknown",)
    assert third.flags == ("frequency-from-channel", "pattern-assumed-round")
    assert (second.attenuation_db(0), second.attenuation_db(180), second.attenuation_db(355)) == (9, 0, 9)
    assert (second.valid_from, third.valid_to) == (date(2026, 3, 1), date(2030, 12, 31))
    assert third.polarisation == "vertical"


def test_channel_47_of_the_european_raster_is_682_mhz(read):
    """European 8 MHz UHF raster (GE06 Agreement): centre 306 + 8 n MHz, so channel 47 is at 682 MHz."""
    (emission,) = read(text_of({})).emissions
    assert (emission.channel, emission.frequency_mhz, emission.bandwidth_mhz) == ("47", 682.0, 8.0)


def test_narrow_channels_take_the_widths_of_their_systems(read):
    """DAB 1.712 and 1.536 MHz, T2-Lite 1.7 MHz, FM 0.2 MHz: the widths of `app/data/noise_bandwidths.csv`."""
    named = {system.name: system.modes[0].name for system in systems()}
    rows = [
        PLAIN | {"frequency_mhz": f"{200 + 5 * n}", "system": system, "mode": named[system], "bandwidth_mhz": width}
        for n, (system, width) in enumerate(
            [("DAB", "1.712"), ("DAB", "1.536"), ("DAB+", "1.712"), ("DVB-T2-Lite", "1.7"), ("FM", "0.2")]
        )
    ]
    result = read(text_of(*rows))
    assert not result.refused
    assert [one.bandwidth_mhz for one in result.emissions] == [1.712, 1.536, 1.712, 1.7, 0.2]


def test_mobile_networks_are_blocks_by_name_or_by_frequency_and_width(read):
    """EU 700 downlink 758 to 788 MHz, ECC/DEC/(15)01, and US 600 617 to 652 MHz (MH, from memory)."""
    by_frequency = MOBILE | {"channel": "", "frequency_mhz": "763", "bandwidth_mhz": "10"}
    result = read(text_of(MOBILE, by_frequency, MOBILE | {"channel": "America-600-downlink"}))
    assert not result.refused
    told = [(one.system, one.mode, one.channel, one.frequency_mhz, one.bandwidth_mhz) for one in result.emissions]
    assert told == [
        ("mobile", "", "europe-700-downlink", 773.0, 30.0),
        ("mobile", "", "", 763.0, 10.0),
        ("mobile", "", "america-600-downlink", 634.5, 35.0),
    ]


def test_a_stated_frequency_wins_over_the_channels_centre(read):
    (emission,) = read(text_of({"frequency_mhz": "682.166"})).emissions
    assert (emission.channel, emission.frequency_mhz, emission.flags) == ("47", 682.166, ())


def test_a_frequency_alone_needs_its_width_or_its_raster(read):
    alone = {"channel": "", "raster": "", "frequency_mhz": "682"}
    (emission,) = read(text_of(alone | {"bandwidth_mhz": "8"})).emissions
    assert (emission.channel, emission.bandwidth_mhz) == ("", 8.0)
    (emission,) = read(text_of(alone | {"raster": "europe-uhf-8"})).emissions
    assert (emission.channel, emission.bandwidth_mhz) == ("47", 8.0)
    assert only_refusal(read(text_of(alone))).message.startswith("bandwidth_mhz is empty: write the width")


def test_empty_optional_cells_are_flagged_or_left_open_but_never_made_up(read):
    result = read(text_of({"pattern_db": "", "on": ""}))
    assert result.transmitters[0].ground_amsl_m is None
    assert result.emissions[0].flags == ("frequency-from-channel", "pattern-assumed-round")
    assert result.emissions[0].on


@pytest.mark.parametrize(
    ("change", "flag"),
    [
        ({"erp_kw": "<=20"}, "erp-unknown"),
        ({"erp_kw": "≤ 20"}, "erp-unknown"),
        ({"pattern_db": "unknown"}, "pattern-unknown"),
        ({"pattern_db": " ".join(["2"] * 36)}, "pattern-above-maximum"),
    ],
)
def test_what_is_not_known_for_sure_leaves_a_flag(read, change, flag):
    (emission,) = read(text_of(change)).emissions
    assert flag in emission.flags
    assert emission.erp_kw == 20


def test_an_emission_can_be_off(read):
    assert not read(text_of({"on": "no"})).emissions[0].on


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "cp1252", "utf-16", "utf-16-le", "utf-16-be"])
@pytest.mark.parametrize("line_end", ["\n", "\r\n", "\r"])
def test_encodings_and_line_ends_make_no_difference(read, encoding, line_end):
    result = read(text_of({"transmitter": "Höhe Ä"}).replace("\n", line_end).encode(encoding))
    assert [t.name for t in result.transmitters] == ["Höhe Ä"]
    assert result.transmitters[0].id == "mine:höhe-ä"
    assert result.encoding == encoding


@pytest.mark.parametrize("separator", [";", "\t"])
def test_decimal_commas_go_with_semicolons_and_tabs(read, separator):
    change = {"latitude_deg": "44,412", "longitude_deg": "-36,905", "erp_kw": "1,5"}
    result = read(text_of(change, separator=separator))
    assert result.transmitters[0].latitude_deg == 44.412
    assert result.emissions[0].erp_kw == 1.5
    assert result.separator == separator


def test_decimal_points_go_with_semicolons_too(read):
    assert read(text_of({"erp_kw": "1.5"}, separator=";")).emissions[0].erp_kw == 1.5


def test_a_file_with_decimal_commas_has_no_points_for_thousands(read):
    change = {"latitude_deg": "44,412", "longitude_deg": "-36,905", "erp_kw": "1.500"}
    refusal = only_refusal(read(text_of(change, separator=";")))
    assert refusal.column == "erp_kw"


def test_a_spreadsheets_sep_line_a_blank_line_and_empty_rows_are_passed_over(read):
    text = "sep=;\n" + text_of({}, separator=";").replace("\n", "\n\n") + ";;;;;;;;;;;;;;;;;\n"
    result = read(text)
    assert (len(result.emissions), result.rows_read) == (1, 1)


def test_columns_come_in_any_order_and_unknown_ones_are_named(read):
    result = read(text_of({"remark": "x"}, columns=(*reversed(COLUMNS), "remark")).replace("erp_kw", "ERP_kW"))
    assert len(result.emissions) == 1
    assert result.ignored_columns == ("remark",)


def test_lines_are_counted_as_an_editor_counts(read):
    text = text_of({}, {"erp_kw": "1O0", "channel": "48"}).replace("\n", "\r\n")
    assert only_refusal(read("\r\n" + text)).line == 4


# What is refused


@pytest.mark.parametrize(
    ("change", "column", "words"),
    [
        ({"erp_kw": "1O0"}, "erp_kw", 'erp_kw is "1O0": write a number such as 100'),
        ({"erp_kw": ""}, "erp_kw", "erp_kw is empty: write a number such as 100"),
        ({"erp_kw": "nan"}, "erp_kw", "write a number"),
        ({"erp_kw": "inf"}, "erp_kw", "write a number"),
        ({"erp_kw": "1_000"}, "erp_kw", "write a number"),
        ({"erp_kw": "1,5"}, "erp_kw", "write a number"),
        ({"erp_kw": "٣"}, "erp_kw", "write a number"),
        ({"erp_kw": "20 kW"}, "erp_kw", "write a number"),
        ({"erp_kw": "0"}, "erp_kw", "use more than 0, up to 5000 kW"),
        ({"erp_kw": "-3"}, "erp_kw", "use more than 0"),
        ({"erp_kw": "20000"}, "erp_kw", "is it in W? 20000 W is 20 kW"),
        ({"latitude_deg": "nan"}, "latitude_deg", "write a number such as 44.412"),
        ({"latitude_deg": "44°24'"}, "latitude_deg", "write a number"),
        ({"latitude_deg": ""}, "latitude_deg", "latitude_deg is empty"),
        ({"latitude_deg": "95"}, "latitude_deg", "use -90 to 90 degrees; latitude and longitude swapped?"),
        ({"longitude_deg": "-190"}, "longitude_deg", "use -180 to 180 degrees"),
        ({"latitude_deg": "0", "longitude_deg": "0"}, "latitude_deg", "stands for a missing one"),
        ({"ground_amsl_m": "9000"}, "ground_amsl_m", "use -450 to 6000 m"),
        ({"antenna_agl_m": ""}, "antenna_agl_m", "antenna_agl_m is empty"),
        ({"antenna_agl_m": "0"}, "antenna_agl_m", "use 1 to 700 m above the ground"),
        ({"antenna_agl_m": "-5"}, "antenna_agl_m", "use 1 to 700 m"),
        ({"antenna_agl_m": "5000"}, "antenna_agl_m", "use 1 to 700 m"),
        ({"channel": "99"}, "channel", 'has no channel "99": use 21 to'),
        ({"raster": "moon"}, "raster", 'raster "moon" is not known'),
        ({"raster": ""}, "raster", 'channel "47" needs the name of its raster'),
        ({"channel": "", "raster": ""}, "channel", "write a channel"),
        ({"frequency_mhz": "690"}, "frequency_mhz", "channel 47 of europe-uhf-8 is at 682 MHz"),
        ({"frequency_mhz": "682000"}, "frequency_mhz", "is it in kHz? 682000 kHz is 682 MHz"),
        ({"frequency_mhz": "682000000"}, "frequency_mhz", "is it in Hz? 682000000 Hz is 682 MHz"),
        ({"frequency_mhz": "12"}, "frequency_mhz", "use 45 to 1000 MHz"),
        ({"bandwidth_mhz": "7"}, "bandwidth_mhz", "channels of europe-uhf-8 have 8 MHz"),
        ({"bandwidth_mhz": "30"}, "bandwidth_mhz", "use 0.1 to 8 MHz"),
        (PLAIN | {"bandwidth_mhz": "5"}, "bandwidth_mhz", "DVB-T2 has no channels of 5 MHz in the table: use 8, 7, 6"),
        (MOBILE | {"channel": "700"}, "channel", 'block "700" is not known: use one of europe-700-uplink, '),
        (MOBILE | {"bandwidth_mhz": "10"}, "bandwidth_mhz", "block europe-700-downlink has 30 MHz there"),
        (MOBILE | {"mode": "256-QAM 2/3"}, "mode", "leave the mode empty"),
        (MOBILE | {"raster": "europe-uhf-8"}, "raster", "have no raster: leave it empty"),
        (MOBILE | {"channel": "", "frequency_mhz": "763"}, "bandwidth_mhz", "write a number such as 10"),
        ({"system": "DVB-T9"}, "system", 'system "DVB-T9" is not known: use DVB-T'),
        ({"system": ""}, "system", "is not known"),
        ({"mode": "maximum"}, "mode", 'DVB-T2 has no mode "maximum": use one of'),
        ({"polarisation": "Q"}, "polarisation", "write one of horizontal, vertical, mixed"),
        ({"polarisation": ""}, "polarisation", "polarisation is empty"),
        ({"pattern_db": "1 2 3"}, "pattern_db", "(3 came)"),
        ({"pattern_db": " ".join(["0"] * 35 + ["-1"])}, "pattern_db", "36 attenuations from 0 to 60 dB"),
        ({"pattern_db": " ".join(["0"] * 35 + ["99"])}, "pattern_db", "write 36 attenuations"),
        ({"valid_from": "31.12.2026"}, "valid_from", "write a date as year-month-day"),
        ({"valid_from": "2026-02-30"}, "valid_from", "write a date"),
        ({"valid_from": "2026-02-02", "valid_to": "2026-02-01"}, "valid_to", "before valid_from, 2026-02-02"),
        ({"on": "maybe"}, "on", "write one of yes, no"),
        ({"transmitter": ""}, "transmitter", "write a name"),
        ({"transmitter": "?!"}, "transmitter", "with a letter or digit"),
        ({"multiplex": "x" * 121}, "multiplex", "1 to 120 characters"),
    ],
)  # fmt: skip
def test_a_bad_cell_is_told_with_what_is_allowed_and_the_others_stay(read, change, column, words):
    result = read(text_of({"channel": "21", "multiplex": "Good"}, change))
    refusal = only_refusal(result)
    assert (refusal.line, refusal.column) == (3, column)
    assert words in refusal.message
    assert [m.name for m in result.multiplexes] == ["Good"]
    assert (result.rows_read, result.rows_refused) == (2, 1)


def test_every_bad_cell_of_a_row_is_told_and_the_row_counts_once(read):
    result = read(text_of({"erp_kw": "x", "mode": "y", "antenna_agl_m": "z"}))
    assert [refusal.column for refusal in result.refused] == ["mode", "erp_kw", "antenna_agl_m"]
    assert result.rows_refused == 1


def test_an_open_quote_spoils_its_own_line_only(read):
    lines = text_of({"channel": "21"}, {"channel": "22"}, {"channel": "23"}).splitlines()
    lines[2] = '"' + lines[2]
    result = read("\n".join(lines))
    assert only_refusal(result).line == 3
    assert "a quote is opened and not closed" in only_refusal(result).message
    assert [e.channel for e in result.emissions] == ["21", "23"]


def test_a_comma_inside_quotes_is_part_of_the_name_and_outside_is_a_cell_too_many(read):
    assert read(text_of({"transmitter": "Mast, old"})).transmitters[0].name == "Mast, old"
    text = text_of({"transmitter": "Mast, old"}).replace('"', "")
    assert "the row has 21 cells and the header 20" in only_refusal(read(text)).message


def test_a_last_line_cut_short_is_refused(read):
    text = text_of({}, {"channel": "48", "erp_kw": "2000"})
    cut = text[: text.rindex("2000") + 1]  # ends in "2"
    assert only_refusal(read(cut)).line == 3


# Files that cannot be used at all


def header_without(*left_out):
    return ",".join(column for column in COLUMNS if column not in left_out).encode()


@pytest.mark.parametrize(
    ("content", "words"),
    [
        (b"", "is empty: write a header"),
        (b"\n \r\n", "is empty"),
        (b"\xef\xbb\xbf", "is empty"),
        (b"a,b,c\n1,2,3\n", 'its first line is "a,b,c"'),
        (b"\x89PNG\r\n\x1a\n\x00\x00\x00\rIHDR", "is not a text file: save it as CSV"),
        (b"PK\x03\x04\x14\x00\x06\x00", "export the sheet as CSV"),
        (b"abc\x81\x8d", "is not a text file"),
        (header_without("system", "erp_kw"), "has no column system, erp_kw: add it"),
        (header_without("channel", "frequency_mhz"), r"no column channel \(with raster\) or frequency_mhz"),
        (",".join((*COLUMNS, "mode")).encode(), "has the column mode twice"),
    ],
)  # fmt: skip
def test_a_file_that_is_no_table_of_transmitters_says_what_to_do(read, content, words):
    with pytest.raises(TransmitterFileError, match=words):
        read(content)


def test_a_folder_and_a_missing_file_are_told_apart(tmp_path):
    with pytest.raises(TransmitterFileError, match="is a folder: name the CSV file inside it"):
        read_template(tmp_path)
    with pytest.raises(TransmitterFileError, match=r"cannot be read \(No such file"):
        read_template(tmp_path / "none.csv")


def test_a_huge_file_is_refused_by_its_size_alone(tmp_path):
    path = tmp_path / "huge.csv"
    with path.open("wb") as file:
        file.truncate(csv_text.LARGEST_FILE_MB * 1_000_000 + 1)
    with pytest.raises(TransmitterFileError, match="the limit is 64 MB: split it"):
        read_template(path)


def test_too_many_rows_are_refused(read, monkeypatch):
    monkeypatch.setattr(template, "MOST_ROWS", 1)
    with pytest.raises(TransmitterFileError, match="has 2 rows, the limit is 1"):
        read(text_of({}, {"channel": "48"}))


@pytest.mark.parametrize("name", ["demo.csv", "Demo.CSV", "-.csv"])
def test_a_file_cannot_take_the_demos_name(read, name):
    with pytest.raises(TransmitterFileError, match="give the file a name"):
        read(text_of({}), name)


def test_thousands_of_rows_are_read_in_moments(read):
    """A country's worth of rows; the time is watched by whoever runs the tests, not asserted."""
    changes = [
        {
            "transmitter": f"M{n}",
            "latitude_deg": f"{40 + n % 100 / 10:.4f}",
            "longitude_deg": f"{-40 + n // 100 / 10:.4f}",
        }
        for n in range(2_000)
    ]
    result = read(text_of(*changes))
    assert (len(result.transmitters), result.rows_refused) == (2_000, 0)


# Single-frequency networks


def test_guard_interval_and_delay_are_kept_as_the_tables_write_them(read):
    (one,) = read(text_of({"guard": "32k  1/8", "static_delay_us": "-12.5"})).emissions
    assert (one.guard, one.static_delay_us) == ("32K 1/8", -12.5)
    (other,) = read(text_of({})).emissions
    assert (other.guard, other.static_delay_us) == ("", None)


def test_guard_interval_that_the_system_has_not_lists_those_it_has(read):
    message = only_refusal(read(text_of({"guard": "8K 1/3"}))).message
    assert 'DVB-T2 has no guard interval "8K 1/3"' in message
    assert "32K 1/128 1/32" in message


def test_delay_of_hours_is_refused(read):
    assert "use -5000 to 5000 µs" in only_refusal(read(text_of({"static_delay_us": "3600000000"}))).message
