"""The SQLite file of the store: opening, migrating, transactions, and what each failure means."""

from __future__ import annotations

import os
import sqlite3
import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from app.errors import StoreError
from app.transmitters.schema import APPLICATION_ID, MIGRATIONS

FILE_NAME = "gainworth.sqlite"
_RETRY_S = 0.05
_ELSEWHERE = "or set GAINWORTH_DATA_DIR to another folder"
_TRY_COPY = "keep a copy of it, then put back an earlier copy or move it away and import again"


@dataclass(frozen=True, slots=True)
class Database:
    """One file, one connection per transaction: safe from any number of threads and processes."""

    path: Path
    read_only: bool
    wait_s: float  # how long to wait for another writer

    @classmethod
    def open(cls, folder: Path, wait_s: float) -> Database:
        """Open the file in folder, made and migrated where needed.

        A folder that cannot be written opens for reading if the file is there and up to date.

        Raises
        ------
        StoreError
            No folder, no permission, locked, damaged, foreign, or written by a newer version.
        """
        try:
            folder.mkdir(parents=True, exist_ok=True)
        except OSError as error:
            raise StoreError(
                f"the data folder {folder} cannot be made ({error.strerror}): "
                "set GAINWORTH_DATA_DIR to a folder that you may write"
            ) from error
        path = folder / FILE_NAME
        if _may_write(folder) and (not path.exists() or _may_write(path)):
            database = cls(path, False, wait_s)
            database._create_or_migrate()
            return database
        if not path.exists():
            raise StoreError(
                f"the data folder {folder} cannot be written and holds no {FILE_NAME}: allow writing there {_ELSEWHERE}"
            )
        database = cls(path, True, wait_s)
        with database.transaction() as connection:
            if _version(connection, path) < len(MIGRATIONS):
                raise StoreError(
                    f"{path} was written by an older Gainworth and needs one change of its tables, "
                    f"but the folder cannot be written: allow writing there once {_ELSEWHERE}"
                )
        return database

    @contextmanager
    def transaction(self, *, write: bool = False) -> Iterator[sqlite3.Connection]:
        """Run one transaction: all of it or nothing, every SQLite failure told as a StoreError."""
        if write and self.read_only:
            raise StoreError(
                f"the data folder {self.path.parent} cannot be written, nothing was saved: "
                f"allow writing there {_ELSEWHERE}"
            )
        try:
            connection = self._connect("rw")
            try:
                connection.execute("BEGIN IMMEDIATE" if write else "BEGIN")
                yield connection
                connection.execute("COMMIT")
            finally:
                connection.close()  # an open transaction is rolled back
        except sqlite3.Error as error:
            raise StoreError(_told(error, self.path)) from error

    def _connect(self, mode: str) -> sqlite3.Connection:
        if self.read_only:
            # Without a write-ahead file nothing is pending, and the file may be read by itself.
            pending = self.path.with_name(FILE_NAME + "-wal").exists()
            mode = "ro" if pending else "ro&immutable=1"
        connection = sqlite3.connect(
            f"{self.path.absolute().as_uri()}?mode={mode}",
            uri=True,
            timeout=self.wait_s,
            isolation_level=None,
        )
        connection.execute("PRAGMA foreign_keys = ON")
        return connection

    def _create_or_migrate(self) -> None:
        """Make or migrate the file; another process that does the same is waited for."""
        give_up = time.monotonic() + 2 * self.wait_s
        while True:
            try:
                return self._migrated()
            except sqlite3.OperationalError as error:
                # Switching to the write-ahead mode answers "locked" at once, whatever patience was asked for.
                if "locked" not in str(error) or time.monotonic() > give_up:
                    raise StoreError(_told(error, self.path)) from error
                time.sleep(_RETRY_S)
            except sqlite3.Error as error:
                raise StoreError(_told(error, self.path)) from error

    def _migrated(self) -> None:
        connection = self._connect("rwc")
        try:
            connection.execute("BEGIN")  # one view of the file, whatever others do meanwhile
            version = _version(connection, self.path)
            connection.execute("COMMIT")
            if version < len(MIGRATIONS):
                connection.execute("PRAGMA journal_mode = WAL")
                connection.execute("BEGIN IMMEDIATE")
                # Asked again under the lock: another process may have been quicker.
                for step in MIGRATIONS[_version(connection, self.path) :]:
                    for statement in step:
                        connection.execute(statement)
                connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
                connection.execute(f"PRAGMA user_version = {len(MIGRATIONS)}")
                connection.execute("COMMIT")
        finally:
            connection.close()


def _may_write(path: Path) -> bool:
    return os.access(path, os.W_OK, effective_ids=os.access in os.supports_effective_ids)


def _version(connection: sqlite3.Connection, path: Path) -> int:
    """Steps of MIGRATIONS that the file has taken; refuses what is not ours or newer than we are.

    Asked inside a transaction, so that its answers belong together.
    """
    version = int(connection.execute("PRAGMA user_version").fetchone()[0])
    owner = int(connection.execute("PRAGMA application_id").fetchone()[0])
    tables = int(connection.execute("SELECT count(*) FROM sqlite_master").fetchone()[0])
    if owner != APPLICATION_ID and (version or tables):
        raise StoreError(
            f"{path} is a database of another program: move it elsewhere {_ELSEWHERE}; nothing was changed"
        )
    if version > len(MIGRATIONS):
        raise StoreError(
            f"{path} has tables of version {version}, this Gainworth knows up to {len(MIGRATIONS)}: "
            f"install the newer Gainworth {_ELSEWHERE}; nothing was changed"
        )
    return version


def _told(error: sqlite3.Error, path: Path) -> str:
    """Say what a failure of SQLite means and what to do."""
    code = getattr(error, "sqlite_errorcode", sqlite3.SQLITE_ERROR) & 0xFF  # drop the extended part
    match code:
        case sqlite3.SQLITE_BUSY | sqlite3.SQLITE_LOCKED:
            return f"{path} is being written by another program: wait for it or close it, then try again"
        case sqlite3.SQLITE_CORRUPT | sqlite3.SQLITE_NOTADB:
            return f"{path} is damaged or no database ({error}): {_TRY_COPY}; Gainworth has not changed it"
        case sqlite3.SQLITE_READONLY | sqlite3.SQLITE_CANTOPEN | sqlite3.SQLITE_PERM:
            return f"{path} cannot be opened or written ({error}): check the folder's permissions {_ELSEWHERE}"
        case sqlite3.SQLITE_FULL | sqlite3.SQLITE_IOERR:
            return f"{path} cannot be written, nothing was saved ({error}): make room on the disk"
        case _ if "no such module: rtree" in str(error):
            return "the SQLite of this Python has no R*Tree: use a Python from python.org or your distribution"
        case _:
            return f"{path} did not answer ({error}): {_TRY_COPY}"
