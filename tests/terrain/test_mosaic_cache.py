"""Decoded samples kept on disk: used again, made again, shared; and rasters that vanish or are damaged meanwhile."""

import contextlib
import os
import subprocess
import sys
import threading
from pathlib import Path

import numpy as np
import pytest

from terrain.errors import CacheError, RasterError
from terrain.mosaic import Ground
from tests.terrain.plane import plane, samples


@pytest.fixture
def ground_of(tmp_path):
    return lambda *paths: Ground.open(list(paths), tmp_path / "cache")


def test_decoded_samples_are_used_again_without_the_file(write_raster, slope, ground_of, tmp_path, monkeypatch):
    path = write_raster(slope())
    first = ground_of(path).elevation_m(46.99, 8.01)
    monkeypatch.setattr("terrain.raster.Raster.read", lambda *_: pytest.fail("decoded twice"))
    assert ground_of(path).elevation_m(46.99, 8.01) == first


def test_a_damaged_cache_file_is_made_again(write_raster, slope, ground_of, tmp_path):
    path = write_raster(slope())
    first = ground_of(path).elevation_m(46.99, 8.01)
    for kept in (tmp_path / "cache").rglob("*.npy"):
        kept.write_bytes(kept.read_bytes()[:-100])
    assert ground_of(path).elevation_m(46.99, 8.01) == first


def test_an_unwritable_cache_folder_is_replaced_by_a_temporary_one(write_raster, slope, tmp_path):
    (tmp_path / "file").touch()  # a folder cannot be made under a file, not even by root
    ground = Ground.open([write_raster(slope())], tmp_path / "file" / "cache")
    assert ground.elevation_m(46.99, 8.01) == pytest.approx(plane(46.99, 8.01))


def test_no_writable_folder_at_all_says_which_setting_helps(write_raster, slope, tmp_path, monkeypatch):
    (tmp_path / "file").touch()
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path / "file" / "tmp"))
    ground = Ground.open([write_raster(slope())], tmp_path / "file" / "cache")
    with pytest.raises(CacheError, match="set GAINWORTH_CACHE_DIR to a folder you may write"):
        ground.elevation_m(46.99, 8.01)


def test_a_raster_that_vanishes_is_said_when_it_is_needed(write_raster, slope, ground_of):
    path = write_raster(slope())
    ground = ground_of(path)
    path.unlink()
    with pytest.raises(RasterError, match=r"ground\.tif"):
        ground.elevation_m(46.99, 8.01)


def test_four_requests_at_once_get_the_same_answer(write_raster, ground_of):
    heights = np.random.default_rng(7).integers(0, 900, (400, 400)).astype("int16")
    path = write_raster(heights, compress="deflate")
    ground = ground_of(path)
    lat, lon = samples(400, 400)
    answers, start = {}, threading.Barrier(4)

    def ask(number):
        start.wait()
        answers[number] = ground.elevation_m(lat, lon)

    threads = [threading.Thread(target=ask, args=(number,)) for number in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    for number in range(4):
        np.testing.assert_allclose(answers[number], heights, atol=1e-6)


def test_two_processes_share_a_cache_folder(write_raster, tmp_path):
    heights = np.random.default_rng(8).integers(0, 900, (300, 300)).astype("int16")
    path = write_raster(heights, compress="deflate")
    ask = (
        "import sys; from pathlib import Path; from terrain.mosaic import Ground;"
        "print(float(Ground.open([Path(sys.argv[1])], Path(sys.argv[2])).elevation_m(46.9, 8.1)))"
    )
    command = [sys.executable, "-c", ask, str(path), str(tmp_path / "cache")]
    root = Path(__file__).parent.parent.parent
    running = [subprocess.Popen(command, stdout=subprocess.PIPE, text=True, cwd=root, env=os.environ) for _ in range(2)]
    said = [process.communicate()[0] for process in running]
    expected = Ground.open([path], tmp_path / "own").elevation_m(46.9, 8.1)
    assert [float(answer) for answer in said] == [expected, expected]
    assert not list((tmp_path / "cache").rglob("*.part"))


def test_a_randomly_damaged_file_is_refused_or_said_when_read_and_nothing_else(write_raster, slope, tmp_path):
    random = np.random.default_rng(9)
    sound = write_raster(slope(), compress="deflate").read_bytes()
    lat, lon = samples(20, 30)
    for number in range(150):
        content = bytearray(sound)
        for place in random.integers(0, len(content), 1 + number % 5):
            content[place] = random.integers(256)
        path = tmp_path / f"damaged-{number}.tif"
        path.write_bytes(content)
        ground = Ground.open([path], tmp_path / "cache")
        assert len(ground.rasters) + len(ground.refused) == 1
        with contextlib.suppress(RasterError):
            ground.elevation_m(lat, lon)
