"""The command line: the same answers as the API, exit codes, no traceback for what the user can mend."""

import json
import socket

import numpy as np
import pytest
from typer.testing import CliRunner

from app.cli import main
from app.demo.scenario import DEMO_ROOFS

NORTH = f"{DEMO_ROOFS[0].latitude_deg},{DEMO_ROOFS[0].longitude_deg}"


@pytest.fixture
def run(demo_world, monkeypatch):
    """Run a command on the demo's folders."""
    monkeypatch.setenv("GAINWORTH_DATA_DIR", str(demo_world.store.path.parent))

    def ran(*words, code=0):
        result = CliRunner().invoke(main, list(words))
        assert result.exit_code == code, result.output + repr(result.exception)
        if code == 2:
            assert "Traceback" not in result.output
            assert result.stdout == ""
        return result

    return ran


@pytest.fixture
def own(tmp_path, monkeypatch):
    """Empty folders of their own."""
    monkeypatch.setenv("GAINWORTH_DATA_DIR", str(tmp_path / "data"))
    return tmp_path


def test_assess_begins_with_the_decision(run):
    told = run("assess", "--at", NORTH, "--now", "roof-yagi").stdout
    assert "measure first" in told.splitlines()[2]
    assert "Measure first: channel " in told
    assert "On the roof" in told
    assert "local codes" in told


def test_assess_json_is_the_document(run):
    document = json.loads(run("assess", "--at", NORTH, "--now", "roof-yagi", "--json").stdout)
    assert document["verdicts"][0]["baseline"] == "roof-yagi"
    assert document["roof"]["latitude_deg"] == DEMO_ROOFS[0].latitude_deg


@pytest.mark.parametrize(
    ("words", "message"),
    [
        (("assess", "--at", "here"), 'position "here" cannot be read'),
        (("assess", "--at", "nan,1"), "cannot be read"),
        (("assess", "--at", "95,1"), "latitude 95 is beyond 90 degrees: is it 1,95"),
        (("assess", "--at", "1,2"), "no elevation at"),
        (("assess", "--at", "44.35,-37.15"), "out on the water"),
        (("assess", "--at", NORTH, "--height", "5000"), "use 1 to 200 m"),
        (("assess", "--at", NORTH, "--height", "-5"), "use 1 to 200 m"),
        (("assess", "--at", NORTH, "--chain", "no-such"), "no-such"),
        (("assess", "--at", NORTH, "--availability", "80"), "use 50, 90, 99"),
        (("assess", "--at", NORTH, "--surroundings", "moon"), "open, suburban, urban, trees"),
        (("path", "--from", NORTH, "--to", NORTH, "--frequency", "600"), "one place"),
        (("path", "--from", NORTH, "--to", "44.2,-37.5", "--frequency", "9"), "use 30 to 4000 MHz"),
        (("path", "--from", NORTH, "--to", "44.2,-37.5", "--frequency", "600", "--heights", "1"), "two numbers"),
        (("path", "--from", NORTH, "--to", "45.9,-37.5", "--frequency", "600"), "no elevation"),
        (("verify", "no-such-folder"), "no-such-folder"),
        (("transmitters", "import", "no-such.csv"), "no-such.csv"),
        (("terrain", "add", "no-such.tif"), "no-such.tif"),
    ],
)
def test_what_the_user_can_mend_is_one_line_and_exit_2(run, words, message):
    assert message in run(*words, code=2).stderr


def test_path_shows_both_methods(run):
    told = run("path", "--from", "44.2258,-37.4944", "--to", NORTH, "--frequency", "600").stdout
    assert "Rec. ITU-R P.1812-7" in told
    assert "Rec. ITU-R P.1546-6" in told
    document = json.loads(
        run("path", "--from", "44.2258,-37.4944", "--to", NORTH, "--frequency", "600", "--json").stdout
    )
    assert len(document["p1812"]["basic_loss_db"]) == 3
    assert len(document["drawing"]["distance_km"]) == len(document["drawing"]["ground_amsl_m"])


def test_verify_replays_both_sets(run):
    sets = json.loads(run("verify", "--json").stdout)["sets"]
    assert [(one["recommendation"], one["cases"], one["failed"]) for one in sets] == [
        ("ITU-R P.1546-6", 52, 0),
        ("ITU-R P.1812", 63, 0),
    ]
    assert all(one["largest_difference_db"] <= 1e-6 for one in sets)


def test_lists_name_what_is_stored(run):
    assert "high-gain-masthead" in run("chains", "list").stdout
    assert len(json.loads(run("transmitters", "list", "--json").stdout)) == 11
    assert json.loads(run("terrain", "list", "--json").stdout)[0]["state"] == "in use"


def test_template_can_be_imported_and_takes_the_demos_place(own):
    def run(*words):
        return CliRunner().invoke(main, list(words))

    file = own / "mine.csv"
    file.write_text(run("transmitters", "template").stdout)
    assert run("transmitters", "import", str(file), "--dry-run").exit_code == 0
    assert json.loads(run("transmitters", "list", "--json").stdout)[0]["source"] == "demo"
    assert run("transmitters", "import", str(file)).exit_code == 0
    assert {row["source"] for row in json.loads(run("transmitters", "list", "--json").stdout)} != {"demo"}


