"""Tiles from a server that misbehaves; no test leaves this machine."""

import errno
import gzip
import multiprocessing
import os
import re
import sys
import threading
from pathlib import Path

import numpy as np
import pytest

sys.path.insert(0, str(Path(__file__).parent))
from tile_server import TileServer, cog_tile, hgt_tile

from terrain import fetch as fetching
from terrain.download import download, plan_circle, summary
from terrain.errors import DiskError, DownloadError, OfflineError, SourceError
from terrain.fetch import Patience
from terrain.mosaic import Ground
from terrain.sources import TileSource, tile_sources

QUICK = Patience(tries=4, first_wait_s=0.01, longest_wait_s=0.3, silence_s=1.0, slow_s=0.2, slowest_bytes_per_s=500)
TILE = "/N49/N49E011.hgt.gz"


@pytest.fixture(autouse=True)
def no_proxy(monkeypatch):
    for name in ("http_proxy", "https_proxy", "HTTP_PROXY", "HTTPS_PROXY", "all_proxy", "ALL_PROXY"):
        monkeypatch.delenv(name, raising=False)


@pytest.fixture
def server():
    with TileServer() as server:
        yield server


def source(server, id="hills", **changes):
    return TileSource(
        **{
            "id": id,
            "title": "Invented hills",
            "holds": "elevation",
            "url": f"{server.url}/{{band}}/{{tile}}.hgt.gz",
            "naming": "south-west",
            "tile_deg": 1,
            "kind": "radar-surface",
            "spacing_m": 1800.0,
            "samples": "points",
            "datum": "WGS 84",
            "typical_mb": 0.01,
            "largest_mb": 1.0,
            "licence": "free",
            "attribution": "© nobody",
        }
        | changes
    )


def one_tile(server, folder, **changes):
    """The plan for a place in the middle of one tile on land, N49E011."""
    return plan_circle(source(server, **changes), 49.5, 11.5, 5.0, folder)


def leftovers(folder):
    return sorted(str(p.relative_to(folder)) for p in folder.rglob("*") if p.is_file() and ".incoming" in str(p))


@pytest.mark.parametrize(
    ("faults", "ends"),
    [
        (["500", "502"], "fetched"),
        (["retry-after 0", "retry-after 0"], "fetched"),
        (["truncated"], "fetched"),
        (["truncated", "truncated", "truncated"], "fetched"),
        (["reset", "reset"], "fetched"),
        (["short-length"], "fetched"),
        (["long-length"], "fetched"),
        (["slow"], "fetched"),
        (["corrupt"], "fetched"),
        (["truncated", "no-range"], "fetched"),
    ],
)
def test_a_fault_that_passes_ends_with_the_whole_tile(server, tmp_path, faults, ends):
    body = hgt_tile(1)
    server.files[TILE], server.faults[TILE] = body, list(faults)
    progress = download(one_tile(server, tmp_path), {}, patience=QUICK)
    assert [(one.tile, one.state) for one in progress.outcomes] == [("N49E011", ends)]
    assert (tmp_path / "hills" / "N49E011.hgt.gz").read_bytes() == body
    assert leftovers(tmp_path) == []


@pytest.mark.parametrize(
    ("fault", "says"),
    [
        ("always 500", "answers 500, 4 times over: try again later"),
        ("always retry-after 1", "answers 503, 4 times over"),
        ("always truncated", "of .* bytes, 4 times over|came damaged"),
        ("always reset", "connection|times over"),
        ("always short-length", "came damaged 2 times and was not kept"),
        ("always long-length", "as many bytes as it said before, 4 times over|of .* bytes, 4 times over"),
        ("always huge-length", "60000 MB long, where at most 1 MB are expected"),
        ("always html", "sent a web page in place of N49E011.hgt.gz"),
        ("always loop", "sends round in a circle"),
        ("always to-file", "that is not followed"),
        ("always slow", "next to nothing|of .* bytes"),
        ("always corrupt", "came damaged 2 times and was not kept"),
        ("always 403", "refuses N49E011.hgt.gz with status 403"),
        ("always 407", "a proxy asks for a login"),
    ],
)
def test_a_fault_that_stays_is_said_and_leaves_no_tile(server, tmp_path, fault, says):
    server.files[TILE], server.faults[TILE] = hgt_tile(1), [fault]
    progress = download(one_tile(server, tmp_path), {}, patience=QUICK)
    (outcome,) = progress.outcomes
    assert outcome.state == "failed"
    assert re.search(says, outcome.message), outcome.message
    assert not (tmp_path / "hills" / "N49E011.hgt.gz").exists()
    assert Ground.open([tmp_path], tmp_path / "cache").rasters == ()


def test_a_cut_tile_is_taken_up_where_it_stopped(server, tmp_path):
    body = hgt_tile(2)
    server.files[TILE], server.faults[TILE] = body, ["truncated"]
    download(one_tile(server, tmp_path), {}, patience=QUICK)
    assert [asked for _, asked in server.requests] == ["", f"bytes={len(body) // 2}-"]


