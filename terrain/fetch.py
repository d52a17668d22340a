"""One file over HTTP: taken up where it stopped, tried again where that helps, checked for length.

The standard library's client: proxies by HTTP_PROXY, HTTPS_PROXY and NO_PROXY, certificates of the machine.
What has arrived lies in `NAME.part` with `NAME.part.json` beside it (length and validator); it is only taken
up if the server says that the file is still the same one (RFC 9110, section 13.1.5, If-Range).
"""

from __future__ import annotations

import contextlib
import email.utils
import errno
import http.client
import json
import os
import random
import re
import socket
import ssl
import threading
import time
import urllib.error
import urllib.request
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from importlib import metadata
from pathlib import Path
from typing import Any
from urllib.parse import urlsplit

from terrain.errors import DiskError, DownloadError, OfflineError

_CHUNK_BYTES = 128 << 10
_AGAIN_LATER = frozenset({408, 425, 429, 500, 502, 503, 504})
_REDIRECTS = 5


@dataclass(frozen=True, slots=True)
class Patience:
    """How long to wait, how often to try. All our choice."""

    tries: int = 5
    first_wait_s: float = 1.0  # doubled after each try, with a third of chance
    longest_wait_s: float = 120.0  # of what a server may ask by Retry-After, too
    silence_s: float = 30.0  # without a byte
    slowest_bytes_per_s: float = 1000.0  # over `slow_s`; below, the connection is taken for stuck
    slow_s: float = 60.0


class Absent(Exception):
    """The server says that there is no such file."""


class Stopped(Exception):
    """The user stopped it."""


class _Again(Exception):
    """Something that may be better next time; `wait_s` if the server asks for a pause."""

    def __init__(self, message: str, wait_s: float | None = None) -> None:
        super().__init__(message)
        self.wait_s = wait_s


class _Redirects(urllib.request.HTTPRedirectHandler):
    """Few, to http and https only, and never from https down to http."""

    max_redirections = _REDIRECTS
    max_repeats = 2

    def redirect_request(self, req: Any, fp: Any, code: int, msg: str, headers: Any, newurl: str) -> Any:
        """Follow a redirect, or raise DownloadError."""
        old, new = urlsplit(req.full_url).scheme, urlsplit(newurl).scheme
        if new not in ("http", "https") or (old == "https" and new == "http"):
            raise DownloadError(f"{req.full_url} leads to {new}://…, which is not followed: see to the source's url")
        return super().redirect_request(req, fp, code, msg, headers, newurl)


def fetch(
    url: str,
    part: Path,
    *,
    largest_bytes: float,
    absent: tuple[int, ...] = (404,),
    patience: Patience | None = None,
    progress: Callable[[int, int | None], None] = lambda done, total: None,
    stop: threading.Event | None = None,
) -> None:
    """Bring one file into `part`, whole.

    Parameters
    ----------
    url : http or https.
    part : where it grows; taken up again if it is there.
    largest_bytes : a longer file is refused.
    absent : statuses by which this server says that there is no such file.
    progress : is told the bytes that are there and the length, if it is known.
    stop : ends it between two pieces.

    Raises
    ------
    Absent
        There is no such file.
    Stopped
        `stop` was set; what has arrived stays.
    DownloadError
        It cannot be had: offline, refused, too long, disk full (then nothing is left of it).
    """
    patience, stop = patience or Patience(), stop or threading.Event()
    for number in range(1, patience.tries + 1):
        try:
            _attempt(url, part, largest_bytes, absent, patience, progress, stop)
            return
        except _Again as reason:
            if number == patience.tries:
                raise DownloadError(f"{_host(url)}: {reason}, {number} times over: try again later") from reason
            pause = patience.first_wait_s * 2 ** (number - 1) * (1 + random.random() / 3)
            if stop.wait(min(patience.longest_wait_s, max(pause, reason.wait_s or 0.0))):
                raise Stopped from reason


def forget(part: Path) -> None:
    """Remove what has arrived of a file."""
    part.unlink(missing_ok=True)
    _beside(part).unlink(missing_ok=True)


