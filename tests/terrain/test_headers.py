"""Headers of a large folder, kept between starts."""

import json
import os
import shutil
from pathlib import Path

import numpy as np
import pytest

from terrain import headers
from terrain.files import Refused, raster_files
from terrain.headers import open_rasters
from terrain.mosaic import Ground

LONG_AGO = 1_600_000_000


@pytest.fixture
def many(write_raster, tmp_path):
    """120 rasters side by side, some of them in metres of UTM, and one that is none."""
    first = write_raster(np.full((4, 4), 0, "int16"), "000.tif", west=8.0)
    folder = first.parent
    write_raster(np.full((4, 4), 1.5), "utm.tif", west=500_000, north=5_200_000, pixel=30.0, crs="EPSG:32632")
    for number in range(1, 120):
        write_raster(np.full((4, 4), number, "int16"), f"{number:03d}.tif", west=8 + 0.004 * number, nodata=-32768)
    (folder / "broken.tif").write_text("no raster")
    for path in folder.iterdir():
        os.utime(path, (LONG_AGO, LONG_AGO))
    return folder


def opened(folder, cache):
    return list(open_rasters(raster_files([folder]), cache))


def counting(monkeypatch):
    """Paths that are opened indeed."""
    asked = []
    really = headers.open_raster
    monkeypatch.setattr(headers, "open_raster", lambda path: asked.append(path.name) or really(path))
    return asked


def alike(one, other):
    """Equal, with a void that is no number equal to itself, and transformers that lead to the same places."""
    if isinstance(one, Refused):
        return one == other
    at = one.grid.index(np.array([46.9]), np.array([9.0])), other.grid.index(np.array([46.9]), np.array([9.0]))
    names = [name for name in headers._document(one) if name != "grid"]
    same = all(str(getattr(one, name)) == str(getattr(other, name)) for name in names)
    return same and headers._document(one) == headers._document(other) and np.array_equal(*at, equal_nan=True)


def test_a_folder_is_opened_the_second_time_from_the_list_with_the_same_headers(many, tmp_path, monkeypatch):
    asked = counting(monkeypatch)
    first = opened(many, tmp_path / "cache")
    assert len(asked) == len(first) == 122
    asked.clear()
    second = opened(many, tmp_path / "cache")
    assert asked == ["broken.tif"]
    assert all(alike(one, other) for one, other in zip(first, second, strict=True))


def test_heights_from_a_kept_list_are_those_of_the_files(many, tmp_path):
    first = Ground.open([many], tmp_path / "cache")
    second = Ground.open([many], tmp_path / "cache")
    lon = 8.002 + 0.004 * np.arange(120)
    assert first.elevation_m(46.998, lon).tolist() == second.elevation_m(46.998, lon).tolist() == list(range(120))
    assert first.version == second.version
    assert [one.name for one in second.rasters] == [one.name for one in first.rasters]
    assert [one.path.name for one in second.refused] == ["broken.tif"]


@pytest.mark.parametrize("change", ["content", "declared", "gone", "new"])
def test_what_changed_is_opened_anew(many, tmp_path, monkeypatch, change):
    opened(many, tmp_path / "cache")
    if change == "content":
        shutil.copy(many / "005.tif", many / "007.tif")
    elif change == "declared":
        (many / "007.tif.gainworth.toml").write_text('kind = "bare"\n')
    elif change == "gone":
        (many / "007.tif").unlink()
    else:
        shutil.copy(many / "007.tif", many / "new.tif")
    asked = counting(monkeypatch)
    rasters = {one.path.name: one for one in opened(many, tmp_path / "cache")}
    expected = {"content": {"007.tif"}, "declared": {"007.tif"}, "gone": set(), "new": {"new.tif"}}[change]
    assert set(asked) == expected | {"broken.tif"}
    if change == "declared":
        assert rasters["007.tif"].kind == "bare"
    assert ("007.tif" in rasters) == (change != "gone")


def test_a_file_that_changed_a_moment_ago_is_not_believed_yet(many, tmp_path, monkeypatch):
    shutil.copy(many / "005.tif", many / "007.tif")
    opened(many, tmp_path / "cache")
    asked = counting(monkeypatch)
    opened(many, tmp_path / "cache")
    assert set(asked) == {"007.tif", "broken.tif"}


@pytest.mark.parametrize(
    "damage", ["", "[]", '{"layout": 0}', '{"layout": 1, "systems": [], "rasters": {"a": [[], {}]}}']
)
def test_a_list_that_is_damaged_or_of_an_older_version_is_made_anew(many, tmp_path, damage):
    first = opened(many, tmp_path / "cache")
    (kept,) = Path(tmp_path / "cache").glob("headers-*.json")
    whole = json.loads(kept.read_text())
    kept.write_text(damage)
    assert all(alike(one, other) for one, other in zip(first, opened(many, tmp_path / "cache"), strict=True))
    assert json.loads(kept.read_text()) == whole


def test_a_long_first_time_is_told(many, tmp_path, monkeypatch, caplog):
    monkeypatch.setattr(headers, "_TELL_EVERY_S", 0.0)
    opened(many, tmp_path / "cache")
    assert "reading rasters: 50 of 122; only the first time" in caplog.text


def test_few_rasters_leave_no_list(write_raster, tmp_path):
    path = write_raster(np.zeros((4, 4), "int16"))
    opened(path.parent, tmp_path / "cache")
    assert not list(tmp_path.glob("cache/headers-*"))