def test_a_tile_that_changed_meanwhile_is_fetched_from_its_start(server, tmp_path):
    old, new = hgt_tile(3), hgt_tile(4)
    server.files[TILE], server.faults[TILE] = old, ["always truncated"]
    download(one_tile(server, tmp_path), {}, patience=Patience(tries=1, first_wait_s=0.01))
    assert leftovers(tmp_path)
    server.files[TILE], server.faults[TILE] = new, []
    download(one_tile(server, tmp_path), {}, patience=QUICK)
    assert (tmp_path / "hills" / "N49E011.hgt.gz").read_bytes() == new


def test_a_corrupt_cog_is_found_before_it_is_kept(server, tmp_path):
    path, body = "/Copernicus_DSM_COG_10_N49_00_E011_00_DEM.tif", cog_tile(49, 11)
    changes = {"url": f"{server.url}/{{name}}.tif", "naming": "copernicus-10", "kind": "surface"}
    server.files[path], server.faults[path] = body, ["always corrupt"]
    (outcome,) = download(one_tile(server, tmp_path, **changes), {}, patience=QUICK).outcomes
    assert outcome.state == "failed"
    assert "came damaged 2 times" in outcome.message
    server.faults[path] = ["corrupt"]
    (outcome,) = download(one_tile(server, tmp_path, **changes), {}, patience=QUICK).outcomes
    assert outcome.state == "fetched"
    assert (tmp_path / "hills" / path[1:]).read_bytes() == body


def test_a_tile_of_another_place_is_refused(server, tmp_path):
    path = "/Copernicus_DSM_COG_10_N49_00_E011_00_DEM.tif"
    server.files[path] = cog_tile(50, 11)
    changes = {"url": f"{server.url}/{{name}}.tif", "naming": "copernicus-10", "kind": "surface"}
    (outcome,) = download(one_tile(server, tmp_path, **changes), {}, patience=QUICK).outcomes
    assert "does not lie in tile N49E011" in outcome.message


def test_a_bomb_is_not_unpacked(server, tmp_path):
    """100 MB of zeros that state a size of 61 × 61 samples: only so much is ever unpacked."""
    bomb = bytearray(gzip.compress(bytes(100 << 20), 9, mtime=0))
    bomb[-4:] = (2 * 61 * 61).to_bytes(4, "little")
    server.files[TILE] = bytes(bomb)
    (outcome,) = download(one_tile(server, tmp_path), {}, patience=QUICK).outcomes
    assert outcome.state == "failed"
    assert "damaged" in outcome.message


def test_an_absent_tile_is_sea_only_where_the_land_mask_has_no_land(server, tmp_path):
    at_sea = plan_circle(source(server), 45.5, -37.5, 5.0, tmp_path)
    assert [one.state for one in download(at_sea, {}, patience=QUICK).outcomes] == ["at sea"]
    on_land = one_tile(server, tmp_path)
    (outcome,) = download(on_land, {}, patience=QUICK).outcomes
    assert outcome.state == "missing"
    assert "though there is land: it stays without elevation" in outcome.message


def test_a_withheld_tile_comes_from_the_coarser_source(server, tmp_path):
    coarse = source(server, "coarse", url=f"{server.url}/coarse/{{tile}}.hgt.gz")
    server.files["/coarse/N49E011.hgt.gz"] = hgt_tile(5)
    plan = one_tile(server, tmp_path, instead="coarse")
    (outcome,) = download(plan, {"coarse": coarse}, patience=QUICK).outcomes
    assert (outcome.state, outcome.source) == ("fetched", "coarse")
    assert (tmp_path / "coarse" / "N49E011.hgt.gz").is_file()


def test_few_requests_run_at_once_and_progress_counts_up(server, tmp_path):
    server.pause_s = 0.02
    plan = plan_circle(source(server), 49.5, 11.5, 150.0, tmp_path)
    for tile in plan.tiles:
        server.files[f"/{tile.corner.tile[:3]}/{tile.corner.tile}.hgt.gz"] = hgt_tile(tile.corner.west)
    seen = []
    progress = download(plan, {}, patience=QUICK, told=lambda p: seen.append((p.done, p.fetched_bytes)))
    assert server.most_at_once <= 4
    assert seen == sorted(seen)
    assert progress.fetched_bytes == sum(map(len, server.files.values()))
    assert summary(progress.outcomes) == f"{len(plan.tiles)} fetched."
    again = plan_circle(source(server), 49.5, 11.5, 150.0, tmp_path)
    assert again.to_fetch == ()
    before = len(server.requests)
    download(again, {}, patience=QUICK)
    assert len(server.requests) == before


def test_count_and_megabytes_are_said_before_anything_is_asked_of_a_server(server, tmp_path):
    plan = plan_circle(tile_sources()["glo-30"], 49.5, 11.5, 50.0, tmp_path)
    assert plan.said_first().startswith(
        "3 tiles of Copernicus GLO-30, 1 arc-second cover this circle; 3 will be fetched, about 105 MB"
    )
    assert "© DLR" in plan.said_first()
    assert server.requests == []


