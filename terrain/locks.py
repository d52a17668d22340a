"""Locks on files between processes; the system lifts them when their holder ends, however it ends.

Where the system or the file system has none, everything counts as free: two processes may then do the same work twice.
"""

from __future__ import annotations

import contextlib
import os
import threading
from collections.abc import Iterator
from pathlib import Path
from typing import BinaryIO

try:
    import fcntl
except ImportError:  # not a POSIX system: what is open there cannot be removed anyway
    fcntl = None  # type: ignore[assignment]

_LOOK_AGAIN_S = 0.1


@contextlib.contextmanager
def alone(path: Path, stop: threading.Event) -> Iterator[None]:
    """Hold a file that one thread of one process holds at a time; without it once `stop` is set.

    The file is made for it and removed after. Raises OSError where it cannot be made.
    """
    path.parent.mkdir(parents=True, exist_ok=True)
    while True:
        with path.open("ab") as file:
            # A file that was removed between opening and locking is another's old one.
            if _locked(file, shared=False) and _is_still(path, file):
                try:
                    yield
                finally:
                    with contextlib.suppress(OSError):
                        path.unlink()
                return
        if stop.wait(_LOOK_AGAIN_S):
            yield
            return


def mark_in_use(file: BinaryIO) -> None:
    """Say to all processes that an open file is in use, as long as it or a memory map of it is open."""
    _locked(file, shared=True)


def removed_unless_in_use(path: Path) -> bool:
    """Remove a file that no process has marked; whether it is gone. Raises OSError where it cannot be removed."""
    with path.open("rb") as file:
        if not _locked(file, shared=False):
            return False
        path.unlink()
    return True


def _locked(file: BinaryIO, shared: bool) -> bool:
    """Take a lock if it is free."""
    if fcntl is None:
        return True
    try:
        fcntl.flock(file, (fcntl.LOCK_SH if shared else fcntl.LOCK_EX) | fcntl.LOCK_NB)
    except BlockingIOError:
        return False
    except OSError:
        return True
    return True


def _is_still(path: Path, file: BinaryIO) -> bool:
    try:
        return os.path.samestat(path.stat(), os.fstat(file.fileno()))
    except OSError:
        return False