def test_raster_without_a_place_is_refused_and_can_be_declared(own):
    grid = own / "hills.asc"
    grid.write_text("ncols 3\nnrows 3\nxllcorner 10\nyllcorner 50\ncellsize 0.001\n" + "100 110 120\n" * 3)
    refused = CliRunner().invoke(main, ["terrain", "add", str(grid)])
    assert refused.exit_code == 2
    assert f"gainworth terrain add {grid} --crs EPSG:" in refused.stderr.replace("'", "")
    assert (
        CliRunner().invoke(main, ["terrain", "add", str(grid), "--crs", "EPSG:4326", "--kind", "bare"]).exit_code == 0
    )
    rows = json.loads(CliRunner().invoke(main, ["terrain", "list", "--json"]).stdout)
    assert next(row for row in rows if row["file"].startswith("hills"))["kind"] == "bare"


def test_serve_says_when_its_port_is_taken(own):
    with socket.socket() as taken:
        taken.bind(("127.0.0.1", 0))
        taken.listen()
        result = CliRunner().invoke(main, ["serve", "--port", str(taken.getsockname()[1])])
    assert result.exit_code == 2
    assert "use another one with --port" in result.stderr


def test_data_folder_that_cannot_be_made_is_said(own, monkeypatch):
    blocker = own / "file"
    blocker.write_text("")
    monkeypatch.setenv("GAINWORTH_DATA_DIR", str(blocker / "data"))
    result = CliRunner().invoke(main, ["chains", "list"])
    assert result.exit_code == 2
    assert "set GAINWORTH_DATA_DIR to a folder you may write" in result.stderr


def test_what_was_added_can_be_taken_out(own):
    def run(*words):
        return CliRunner().invoke(main, list(words))

    grid = own / "hills.asc"
    grid.write_text("ncols 3\nnrows 3\nxllcorner 10\nyllcorner 50\ncellsize 0.001\n" + "100 110 120\n" * 3)
    empty = own / "empty.tif"
    empty.write_text("")
    both = run("terrain", "add", str(empty), str(grid), "--crs", "EPSG:4326")
    assert both.exit_code == 2
    assert "hills.asc" in both.stdout
    assert "empty.tif is empty" in both.stderr
    assert run("terrain", "remove", "hills.asc").exit_code == 0
    assert run("terrain", "remove", "hills.asc").exit_code == 2
    file = own / "mine.csv"
    file.write_text(run("transmitters", "template").stdout)
    run("transmitters", "import", str(file))
    assert run("transmitters", "remove", "mine").exit_code == 0
    assert json.loads(run("transmitters", "list", "--json").stdout)[0]["source"] == "demo"


def test_raster_without_any_height_is_refused(own):
    grid = own / "void.asc"
    grid.write_text(
        "ncols 3\nnrows 3\nxllcorner 10\nyllcorner 50\ncellsize 0.001\nNODATA_value -9999\n" + "-9999 -9999 -9999\n" * 3
    )
    result = CliRunner().invoke(main, ["terrain", "add", str(grid), "--crs", "EPSG:4326"])
    assert result.exit_code == 2
    assert "holds no height at all" in result.stderr


def test_roof_at_a_mast_still_hears_the_others(run):
    mast = json.loads(run("transmitters", "list", "--json").stdout)[0]
    at = f"{mast['latitude_deg']},{mast['longitude_deg']}"
    answer = json.loads(run("assess", "--at", at, "--json").stdout)
    near = [one for one in answer["emissions"] if one["reason"]]
    assert near
    assert all("too near for any prediction" in one["reason"] for one in near)
    assert len(answer["emissions"]) > len(near)
    assert "too near for any prediction" in run("assess", "--at", at).stdout


def test_a_cover_map_is_added_or_refused_by_the_name_it_was_given(own, write_raster):
    codes = write_raster(np.array([[10, 10, 50], [10, 80, 50], [10, 10, 50]], dtype="uint8"), name="cover.tif")
    refused = CliRunner().invoke(main, ["cover", "add", str(codes)])
    assert refused.exit_code == 2
    assert "--classes" in refused.stderr
    assert CliRunner().invoke(main, ["cover", "add", str(codes), "--classes", "worldcover"]).exit_code == 0
    rows = json.loads(CliRunner().invoke(main, ["cover", "list", "--json"]).stdout)
    assert rows[0]["file"] == "cover.tif"


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (["assess", "--at", "44.3,-37.45", "--height", "abc"], '"abc" is not a number: write one such as 10 or 2.5'),
        (["assess", "--at", "44.3,-37.45", "--reach", "10,5"], "with a point, 10.5"),
        (["assess", "--at", "44.3,-37.45", "--worth", "nan"], '"nan" is not a number'),
        (["assess", "--at", "44.3,-37.45", "--leaves", "1_0"], '"1_0" is not a number'),
        (
            ["assess", "--at", "44.3,-37.45", "--availability", "99.5"],
            '"99.5" is not a whole number: write one such as 4',
        ),
        (["serve", "--port", "http"], '"http" is not a whole number'),
        (["chains", "cheapest", "--at", "44.3,-37.45", "--outlets", "two"], '"two" is not a whole number'),
        (["terrain", "get", "--at", "44.3,-37.45", "--reach", "far"], '"far" is not a number'),
        (
            ["path", "--from", "44,-37", "--to", "44,-37.2", "--frequency", "600", "--heights", "1,2,3"],
            "write two numbers",
        ),
        (
            ["path", "--from", "44,-37", "--to", "44,-37.2", "--frequency", "600", "--heights", "nan,10"],
            "write two numbers",
        ),
    ],
)
def test_an_option_that_is_no_number_says_what_came_and_what_to_write(words, told):
    result = CliRunner().invoke(main, words)
    assert result.exit_code == 2
    assert told in " ".join(result.output.replace("│", " ").split())