def _attempt(
    url: str,
    part: Path,
    largest_bytes: float,
    absent: tuple[int, ...],
    patience: Patience,
    progress: Callable[[int, int | None], None],
    stop: threading.Event,
) -> None:
    have, known = _so_far(part)
    headers = {"User-Agent": f"gainworth/{metadata.version('gainworth')}", "Accept-Encoding": "identity"}
    if have and known.get("total") == have:
        return
    if have:
        headers |= {"Range": f"bytes={have}-", "If-Range": str(known["validator"])}
    try:
        with _open(url, headers, patience.silence_s) as response:
            start, total = _start_and_total(response, part, have, known)
            _check_kind(url, response)
            if (total or 0) > largest_bytes:
                raise DownloadError(
                    f"{_host(url)} says that {_name(url)} is {(total or 0) / 1e6:.0f} MB long, where at most "
                    f"{largest_bytes / 1e6:.0f} MB are expected: it is not fetched"
                )
            _begin(part, start, total, _validator(response))
            _receive(url, response, part, start, total, largest_bytes, patience, progress, stop)
    except urllib.error.HTTPError as error:
        _answer_status(url, error, part, absent)
    except urllib.error.URLError as error:
        raise _unreachable(url, error.reason) from error
    except (ConnectionError, TimeoutError, http.client.HTTPException, ssl.SSLError) as error:
        raise _Again(f"the connection broke ({_why(error)})") from error


def _open(url: str, headers: dict[str, str], silence_s: float) -> Any:
    opener = urllib.request.build_opener(_Redirects)
    return opener.open(urllib.request.Request(url, headers=headers), timeout=silence_s)


def _start_and_total(response: Any, part: Path, have: int, known: dict[str, Any]) -> tuple[int, int | None]:
    """From which byte on the answer goes, and the length of the whole file."""
    if response.status != 206:
        length = response.headers.get("Content-Length")
        return 0, int(length) if length and length.isdigit() else None
    said = re.fullmatch(r"bytes (\d+)-(\d+)/(\d+)", response.headers.get("Content-Range", "").strip())
    if said is None or int(said[1]) != have or int(said[3]) != known.get("total"):
        forget(part)
        raise _Again("it answered with another part than was asked for")
    return have, int(said[3])


def _check_kind(url: str, response: Any) -> None:
    """A page of text in place of a raster: of a proxy that asks for a login, or of an error without its status."""
    kind = response.headers.get_content_type()
    if kind in ("text/html", "application/xhtml+xml"):
        raise DownloadError(
            f"{_host(url)} sent a web page in place of {_name(url)}: a login page of the network in between, "
            "or the address has changed; open it in a browser to see"
        )


def _receive(
    url: str,
    response: Any,
    part: Path,
    start: int,
    total: int | None,
    largest_bytes: float,
    patience: Patience,
    progress: Callable[[int, int | None], None],
    stop: threading.Event,
) -> None:
    done, since, since_done = start, time.monotonic(), start
    with _disk(part, (total or 0) - start):
        file = part.open("r+b" if start else "wb")
    with file:
        file.seek(start)
        while chunk := response.read1(_CHUNK_BYTES):
            done += len(chunk)
            if done > largest_bytes:
                forget(part)
                raise DownloadError(
                    f"{_host(url)} sends more than the {largest_bytes / 1e6:.0f} MB expected for {_name(url)}: ended"
                )
            with _disk(part, (total or 0) - start):
                write(file, chunk)
            progress(done, total)
            if stop.is_set():
                raise Stopped
            if time.monotonic() - since > patience.slow_s:
                if done - since_done < patience.slowest_bytes_per_s * patience.slow_s:
                    raise _Again("it sends next to nothing")
                since, since_done = time.monotonic(), done
        with _disk(part, (total or 0) - start):
            file.flush()
            os.fsync(file.fileno())
    if total is not None and done != total:
        raise _Again(f"the connection ended after {done} of {total} bytes")


@contextlib.contextmanager
def _disk(part: Path, needed_bytes: float) -> Iterator[None]:
    """Where a file cannot be written, nothing of it is left."""
    try:
        yield
    except OSError as error:
        forget(part)
        raise disk_error(error, part.parent, needed_bytes) from error


def write(file: Any, data: bytes) -> None:
    """Write all of it."""
    file.write(data)


