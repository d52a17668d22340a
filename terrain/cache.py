"""Arrays kept as raw files and mapped into memory instead of being made again.

Every array is written under a name of its own and then renamed: readers in other threads and
processes see a whole array or none. Two that make the same array at once write the same bytes.
The folder is kept below a limit: what was used longest ago goes first, never what is mapped by any process or
was used within the last hour.
"""

from __future__ import annotations

import contextlib
import math
import os
import shutil
import tempfile
import threading
import time
import uuid
import weakref
from collections import OrderedDict
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any, BinaryIO

import numpy as np
from numpy.typing import NDArray

from terrain.errors import CacheError
from terrain.locks import mark_in_use, removed_unless_in_use

# Layout of what lies in the folder; a new number where old files would be read wrongly.
_LAYOUT = "ground-2"
# Each mapped array holds a file handle; systems commonly allow 1024.
_MAPPED_AT_ONCE = 256
# What was read of a mapped array stays in memory as long as it is mapped.
_MAPPED_BYTES = 768 << 20
LIMIT_BYTES = 20 * 10**9
_IN_USE_S = 3600.0
_TRIM_TO = 0.8  # of the limit, so that not every new array begins anew

Parts = Callable[[], Iterable[NDArray[Any]]]


@dataclass(frozen=True, slots=True)
class _Array:
    """An array to be written, in parts along its first axis."""

    shape: tuple[int, ...]
    dtype: np.dtype[Any]
    parts: Parts

    @property
    def nbytes(self) -> int:
        return math.prod(self.shape) * self.dtype.itemsize

    def write(self, file: BinaryIO) -> None:
        """Write it in the form of `numpy.save`."""
        descr = np.lib.format.dtype_to_descr(self.dtype)
        np.lib.format.write_array_header_1_0(file, {"descr": descr, "fortran_order": False, "shape": self.shape})
        for part in self.parts():
            file.write(np.ascontiguousarray(part).data)

    def whole(self) -> NDArray[Any]:
        return np.concatenate([part.ravel() for part in self.parts()]).reshape(self.shape)


class ArrayCache:
    """Named arrays in a folder; in a temporary folder where that one cannot be written."""

    def __init__(self, folder: Path, limit_bytes: float = LIMIT_BYTES, mapped_bytes: int = _MAPPED_BYTES) -> None:
        self._folders = [folder / _LAYOUT]
        self._limit_bytes = limit_bytes
        self._mapped_limit = mapped_bytes
        self.mapped_bytes = 0
        self._kept_bytes: float | None = None  # in the folder; None until it was looked through
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
                array = _mapped(folder / f"{name}.npy")
                with contextlib.suppress(OSError):
                    os.utime(folder / f"{name}.npy")  # used now: trimming takes the oldest
                self._map(name, array)
                return array
        return None

    def keep(self, name: str, array: NDArray[Any]) -> NDArray[Any]:
        """Write an array and give it back mapped.

        Raises CacheError if neither the folder nor a temporary one can be written.
        """
        return self.keep_parts(name, array.shape, array.dtype, lambda: (array,))

    def keep_parts(self, name: str, shape: tuple[int, ...], dtype: np.dtype[Any], parts: Parts) -> NDArray[Any]:
        """As `keep`, of an array that comes in parts one after the other and need not be whole in memory."""
        array = _Array(shape, dtype, parts)
        try:
            self._write(self._folders[-1], name, array)
        except OSError as error:
            if self._temporary is not None:
                raise self._unusable(error) from error
            self._write_elsewhere(name, array)
        kept = self.load(name)
        self._trim(array.nbytes)
        return array.whole() if kept is None else kept

    def _map(self, name: str, array: NDArray[Any]) -> None:
        with self._lock:
            before = self._mapped.pop(name, None)
            self.mapped_bytes += array.nbytes - (before.nbytes if before is not None else 0)
            self._mapped[name] = array
            while len(self._mapped) > 1 and (
                len(self._mapped) > _MAPPED_AT_ONCE or self.mapped_bytes > self._mapped_limit
            ):
                self.mapped_bytes -= self._mapped.popitem(last=False)[1].nbytes

    def _trim(self, more_bytes: float) -> None:
        """Remove what was used longest ago once the folder is above its limit, and what older versions kept."""
        folder = self._folders[0]
        with self._lock:
            if self._kept_bytes is not None:
                self._kept_bytes += more_bytes
                if self._kept_bytes <= self._limit_bytes:
                    return
            if self._kept_bytes is None:
                for old in folder.parent.glob("ground-*"):
                    if old != folder:
                        shutil.rmtree(old, ignore_errors=True)
            self._kept_bytes = _trimmed(folder, self._limit_bytes)

    def _write_elsewhere(self, name: str, array: _Array) -> None:
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
    def _write(folder: Path, name: str, array: _Array) -> None:
        target = folder / f"{name}.npy"
        target.parent.mkdir(parents=True, exist_ok=True)
        unfinished = target.with_name(f"{target.name}.{os.getpid()}-{uuid.uuid4().hex[:8]}.part")
        try:
            with unfinished.open("wb") as file:
                array.write(file)
            unfinished.replace(target)
        finally:
            unfinished.unlink(missing_ok=True)


def _mapped(path: Path) -> NDArray[Any]:
    """Map an array as `np.save` wrote it, marked as in use for as long as the map is."""
    with path.open("rb") as file:
        mark_in_use(file)  # the map holds on to the open file, and with it to the mark
        if np.lib.format.read_magic(file) != (1, 0):
            raise ValueError(f"{path} is written otherwise")
        shape, fortran, dtype = np.lib.format.read_array_header_1_0(file)
        if 0 in shape or fortran or dtype.hasobject:
            return np.asarray(np.load(path, allow_pickle=False))
        # asarray: numpy's memmap class makes every indexing slower.
        return np.asarray(np.memmap(file, dtype, "r", file.tell(), shape))


def _trimmed(folder: Path, limit_bytes: float) -> float:
    """Remove the oldest arrays of a folder above its limit; returns how many bytes are left."""
    found = []
    for path in folder.rglob("*.npy"):
        with contextlib.suppress(OSError):
            stat = path.stat()
            found.append((stat.st_mtime, stat.st_size, path))
    total = float(sum(size for _, size, _ in found))
    if total <= limit_bytes:
        return total
    now = time.time()
    for used, size, path in sorted(found):
        if total <= _TRIM_TO * limit_bytes or now - used < _IN_USE_S:
            break
        with contextlib.suppress(OSError):
            total -= size if removed_unless_in_use(path) else 0
    return total
