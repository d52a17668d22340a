"""Every data file says where it is from."""

import hashlib
import tomllib
from pathlib import Path

import pytest

ROOT = Path(__file__).parent.parent
FOLDERS = ("app", "propagation", "terrain", "tests/data")
DATA = {".csv", ".json", ".tif", ".hgt", ".zip", ".gz", ".asc", ".txt"}
NEEDED = {"title", "publisher", "document", "retrieved", "licence", "sha256", "changed"}

FILES = sorted(
    path for folder in FOLDERS for path in (ROOT / folder).rglob("*") if path.suffix in DATA and path.is_file()
)


def source_of(path: Path) -> Path:
    return path.with_name(path.name.split(".")[0] + ".source.toml")


def test_there_are_data_files():
    assert len(FILES) >= 10


@pytest.mark.parametrize("path", FILES, ids=lambda path: str(path.relative_to(ROOT)))
def test_data_file_has_a_complete_source_and_is_the_one_described(path):
    source = source_of(path)
    assert source.is_file(), f"{path.name} needs {source.name} beside it"
    described = tomllib.loads(source.read_text())
    described = described.get(path.name, described)
    assert set(described) >= NEEDED, f"{source.name} lacks {sorted(NEEDED - set(described))}"
    assert described["sha256"] == hashlib.sha256(path.read_bytes()).hexdigest()
