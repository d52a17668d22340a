"""The built wheel carries the code, the page and every data file."""

import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
PACKAGES = ("app", "propagation", "terrain")


@pytest.fixture(scope="module")
def carried(tmp_path_factory):
    """Names of the files inside a wheel built from this checkout."""
    folder = tmp_path_factory.mktemp("wheel")
    command = [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", str(folder), str(ROOT)]
    built = subprocess.run(command, capture_output=True, text=True, timeout=300, check=False)
    assert built.returncode == 0, built.stdout + built.stderr
    (wheel,) = folder.glob("gainworth-*.whl")
    return set(zipfile.ZipFile(wheel).namelist())


def files_of(folder):
    return {path for path in (ROOT / folder).rglob("*") if path.is_file() and "__pycache__" not in path.parts}


def test_wheel_has_every_file_of_the_packages(carried):
    wanted = {str(path.relative_to(ROOT)) for package in PACKAGES for path in files_of(package)}
    assert sum(name.endswith((".csv", ".json", ".toml")) for name in wanted) >= 25
    assert wanted - carried == set()


def test_wheel_has_the_page(carried):
    wanted = {f"app/_static/{path.relative_to(ROOT / 'static')}" for path in files_of("static")}
    assert len(wanted) >= 25
    assert wanted - carried == set()


def test_wheel_leaves_tests_and_readmes_out(carried):
    assert {name.split("/")[0] for name in carried if ".dist-info/" not in name} == set(PACKAGES)
