"""Arrays kept as raw files and mapped into memory instead of being made again.

Every array is written under a name of its own and then renamed: readers in other threads and
processes see a whole array or none. Two that make the same array at once write the same bytes.
"""

from __future__ import annotations

import contextlib
import os
import shutil
import tempfile
import threading
import uuid
import weakref
from collections import OrderedDict
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from terrain.errors import CacheError

# Layout of what lies in the folder; a new number where old files would be read wrongly.
_LAYOUT = "ground-1"
# Each mapped array holds a file handle; systems commonly allow 1024.
_MAPPED_AT_ONCE = 256


class ArrayCache:
    """Named arrays in a folder; in a temporary folder where that one cannot be written."""

    def __init__(self, folder: Path) -> None:
        self._folders = [folder / _LAYOUT]
        self._temporary: Path | None = None
        self._mapped: OrderedDict[str, NDArray[Any]] = OrderedDict()
        self._lock = threading.Lock()

    def load(self, name: str) -> NDArray[Any] | None:
        """The array of that name, mapped and read-only, or None if it was not kept or is damaged."""
        with self._lock:
            if name in self._mapped:
                self._mapped.move_to_end(name)
                return self._mapped[name]
        for folder in self._folders:
            with contextlib.suppress(OSError, ValueError, EOFError):
                # asarray: numpy's memmap class makes every indexing slower.
                array = np.asarray(np.load(folder / f"{name}.npy", mmap_mode="r", allow_pickle=False))
                with self._lock:
                    self._mapped[name] = array
                    while len(self._mapped) > _MAPPED_AT_ONCE:
                        self._mapped.popitem(last=False)
                return array
        return None

    def keep(self, name: str, array: NDArray[Any]) -> NDArray[Any]:
        """Write an array and give it back mapped.

        Raises CacheError if neither the folder nor a temporary one can be written.
        """
        try:
            self._write(self._folders[-1], name, array)
        except OSError as error:
            if self._temporary is not None:
                raise self._unusable(error) from error
            self._write_elsewhere(name, array)
        kept = self.load(name)
        return array if kept is None else kept

    def _write_elsewhere(self, name: str, array: NDArray[Any]) -> None:
        try:
            with self._lock:
                if self._temporary is None:
                    self._temporary = Path(tempfile.mkdtemp(prefix="gainworth-"))
                    weakref.finalize(self, shutil.rmtree, self._temporary, ignore_errors=True)
                    self._folders.append(self._temporary)
            self._write(self._folders[-1], name, array)
        except OSError as error:
            raise self._unusable(error) from error

    def _unusable(self, error: OSError) -> CacheError:
        return CacheError(
            f"decoded elevation cannot be kept in {self._folders[0].parent} nor in a temporary folder "
            f"({error.strerror}): free some space or set GAINWORTH_CACHE_DIR to a folder you may write"
        )

    @staticmethod
    def _write(folder: Path, name: str, array: NDArray[Any]) -> None:
        target = folder / f"{name}.npy"
        target.parent.mkdir(parents=True, exist_ok=True)
        unfinished = target.with_name(f"{target.name}.{os.getpid()}-{uuid.uuid4().hex[:8]}.part")
        try:
            with unfinished.open("wb") as file:
                np.save(file, array, allow_pickle=False)
            unfinished.replace(target)
        finally:
            unfinished.unlink(missing_ok=True)
