"""The store's file: read-only, locked, damaged, foreign, newer, and migrations."""

import os
import sqlite3
import tempfile
import threading
from contextlib import closing, contextmanager
from pathlib import Path

import pytest

from app.errors import StoreError
from app.transmitters import database
from app.transmitters.database import FILE_NAME
from app.transmitters.schema import APPLICATION_ID, MIGRATIONS
from app.transmitters.store import Store


def raw(folder):
    return closing(sqlite3.connect(folder / FILE_NAME, isolation_level=None))


def test_a_missing_folder_is_made(tmp_path):
    store = Store.open(tmp_path / "a" / "b")
    assert store.path.is_file()
    assert not store.read_only


def test_a_file_in_place_of_the_folder_says_what_to_set(tmp_path):
    (tmp_path / "data").write_text("x")
    with pytest.raises(StoreError, match="set GAINWORTH_DATA_DIR"):
        Store.open(tmp_path / "data")


def test_the_file_is_marked_and_in_wal_mode(tmp_path):
    Store.open(tmp_path)
    with raw(tmp_path) as connection:
        pragmas = [
            connection.execute(f"PRAGMA {p}").fetchone()[0] for p in ("application_id", "user_version", "journal_mode")
        ]
    assert pragmas == [APPLICATION_ID, len(MIGRATIONS), "wal"]


def test_many_may_open_a_new_folder_at_once(tmp_path):
    for n in range(5):
        folder, gate, faults = tmp_path / str(n), threading.Barrier(6), []

        def enter(folder=folder, gate=gate, faults=faults):
            gate.wait()
            try:
                Store.open(folder).put_roof({"name": "Mill"})
            except Exception as error:
                faults.append(error)

        threads = [threading.Thread(target=enter) for _ in range(6)]
        for thread in threads:
            thread.start()
        for thread in threads:
            thread.join()
        assert faults == []
        assert len(Store.open(folder).list_roofs()) == 6


def test_a_newer_file_is_left_alone(tmp_path):
    Store.open(tmp_path).put_roof({"name": "Mill"})
    with raw(tmp_path) as connection:
        connection.execute("PRAGMA user_version = 99")
    before = (tmp_path / FILE_NAME).read_bytes()
    with pytest.raises(StoreError, match=r"version 99, this Gainworth knows up to \d+: install the newer"):
        Store.open(tmp_path)
    assert (tmp_path / FILE_NAME).read_bytes() == before


def test_another_programs_database_is_left_alone(tmp_path):
    with raw(tmp_path) as connection:
        connection.execute("CREATE TABLE theirs (x)")
    before = (tmp_path / FILE_NAME).read_bytes()
    with pytest.raises(StoreError, match="database of another program"):
        Store.open(tmp_path)
    assert (tmp_path / FILE_NAME).read_bytes() == before


@pytest.mark.parametrize("content", [b"no database at all, only text " * 100, b"SQLite format 3\x00" + b"\xff" * 4000])
def test_a_damaged_file_is_told_and_kept(tmp_path, content):
    (tmp_path / FILE_NAME).write_bytes(content)
    with pytest.raises(StoreError, match="keep a copy of it"):
        Store.open(tmp_path)
    assert (tmp_path / FILE_NAME).read_bytes() == content


def test_damage_inside_is_told_when_it_is_met(tmp_path):
    store = Store.open(tmp_path)
    for n in range(200):
        store.put_roof({"name": f"roof {n}", "text": "x" * 500})
    with raw(tmp_path) as connection:
        connection.execute("PRAGMA wal_checkpoint(TRUNCATE)")
    content = bytearray((tmp_path / FILE_NAME).read_bytes())
    content[30_000:90_000] = os.urandom(60_000)
    (tmp_path / FILE_NAME).write_bytes(content)
    with pytest.raises(StoreError, match="damaged"):
        store.list_roofs()


def test_a_file_removed_meanwhile_is_not_made_anew_in_silence(tmp_path):
    store = Store.open(tmp_path)
    store.path.unlink()
    with pytest.raises(StoreError, match="cannot be opened"):
        store.list_roofs()
    assert not store.path.exists()


def test_a_locked_file_asks_to_wait_and_reading_goes_on(tmp_path):
    store = Store.open(tmp_path, wait_s=0.05)
    store.put_roof({"name": "Mill"})
    with raw(tmp_path) as other:
        other.execute("BEGIN IMMEDIATE")
        with pytest.raises(StoreError, match="written by another program: wait for it or close it"):
            store.put_roof({"name": "Barn"})
        assert [roof["name"] for roof in Store.open(tmp_path).list_roofs()] == ["Mill"]


def test_a_failed_migration_leaves_the_file_as_it_was(tmp_path, monkeypatch):
    Store.open(tmp_path).put_roof({"name": "Mill"})
    steps = (*MIGRATIONS, ("ALTER TABLE document ADD COLUMN more TEXT", "this is no SQL"))
    monkeypatch.setattr(database, "MIGRATIONS", steps)
    with pytest.raises(StoreError, match="did not answer"):
        Store.open(tmp_path)
    monkeypatch.undo()
    assert [roof["name"] for roof in Store.open(tmp_path).list_roofs()] == ["Mill"]


def test_an_older_file_is_brought_up_to_date_with_its_contents(tmp_path, monkeypatch):
    Store.open(tmp_path).put_roof({"name": "Mill"})
    monkeypatch.setattr(database, "MIGRATIONS", (*MIGRATIONS, ("CREATE TABLE later (x)",)))
    assert [roof["name"] for roof in Store.open(tmp_path).list_roofs()] == ["Mill"]
    with raw(tmp_path) as connection:
        assert connection.execute("PRAGMA user_version").fetchone()[0] == len(MIGRATIONS) + 1


@contextmanager
def unprivileged():
    """Root may write everywhere: become nobody for a while."""
    if os.geteuid() != 0:
        yield
        return
    os.seteuid(65534)
    try:
        yield
    finally:
        os.seteuid(0)


@pytest.fixture
def folder():
    """A folder that nobody may enter, unlike pytest's own."""
    with tempfile.TemporaryDirectory() as name:
        path = Path(name)
        path.chmod(0o755)
        yield path
        path.chmod(0o755)


def closed(folder):
    for path in folder.iterdir():
        path.chmod(0o444)
    folder.chmod(0o555)


def test_a_read_only_folder_can_still_be_read(folder):
    Store.open(folder).put_roof({"name": "Mill"})
    closed(folder)
    with unprivileged():
        store = Store.open(folder)
        assert store.read_only
        assert [roof["name"] for roof in store.list_roofs()] == ["Mill"]
        with pytest.raises(StoreError, match="cannot be written, nothing was saved"):
            store.put_roof({"name": "Barn"})


def test_an_empty_read_only_folder_says_what_to_do(folder):
    closed(folder)
    with unprivileged(), pytest.raises(StoreError, match="allow writing there or set GAINWORTH_DATA_DIR"):
        Store.open(folder)


def test_an_old_file_in_a_read_only_folder_asks_for_writing_once(folder, monkeypatch):
    Store.open(folder)
    monkeypatch.setattr(database, "MIGRATIONS", (*MIGRATIONS, ("CREATE TABLE later (x)",)))
    closed(folder)
    with unprivileged(), pytest.raises(StoreError, match="allow writing there once"):
        Store.open(folder)


def test_a_folder_that_cannot_be_made_says_what_to_set(folder):
    closed(folder)
    with unprivileged(), pytest.raises(StoreError, match="cannot be made"):
        Store.open(folder / "inside")
