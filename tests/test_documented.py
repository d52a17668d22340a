"""README and DEVELOPERS name every command, address and assumption."""

import re
import shlex
import shutil
from pathlib import Path

import typer
from typer.testing import CliRunner

from app.assumptions import ASSUMPTIONS
from app.cli import main
from app.planner import assess
from app.request import AssessRequest
from app.roof import Roof
from app.telling import told
from app.web.main import create_app

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text()
TEXT = README + (ROOT / "DEVELOPERS.md").read_text()


def commands():
    group = typer.main.get_command(main)
    for name, command in group.commands.items():
        for inner in getattr(command, "commands", {}) or [None]:
            yield name if inner is None else f"{name} {inner}"


def test_every_command_is_documented():
    names = set(commands())
    assert len(names) >= 10
    assert {name for name in names if f"`{name}" not in TEXT} == set()


def test_every_address_is_documented(demo_world):
    paths = set(create_app(demo_world.store, demo_world.ground).openapi()["paths"])
    assert len(paths) >= 8
    plain = {re.sub(r"\{.*?\}", "{id}", path) for path in paths if path.startswith("/api")}
    # roofs and chains share one line of the README
    missing = {path for path in plain if path.split("/{")[0] not in TEXT}
    assert missing == set()


def test_every_assumption_is_documented():
    assert {key for key in ASSUMPTIONS if f"`{key}`" not in TEXT} == set()


def test_output_shown_in_the_readme_is_what_the_command_prints(demo_world):
    shown = README.split("<!-- assess output -->\n```\n")[1].split("\n```")[0]
    roof = Roof(44.3, -37.4507)
    printed = told(assess(AssessRequest(roof, now="roof-yagi"), demo_world.store, demo_world.ground))
    assert printed.split("\n- ")[0].rstrip() == shown


def test_the_first_ten_minutes_of_the_readme_print_what_it_shows(tmp_path, monkeypatch):
    """An empty folder, the two pieces of real tiles, the rows as they stand there; cautions are left out."""
    monkeypatch.setenv("GAINWORTH_DATA_DIR", str(tmp_path / "data"))
    monkeypatch.setenv("GAINWORTH_CACHE_DIR", str(tmp_path / "cache"))
    monkeypatch.chdir(tmp_path)
    for name in ("hills_north.tif", "hills_south.tif"):
        shutil.copy(ROOT / "tests" / "data" / "nasa" / "srtm" / name, name)
    Path("mine.csv").write_text(README.split("<!-- mine.csv -->\n```\n")[1].split("```")[0])
    shown = README.split("<!-- first ten minutes -->\n```\n")[1].split("\n```")[0]
    lines = []
    for command in re.findall(r"^\$ gainworth (.*)$", shown, re.MULTILINE):
        result = CliRunner().invoke(main, shlex.split(command))
        assert result.exit_code == 0, result.output
        told_here = result.stdout.replace(str(tmp_path / "data"), "…").split("\n- ")[0].rstrip()
        lines += [f"$ gainworth {command}", *(line.rstrip() for line in told_here.splitlines())]
    assert lines == shown.splitlines()