def disk_error(error: OSError, folder: Path, needed_bytes: float) -> DiskError:
    """Say what to do about a file that cannot be written."""
    if error.errno in (errno.ENOSPC, errno.EDQUOT):
        return DiskError(
            f"the disk is full: {max(needed_bytes, 1e6) / 1e6:.0f} MB more are needed in {folder}; "
            "nothing half-written was left, what was complete is kept. Free some space and start again"
        )
    return DiskError(f"{folder} cannot be written ({error.strerror or error}): see to its permissions")


def _answer_status(url: str, error: urllib.error.HTTPError, part: Path, absent: tuple[int, ...]) -> None:
    """Turn a status other than 2xx into what it means here; always raises."""
    with error:
        if error.code in absent:
            raise Absent(url)
        if error.code == 416:
            forget(part)
            raise _Again("it does not have as many bytes as it said before")
        if error.code in _AGAIN_LATER:
            raise _Again(f"the server answers {error.code}", _retry_after_s(error.headers.get("Retry-After")))
        if 300 <= error.code < 400 and "not allowed" in str(error.reason):
            raise DownloadError(
                f"{_host(url)} leads to an address that is not followed: see to the source's url"
            ) from error
        if 300 <= error.code < 400:
            raise DownloadError(f"{_host(url)} sends round in a circle: see to the source's url") from error
        hint = "a proxy asks for a login: set HTTPS_PROXY with it" if error.code == 407 else "see to the source's url"
        raise DownloadError(f"{_host(url)} refuses {_name(url)} with status {error.code}: {hint}") from error


def _unreachable(url: str, reason: object) -> Exception:
    if isinstance(reason, ssl.SSLCertVerificationError):
        return DownloadError(f"{_host(url)} shows a certificate that is not trusted ({_why(reason)}): not fetched")
    if isinstance(reason, socket.gaierror | ConnectionRefusedError) or (
        isinstance(reason, OSError) and reason.errno in (errno.ENETUNREACH, errno.EHOSTUNREACH)
    ):
        return OfflineError(
            f"{_host(url)} cannot be reached: this machine is offline, or a proxy is needed (set HTTPS_PROXY). "
            "What is already fetched is kept; add rasters by hand with `gainworth terrain add FILE`"
        )
    return _Again(f"no connection ({_why(reason)})")


def _retry_after_s(text: str | None) -> float | None:
    """Seconds that a server asks to wait: a number or a date (RFC 9110, section 10.2.3)."""
    if text is None:
        return None
    if text.strip().isdigit():
        return float(text)
    with contextlib.suppress(TypeError, ValueError):
        return max(0.0, email.utils.parsedate_to_datetime(text).timestamp() - time.time())
    return None


def _validator(response: Any) -> str | None:
    """A strong validator: an ETag that is not weak, else the date of the last change."""
    tag = response.headers.get("ETag")
    if tag and not tag.startswith("W/"):
        return str(tag)
    changed = response.headers.get("Last-Modified")
    return str(changed) if changed else None


def _so_far(part: Path) -> tuple[int, dict[str, Any]]:
    """Bytes that can be built on, and what is known of the file; 0 where nothing can."""
    try:
        known = json.loads(_beside(part).read_text())
        have = part.stat().st_size
        if known["validator"] and 0 < have <= known["total"]:
            return have, known
    except (OSError, ValueError, KeyError, TypeError):
        pass
    return 0, {}


def _begin(part: Path, start: int, total: int | None, validator: str | None) -> None:
    """Write down what is coming; older bytes go first, or they would be taken for its own."""
    with _disk(part, (total or 0) - start):
        part.parent.mkdir(parents=True, exist_ok=True)
        if start == 0:
            part.unlink(missing_ok=True)
        unfinished = _beside(part).with_suffix(".new")
        unfinished.write_text(json.dumps({"total": total, "validator": validator}))
        unfinished.replace(_beside(part))


def _beside(part: Path) -> Path:
    return part.with_name(f"{part.name}.json")


def _host(url: str) -> str:
    return urlsplit(url).netloc


def _name(url: str) -> str:
    return urlsplit(url).path.rsplit("/", 1)[-1]


def _why(error: object) -> str:
    return str(getattr(error, "strerror", None) or error) or type(error).__name__
