"""Replay of worked examples: counts, failures that must be seen, folders that cannot be read."""

import csv
import json
import math
from pathlib import Path

import pytest

from app.errors import RequestError
from app.verify import half_of_last_digit, verify

PROFILE = [(0, 20, 4), (2, 35, 4), (4, 15, 4), (6, 40, 4), (8, 25, 4), (10, 10, 4)]


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A folder of one case whose published field is wrong, so that its failures can be read."""
    place = tmp_path / "one_set"
    (place / "cases").mkdir(parents=True)
    (place / "profiles").mkdir()
    write_rows(
        place / "profiles" / "hills.csv",
        ["distance_km", "terrain_m_amsl", "cover_class", "clutter_height_m", "zone"],
        [[x, h, 2, 0, zone] for x, h, zone in PROFILE],
    )
    write_rows(place / "index.csv", ["case", "profile"], [["hills_1", "profiles/hills.csv"]])
    write_case(place)
    return place


def write_rows(path: Path, header: list, rows: list) -> None:
    with path.open("w", newline="", encoding="utf-8") as file:
        csv.writer(file).writerows([header, *rows])


def write_case(place: Path, **changed) -> None:
    case = {
        "case": "hills_1",
        "recommendation": "ITU-R P.1546-6",
        "profile": "profiles/hills.csv",
        "profile_first_point": "tx",
        "inputs": {
            "frequency_mhz": 600.0,
            "time_percent": 50.0,
            "location_percent": 50,
            "erp_kw": 1.0,
            "tx_height_m_agl": 100.0,
            "rx_height_m_agl": 10.0,
            "tx_clutter_height_m": 0.0,
            "rx_clutter_height_m": 10.0,
            "rx_environment": "Rural",
        },
        # mean ground from 2 to 10 km, by trapezoids over 2 km: (17.5 + 15 + 40 + 25 + 5) * 2 / 8 = 25.625
        "derived_inputs": {"h1_source_height_m": 100 + 20 - 25.625, "path_length_km": 10},
        "intermediate": {},
        "expected": {"field_dbuv_m": 0.0, "basic_transmission_loss_db": 0.0},
    } | changed
    (place / "cases" / "hills_1.json").write_text(json.dumps(case), encoding="utf-8")


def test_packaged_examples_all_agree():
    report = verify()
    assert [(s.name, s.recommendation, s.cases, s.failed) for s in report.sets] == [
        ("p1546", "ITU-R P.1546-6", 52, 0),
        ("p1812", "ITU-R P.1812", 63, 0),
    ]
    assert [s.values_compared for s in report.sets] == [1196, 2898]
    assert all(s.values_failed == 0 and s.largest_difference_db <= 1e-6 for s in report.sets)
    assert report.failed == 0


def test_document_has_the_fixed_fields():
    document = verify().document()
    fixed = {"name", "recommendation", "cases", "failed", "largest_difference_db"}
    assert all(fixed <= set(entry) for entry in document["sets"])
    json.dumps(document)


def test_text_has_a_line_for_each_set():
    lines = verify().text().splitlines()
    assert len(lines) == 2
    assert lines[0].startswith("ITU-R P.1546-6 (p1546): 52 cases, none failed; largest difference in field and loss")
    assert lines[1].endswith("2898 of 2898 other values within their printed digits")


def test_text_tells_each_failed_case(folder):
    headline, failure = verify(folder).text().splitlines()
    assert "1 case, 1 failed" in headline
    assert failure.startswith("hills_1: field_dbuv_m off by")


def test_wrong_published_field_fails_its_case(folder):
    report = verify(folder)
    assert (report.sets[0].name, report.sets[0].cases, report.sets[0].failed) == ("one_set", 1, 1)
    assert report.failed == 1
    assert "field_dbuv_m off by" in report.sets[0].failures[0]
    assert report.sets[0].largest_difference_db > 10


def test_folder_above_is_read_as_its_sets(folder):
    assert [s.name for s in verify(folder.parent).sets] == ["one_set"]


def test_wrong_intermediate_fails_its_case(folder):
    write_case(
        folder,
        intermediate={"rx_height_correction_db": 0.001},
    )
    report = verify(folder).sets[0]
    assert report.values_failed == 1
    assert "rx_height_correction_db is 0, published 0.001" in report.failures[0]


def test_wrong_derived_input_fails_its_case(folder):
    write_case(
        folder,
        derived_inputs={"h1_source_height_m": 94.0},
    )
    assert "h1_source_height_m is 94.375, published 94" in verify(folder).sets[0].failures[0]


def test_profile_stored_receiver_first_is_turned_round(folder):
    """Same hills, first point the receiver: the transmitter stands at 10 m.

    Mean ground 0.2 d to d from there: by trapezoids over 25, 40, 15, 35, 20 m:
    (32.5 + 27.5 + 25 + 27.5) * 2 / 8 = 28.125.
    """
    write_case(
        folder,
        profile_first_point="rx",
        derived_inputs={"h1_source_height_m": 100 + 10 - 28.125},
    )
    assert verify(folder).sets[0].values_failed == 0


def test_warm_sea_is_taken_from_the_case(folder):
    """The profile says 4 km of sea, half way round points at 2 and 4 km; it does not say how warm."""
    write_rows(
        folder / "profiles" / "hills.csv",
        ["distance_km", "terrain_m_amsl", "cover_class", "clutter_height_m", "zone"],
        [[x, 0, 1, 0, 1 if x in (2, 4) else 4] for x, _, _ in PROFILE],
    )
    sections = [{"surface": "land", "length_km": 6.0}, {"surface": "warm_sea", "length_km": 4.0}]
    write_case(folder, derived_inputs={"sections": sections})
    assert verify(folder).sets[0].values_failed == 0


def test_unknown_terrain_takes_the_inputs_as_published(folder):
    case = json.loads((folder / "cases" / "hills_1.json").read_text())
    write_case(
        folder,
        inputs=case["inputs"] | {"terrain_information": False},
        derived_inputs={"path_length_km": 9.0, "h1_source_height_m": 60.0, "rx_clearance_angle_deg": None},
        intermediate={"h1_m": 80.0},  # half way from 100 m over ground to 60 m, P.1546 eq. (5)
    )
    assert verify(folder).sets[0].values_failed == 0


@pytest.mark.parametrize(
    ("printed", "digits", "half"),
    [
        (63.3035, 6, 0.00005),
        (66.9, 6, 0.00005),
        (-3.80733e-05, 6, 5e-11),
        (0.0205643, 6, 5e-8),
        (32.43201856, 6, 5e-9),
        (121.1, 10, 5e-8),
    ],
)
def test_tolerance_is_half_the_last_printed_digit(printed, digits, half):
    assert half_of_last_digit(printed, digits) == pytest.approx(half + 1e-12, rel=1e-5)


def test_printed_zero_means_zero():
    assert half_of_last_digit(0.0, 6) == 1e-12


def test_missing_folder_says_what_one_holds(tmp_path):
    with pytest.raises(RequestError, match=r"is no folder: give one that holds index\.csv"):
        verify(tmp_path / "nowhere")


def test_folder_without_examples_says_what_is_needed(tmp_path):
    with pytest.raises(RequestError, match="holds no worked examples"):
        verify(tmp_path)


def test_listed_case_without_a_file_is_named(folder):
    (folder / "cases" / "hills_1.json").unlink()
    with pytest.raises(RequestError, match="missing there: hills_1"):
        verify(folder)


def test_case_that_is_not_listed_is_named(folder):
    (folder / "cases" / "more_1.json").write_text("{}")
    with pytest.raises(RequestError, match="not in the list: more_1"):
        verify(folder)


def test_broken_json_gives_the_line(folder):
    (folder / "cases" / "hills_1.json").write_text('{"case": 1,\n oops')
    with pytest.raises(RequestError, match=r"hills_1\.json is no JSON \(line 2"):
        verify(folder)


def test_missing_field_of_a_case_is_named(folder):
    (folder / "cases" / "hills_1.json").write_text('{"recommendation": "ITU-R P.1546-6"}')
    with pytest.raises(RequestError, match=r"hills_1\.json lacks 'profile'"):
        verify(folder)


def test_missing_profile_is_named(folder):
    (folder / "profiles" / "hills.csv").unlink()
    with pytest.raises(RequestError, match=r"hills_1\.json cannot be read.*hills\.csv"):
        verify(folder)


def test_profile_without_a_height_is_refused_with_its_case(folder):
    write_rows(
        folder / "profiles" / "hills.csv",
        ["distance_km", "terrain_m_amsl", "cover_class", "clutter_height_m", "zone"],
        [[x, "" if x == 4 else h, 2, 0, zone] for x, h, zone in PROFILE],
    )
    with pytest.raises(RequestError, match="case hills_1 cannot be computed: profile lacks a height"):
        verify(folder)


def test_other_recommendation_is_refused(folder):
    write_case(folder, recommendation="ITU-R P.370")
    with pytest.raises(RequestError, match=r'"ITU-R P\.370" is not'):
        verify(folder)


def test_number_that_is_none_is_refused(folder):
    write_case(folder, expected={"field_dbuv_m": math.nan, "basic_transmission_loss_db": 0.0})
    with pytest.raises(RequestError, match="a number is needed"):
        verify(folder)


def test_missing_input_is_named(folder):
    write_case(
        folder,
        inputs={"frequency_mhz": 600.0},
    )
    with pytest.raises(RequestError, match="lacks the input 'rx_environment'"):
        verify(folder)
