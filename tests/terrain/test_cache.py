"""What is kept of decoded rasters, and what goes when there is too much."""

import os
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

from terrain.cache import _LAYOUT as FOLDER
from terrain.cache import ArrayCache


def size(folder):
    return sum(p.stat().st_size for p in folder.rglob("*") if p.is_file())


def test_the_oldest_goes_when_the_limit_is_reached(tmp_path):
    cache = ArrayCache(tmp_path, limit_bytes=50_000)
    for number in range(10):
        cache.keep(f"a/{number}", np.zeros(2000))  # 16 kB each
        for path in tmp_path.rglob("*.npy"):
            os.utime(path, (time.time() - 7200 + number, time.time() - 7200 + number))
        cache = ArrayCache(tmp_path, limit_bytes=50_000)
    assert size(tmp_path) <= 50_000
    assert cache.load("a/0") is None
    assert cache.load("a/9") is not None


def test_what_is_in_use_stays_whatever_the_limit(tmp_path):
    mine = ArrayCache(tmp_path, limit_bytes=20_000)
    arrays = [mine.keep(f"a/{number}", np.full(2000, float(number))) for number in range(5)]
    for path in tmp_path.rglob("*.npy"):
        os.utime(path, (0, 0))
    mine.keep("a/5", np.zeros(2000))
    assert [float(array[-1]) for array in arrays] == [0, 1, 2, 3, 4]
    assert all((tmp_path / FOLDER / f"a/{number}.npy").is_file() for number in range(6))


def test_what_another_process_used_just_now_stays(tmp_path):
    other = ArrayCache(tmp_path, limit_bytes=10**9)
    other.keep("a/0", np.zeros(2000))
    mine = ArrayCache(tmp_path, limit_bytes=17_000)
    mine.keep("b/0", np.zeros(2000))
    assert (tmp_path / FOLDER / "a/0.npy").is_file()


def test_a_cache_of_an_older_version_is_not_read_and_goes(tmp_path):
    old = tmp_path / "ground-0" / "a"
    old.mkdir(parents=True)
    np.save(old / "0.npy", np.ones(5))
    cache = ArrayCache(tmp_path)
    assert cache.load("a/0") is None
    cache.keep("a/1", np.zeros(5))
    assert not (tmp_path / "ground-0").exists()


def test_other_files_in_the_folder_are_left_alone(tmp_path):
    (tmp_path / "notes.txt").write_text("mine")
    (tmp_path / "demo").mkdir()
    ArrayCache(tmp_path, limit_bytes=10).keep("a/0", np.zeros(50))
    assert (tmp_path / "notes.txt").is_file()
    assert (tmp_path / "demo").is_dir()


def test_little_stays_mapped_at_once(tmp_path):
    """Mapped arrays count as resident memory as far as they were read."""
    cache = ArrayCache(tmp_path, mapped_bytes=100_000)
    for number in range(20):
        cache.keep(f"a/{number}", np.zeros(2000))
    assert cache.mapped_bytes <= 100_000
    assert cache.load("a/0") is not None


HOLDER = """
import sys
from pathlib import Path
from terrain.cache import ArrayCache
held = ArrayCache(Path(sys.argv[1])).load("a/0")
print("mapped", flush=True)
sys.stdin.readline()
print(float(held.sum()), flush=True)
"""


@pytest.mark.skipif(os.name != "posix", reason="elsewhere the system itself keeps what is mapped")
def test_what_another_process_has_mapped_stays_however_long_ago_it_was_mapped(tmp_path):
    ArrayCache(tmp_path).keep("a/0", np.ones(2000))
    ArrayCache(tmp_path).keep("a/1", np.ones(2000))
    root = Path(__file__).parents[2]
    pipes = {"stdin": subprocess.PIPE, "stdout": subprocess.PIPE, "text": True, "cwd": root}
    with subprocess.Popen([sys.executable, "-c", HOLDER, str(tmp_path)], **pipes) as holder:
        assert holder.stdout.readline() == "mapped\n"
        for path in tmp_path.rglob("*.npy"):
            os.utime(path, (0, 0))
        ArrayCache(tmp_path, limit_bytes=100).keep("b/0", np.zeros(5))
        assert (tmp_path / FOLDER / "a/0.npy").is_file()
        assert not (tmp_path / FOLDER / "a/1.npy").exists()
        assert holder.communicate("go on\n")[0] == "2000.0\n"
    os.utime(tmp_path / FOLDER / "a/0.npy", (0, 0))
    ArrayCache(tmp_path, limit_bytes=100).keep("b/1", np.zeros(5))
    assert not (tmp_path / FOLDER / "a/0.npy").exists()  # its user has ended
