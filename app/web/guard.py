"""What holds for every request: who may ask, how much is read, which headers go out.

The server trusts whoever sits at this machine and nobody else's web page, so a request must name this
machine by address or by a listed name (a foreign name pointed at 127.0.0.1 is refused), and a changing
request must come from our own page or from no page at all.
"""

from __future__ import annotations

import ipaddress
import json
import logging
import re
from collections.abc import Awaitable, Callable
from urllib.parse import urlsplit

from starlette.datastructures import Headers, MutableHeaders
from starlette.types import ASGIApp, Message, Receive, Scope, Send

from app.web.errors import error_response

log = logging.getLogger("gainworth.web")

POLICY = "; ".join(
    (
        "default-src 'self'",
        "img-src 'self' data: blob:",
        "worker-src 'self' blob:",  # the map draws in a worker made from a blob
        "object-src 'none'",
        "base-uri 'none'",
        "form-action 'self'",
        "frame-ancestors 'none'",
    )
)
HEADERS = {
    "Content-Security-Policy": POLICY,
    "X-Content-Type-Options": "nosniff",
    "X-Frame-Options": "DENY",
    "Referrer-Policy": "no-referrer",
    "Cross-Origin-Resource-Policy": "same-origin",
    "Cross-Origin-Opener-Policy": "same-origin",
    "Permissions-Policy": "camera=(), geolocation=(self), microphone=()",
}
READING = {"GET", "HEAD", "OPTIONS"}
MOST_DIGITS = 18  # a whole number that database and floating point can hold
HALF_LETTER = re.compile(rb"\\u[dD][89a-fA-F]")


class Guard:
    """Middleware round the whole application."""

    def __init__(self, app: ASGIApp, host_names: tuple[str, ...], largest_body_bytes: int) -> None:
        self.app = app
        self.host_names = frozenset(name.lower().rstrip(".") for name in (*host_names, "localhost"))
        self.largest_body_bytes = largest_body_bytes

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Refuse, or pass on with the body read and the headers added."""
        if scope["type"] != "http":
            await self.app(scope, receive, send)
            return
        started = False
        without_body = scope["method"] == "HEAD"
        if without_body:
            scope = {**scope, "method": "GET"}  # answered alike, then cut off

        async def send_with_headers(message: Message) -> None:
            nonlocal started
            if message["type"] == "http.response.start":
                started = True
                headers = MutableHeaders(scope=message)
                for name, value in HEADERS.items():
                    headers[name] = value
            elif without_body and message["type"] == "http.response.body":
                message = {**message, "body": b""}
            await send(message)

        headers = Headers(scope=scope)
        refusal = self._refusal(scope["method"], headers)
        body = b"" if refusal else await _read(receive, headers, self.largest_body_bytes)
        if body is None:
            allowed = f"{self.largest_body_bytes // 1024} kB"
            refusal = error_response(
                413, "too_large", f"the request is too large: send at most {allowed}", None, allowed
            )
        elif body:
            refusal = _refusal_of_text(body)
        if refusal:
            await refusal(scope, receive, send_with_headers)
            return
        try:
            await self.app(scope, _replay(body or b"", receive), send_with_headers)
        except Exception:
            # A fault of ours: the traceback belongs in the log, a plain word in the answer.
            log.exception("%s %s failed", scope["method"], scope["path"])
            if started:
                raise
            words = "something went wrong in Gainworth itself; nothing you saved is lost. Its log has the details"
            await error_response(500, "fault", words)(scope, receive, send_with_headers)

    def _refusal(self, method: str, headers: Headers) -> ASGIApp | None:
        host = headers.get("host", "")
        if not self._is_ours(host):
            words = f'this server is not known as "{host}": open it by its address, or add the name to host_names'
            return error_response(403, "host", words, "Host", "an IP address, localhost or a name in host_names")
        origin = headers.get("origin")
        foreign_page = headers.get("sec-fetch-site", "none") not in ("none", "same-origin")
        foreign_origin = origin is not None and urlsplit(origin).netloc.lower() != host.lower()
        if method not in READING and (foreign_page or foreign_origin):
            words = "this request comes from another site's page: send it from Gainworth's own page or from a program"
            return error_response(403, "origin", words, "Origin", "this server's own page")
        return None

    def _is_ours(self, host: str) -> bool:
        name = urlsplit(f"//{host}").hostname if host else None
        if name is None:
            return False
        try:
            ipaddress.ip_address(name)
        except ValueError:
            return name.rstrip(".") in self.host_names
        return True


async def _read(receive: Receive, headers: Headers, largest: int) -> bytes | None:
    """Return the whole body, or None as soon as it is larger than allowed."""
    stated = headers.get("content-length", "0")
    if not stated.isdecimal() or int(stated) > largest:
        return None
    chunks: list[bytes] = []
    size = 0
    more = True
    while more:
        message = await receive()
        if message["type"] == "http.disconnect":
            break
        chunk: bytes = message.get("body", b"")
        size += len(chunk)
        if size > largest:
            return None
        chunks.append(chunk)
        more = message.get("more_body", False)
    return b"".join(chunks)


class _Twice(ValueError):
    """A key stands twice in one object."""


class _TooLong(ValueError):
    """A whole number has more digits than any quantity here."""


def _refusal_of_text(body: bytes) -> ASGIApp | None:
    """Refuse JSON in which a key stands twice, or half a letter, which neither database nor answer can carry.

    What is no JSON at all is left to the route, which says so.
    """
    try:
        read = json.loads(body, object_pairs_hook=_each_key_once, parse_int=_whole)
        if HALF_LETTER.search(body):
            json.dumps(read, ensure_ascii=False).encode()
    except _Twice as error:
        key = str(error)
        return error_response(
            422, "json", f'"{key}" stands twice in one object: keep one of them', key, "each key once"
        )
    except _TooLong as error:
        words = f"the request holds a number of {error} digits: use numbers of at most {MOST_DIGITS}"
        return error_response(422, "json", words, None, f"at most {MOST_DIGITS} digits")
    except UnicodeEncodeError:
        words = "the request holds half a letter (a lone surrogate): send text in UTF-8"
        return error_response(422, "json", words, None, "text in UTF-8")
    except (ValueError, RecursionError):
        return None
    return None


def _whole(digits: str) -> int:
    if len(digits) > MOST_DIGITS:
        raise _TooLong(len(digits))
    return int(digits)


def _each_key_once(pairs: list[tuple[str, object]]) -> dict[str, object]:
    found = dict(pairs)
    if len(found) < len(pairs):
        names = [name for name, _ in pairs]
        raise _Twice(next(name for name in names if names.count(name) > 1)[:60])
    return found


def _replay(body: bytes, receive: Receive) -> Callable[[], Awaitable[Message]]:
    given = False

    async def replay() -> Message:
        nonlocal given
        if given:
            return await receive()
        given = True
        return {"type": "http.request", "body": body, "more_body": False}

    return replay
