"""Two processes that want the same: one waits, and a killed one blocks nobody."""

import subprocess
import sys
import threading
import time
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).parent))
from tile_server import OWN_SOURCE, TileServer, hgt_tile

from terrain.cache import ArrayCache
from terrain.locks import alone

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="locks of POSIX systems")
ROOT = Path(__file__).parents[2]
HOLDER = """
import sys, threading, time
from pathlib import Path
from terrain.locks import alone
with alone(Path(sys.argv[1]), threading.Event()):
    print("held", flush=True)
    time.sleep(float(sys.argv[2]))
"""
FETCHER = """
import sys
from pathlib import Path
from terrain.download import download, plan_circle
from terrain.fetch import Patience
from terrain.sources import tile_sources
folder = Path(sys.argv[1])
plan = plan_circle(tile_sources(folder / "sources.toml")["hills"], 49.5, 11.5, 60.0, folder / "terrain")
print("ready", flush=True)
sys.stdin.readline()
done = download(plan, {}, patience=Patience(tries=3, first_wait_s=0.01))
print(sorted({one.state for one in done.outcomes}), flush=True)
"""


def run(code, *arguments):
    pipes = {"stdin": subprocess.PIPE, "stdout": subprocess.PIPE, "text": True}
    return subprocess.Popen([sys.executable, "-c", code, *map(str, arguments)], cwd=ROOT, **pipes)


def test_the_second_process_waits_for_the_first(tmp_path):
    with run(HOLDER, tmp_path / "lock", 0.5) as first:
        assert first.stdout.readline() == "held\n"
        start = time.monotonic()
        with alone(tmp_path / "lock", threading.Event()):
            assert time.monotonic() - start > 0.3
    assert not (tmp_path / "lock").exists()


def test_a_killed_holder_blocks_nobody_though_its_file_is_left(tmp_path):
    with run(HOLDER, tmp_path / "lock", 60) as first:
        assert first.stdout.readline() == "held\n"
        first.kill()
    assert (tmp_path / "lock").exists()
    start = time.monotonic()
    with alone(tmp_path / "lock", threading.Event()):
        assert time.monotonic() - start < 5


def test_whoever_is_told_to_stop_waits_no_longer(tmp_path):
    stop = threading.Event()
    with run(HOLDER, tmp_path / "lock", 60) as first:
        assert first.stdout.readline() == "held\n"
        threading.Timer(0.2, stop.set).start()
        with alone(tmp_path / "lock", stop):
            assert stop.is_set()
        first.kill()


def test_two_processes_fetch_each_tile_once_and_whole(tmp_path, monkeypatch):
    for name in ("http_proxy", "HTTP_PROXY", "all_proxy", "ALL_PROXY"):
        monkeypatch.delenv(name, raising=False)
    with TileServer() as server:
        (tmp_path / "sources.toml").write_text(OWN_SOURCE.format(url=server.url))
        for south in (48, 49, 50):
            for east in (10, 11, 12):
                server.files[f"/N{south}E{east:03d}.hgt.gz"] = hgt_tile(south + east, 121)
        for path in server.files:
            server.faults[path] = ["always drip"]
        with run(FETCHER, tmp_path) as one, run(FETCHER, tmp_path) as other:
            for each in (one, other):
                assert each.stdout.readline() == "ready\n"
            for each in (one, other):
                each.stdin.write("go\n")
                each.stdin.flush()
            told = {each.communicate(timeout=60)[0].strip() for each in (one, other)}
    assert told == {"['fetched']"}
    assert all(asked == "" for _, asked in server.requests)
    fetched = [path for path, _ in server.requests]
    assert len(fetched) == len(set(fetched)) > 1
    kept = {path.name: path.read_bytes() for path in (tmp_path / "terrain" / "hills").glob("*.gz")}
    assert kept == {path[1:]: server.files[path] for path in fetched}
    assert [path.name for path in tmp_path.rglob(".incoming/**/*") if path.is_file()] == []


def test_a_map_of_an_array_keeps_its_values_after_its_file_was_removed(tmp_path):
    held = ArrayCache(tmp_path).keep("a/0", np.arange(10.0))
    (kept,) = tmp_path.rglob("0.npy")
    kept.unlink()
    assert held.sum() == 45