def test_a_machine_without_connection_is_told_so(tmp_path):
    with TileServer() as gone:
        url = gone.url
    plan = one_tile(type("Gone", (), {"url": url}), tmp_path)
    with pytest.raises(OfflineError, match="offline, or a proxy is needed"):
        download(plan, {}, patience=QUICK)


def test_it_works_through_a_proxy(server, tmp_path, monkeypatch):
    monkeypatch.setenv("http_proxy", server.url)
    monkeypatch.setenv("no_proxy", "")
    server.files[TILE] = hgt_tile(6)
    elsewhere = type("Elsewhere", (), {"url": "http://tiles.invalid"})
    (outcome,) = download(one_tile(elsewhere, tmp_path), {}, patience=QUICK).outcomes
    assert outcome.state == "fetched"


def test_a_full_disk_leaves_nothing_half_written_and_says_how_much_is_needed(server, tmp_path, monkeypatch):
    server.files[TILE] = hgt_tile(7)

    def full(file, data):
        file.write(data[: len(data) // 2])
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(fetching, "write", full)
    with pytest.raises(DiskError, match=r"disk is full: 1 MB more are needed in .*nothing half-written.*still to come"):
        download(one_tile(server, tmp_path), {}, patience=QUICK)
    assert leftovers(tmp_path) == []
    assert not (tmp_path / "hills" / "N49E011.hgt.gz").exists()


def test_what_cannot_fit_is_not_begun(server, tmp_path):
    with pytest.raises(DownloadError, match=r"about \d+ MB are needed in .* nothing was fetched"):
        download(_vast(server, tmp_path), {})
    assert server.requests == []


def _vast(server, folder):
    plan = plan_circle(source(server, typical_mb=20_000, largest_mb=20_000), 50.5, 11.5, 500.0, folder)
    assert plan.expected_mb > 1e6
    return plan


def test_the_user_may_stop_and_go_on(server, tmp_path):
    server.files[TILE] = hgt_tile(8)
    stop = threading.Event()
    server.faults[TILE] = ["drip"]
    progress = download(one_tile(server, tmp_path), {}, patience=QUICK, stop=stop, told=lambda p: stop.set())
    assert [one.state for one in progress.outcomes] == ["stopped"]
    assert leftovers(tmp_path)
    (outcome,) = download(one_tile(server, tmp_path), {}, patience=QUICK).outcomes
    assert outcome.state == "fetched"
    assert server.requests[-1][1].startswith("bytes=")


def _fetch_all(url, folder):
    server = type("Server", (), {"url": url})
    download(plan_circle(source(server), 49.5, 11.5, 60.0, folder), {}, patience=QUICK)


@pytest.mark.skipif(not hasattr(os, "fork"), reason="the child that is killed is a fork")
def test_killed_at_any_of_20_moments_and_started_again_is_complete_and_identical(server, tmp_path):
    plan = plan_circle(source(server), 49.5, 11.5, 60.0, tmp_path / "never")
    for tile in plan.tiles:
        path = f"/{tile.corner.tile[:3]}/{tile.corner.tile}.hgt.gz"
        server.files[path] = hgt_tile(tile.corner.west + 10 * tile.corner.south, 121)
        server.faults[path] = ["always drip"]
    killed = 0
    # One folder for all: each start goes on where the one before was killed; then a folder is begun anew.
    for moment in range(20):
        folder = tmp_path / f"run{moment // 4}"
        child = multiprocessing.get_context("fork").Process(target=_fetch_all, args=(server.url, folder))
        child.start()
        child.join(0.01 + 0.012 * moment)
        if child.is_alive():
            child.kill()
            killed += 1
        child.join()
        for path in folder.glob("hills/*.gz"):
            assert path.read_bytes() == server.files[f"/{path.name[:3]}/{path.name}"]
    assert killed >= 15
    server.faults.clear()
    for number in range(5):
        folder = tmp_path / f"run{number}"
        progress = download(plan_circle(source(server), 49.5, 11.5, 60.0, folder), {}, patience=QUICK)
        assert {one.state for one in progress.outcomes} <= {"there", "fetched"}
        assert {p.name: p.read_bytes() for p in folder.glob("hills/*.gz")} == {
            Path(path).name: body for path, body in server.files.items()
        }
        assert leftovers(folder) == []


def test_fetched_tiles_are_ground_with_their_kind_and_credit(server, tmp_path):
    server.files[TILE] = hgt_tile(9)
    download(one_tile(server, tmp_path), {}, patience=QUICK)
    ground = Ground.open([tmp_path], tmp_path / "cache")
    assert [(one.kind, one.attribution) for one in ground.rasters] == [("radar-surface", "© nobody")]
    assert np.isfinite(ground.elevation_m(49.5, 11.5))


def test_an_entry_that_cannot_be_followed_says_what_is_allowed(tmp_path):
    own = tmp_path / "sources.toml"
    own.write_text('[mine]\ntitle = "x"\n')
    with pytest.raises(SourceError, match='source "mine" lacks a field'):
        tile_sources(own)
    with pytest.raises(SourceError, match="begins with https"):
        source(type("S", (), {"url": "file:///tmp"}))
