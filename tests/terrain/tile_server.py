"""A server of tiles on this machine that misbehaves as it is told."""

from __future__ import annotations

import contextlib
import gzip
import hashlib
import io
import socket
import struct
import threading
import time
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer

import numpy as np
from affine import Affine
from rasterio.io import MemoryFile

# How a user names such a server in sources.toml.
OWN_SOURCE = """
[hills]
title = "Invented hills"
holds = "elevation"
url = "{url}/{{tile}}.hgt.gz"
naming = "south-west"
tile_deg = 1
kind = "radar-surface"
spacing_m = 1800
samples = "points"
datum = "WGS 84"
typical_mb = 0.01
largest_mb = 1
licence = "free with credit"
attribution = "© nobody"
"""


def hgt_tile(seed: int, side: int = 61) -> bytes:
    """A small gzipped tile of invented hills."""
    rows, columns = np.mgrid[:side, :side]
    heights = 300 + 100 * np.sin(rows / 7 + seed) + 80 * np.cos(columns / 9 - seed)
    return gzip.compress(heights.astype(">i2").tobytes(), mtime=0)


def cog_tile(south: int, west: int, side: int = 128) -> bytes:
    """A small tiled GeoTIFF with pixels round the corners, as the open surface models have it."""
    rows, columns = np.mgrid[:side, :side]
    heights = (250 + 90 * np.sin(rows / 11) + 60 * np.cos(columns / 13)).astype("float32")
    pixel = 1 / side
    profile = {
        "driver": "GTiff", "width": side, "height": side, "count": 1, "dtype": "float32", "crs": "EPSG:4326",
        "transform": Affine(pixel, 0, west - pixel / 2, 0, -pixel, south + 1 + pixel / 2),
        "tiled": True, "blockxsize": 64, "blockysize": 64, "compress": "deflate",
    }  # fmt: skip
    with MemoryFile() as memory:
        with memory.open(**profile) as file:
            file.write(heights, 1)
        return bytes(memory.getbuffer())


class TileServer:
    """Files by path; `faults[path]` is a list of what to do wrong, one per request, then all is well.

    A fault that begins with "always " stays.
    """

    def __init__(self) -> None:
        self.files: dict[str, bytes] = {}
        self.faults: dict[str, list[str]] = {}
        self.requests: list[tuple[str, str]] = []  # path and Range
        self.at_once = self.most_at_once = 0
        self.pause_s = 0.0
        self.lock = threading.Lock()
        handler = type("Handler", (_Handler,), {"server_of_tiles": self})
        self._server = ThreadingHTTPServer(("127.0.0.1", 0), handler)
        self._server.daemon_threads = True
        self._thread = threading.Thread(target=self._server.serve_forever, args=(0.02,), daemon=True)

    @property
    def url(self) -> str:
        return f"http://127.0.0.1:{self._server.server_port}"

    def __enter__(self) -> TileServer:
        self._thread.start()
        return self

    def __exit__(self, *_: object) -> None:
        self._server.shutdown()
        self._server.server_close()

    def fault(self, path: str) -> str:
        waiting = self.faults.get(path, [])
        if not waiting:
            return ""
        return waiting[0].removeprefix("always ") if waiting[0].startswith("always ") else waiting.pop(0)


class _Handler(BaseHTTPRequestHandler):
    protocol_version = "HTTP/1.1"
    server_of_tiles: TileServer

    def do_GET(self) -> None:
        tiles = self.server_of_tiles
        path = self.path.split("://", 1)[-1]
        path = path[path.index("/") :] if not self.path.startswith("/") else path  # as a proxy is asked
        with tiles.lock:
            tiles.requests.append((path, self.headers.get("Range", "")))
            tiles.at_once += 1
            tiles.most_at_once = max(tiles.most_at_once, tiles.at_once)
            fault = tiles.fault(path)
        try:
            if tiles.pause_s:
                time.sleep(tiles.pause_s)
            self._answer(path, fault)
        finally:
            with tiles.lock:
                tiles.at_once -= 1
            self.close_connection = True

    def _answer(self, path: str, fault: str) -> None:
        body = self.server_of_tiles.files.get(path)
        if fault.isdigit():
            self._send(int(fault), b"no", {})
        elif fault.startswith("retry-after"):
            self._send(503, b"later", {"Retry-After": fault.split()[1]})
        elif fault == "loop":
            self._send(302, b"", {"Location": path})
        elif fault == "to-file":
            self._send(302, b"", {"Location": "file:///etc/hostname"})
        elif fault == "html":
            self._send(200, b"<html>log in</html>", {"Content-Type": "text/html; charset=utf-8"})
        elif body is None:
            self._send(404, b"none", {})
        else:
            self._file(body, fault)

    def _file(self, body: bytes, fault: str) -> None:
        tag = f'"{hashlib.md5(body).hexdigest()}"'
        start, status, headers = 0, 200, {"ETag": tag}
        asked = self.headers.get("Range", "")
        if asked and self.headers.get("If-Range") == tag and fault != "no-range":
            start, status = int(asked.removeprefix("bytes=").rstrip("-")), 206
            if start >= len(body):
                self._send(416, b"", {"Content-Range": f"bytes */{len(body)}"})
                return
            headers["Content-Range"] = f"bytes {start}-{len(body) - 1}/{len(body)}"
        part = body[start:]
        if fault == "corrupt":
            part = part[: len(part) // 3] + bytes(len(part) // 3) + part[2 * (len(part) // 3) :]
        if fault == "short-length":
            part = part[: len(part) // 2]
        length = len(part)
        if fault == "long-length":
            length += 500
        if fault == "huge-length":
            length = 60_000_000_000
        self.send_response(status)
        for key, value in headers.items():
            self.send_header(key, value)
        self.send_header("Content-Length", str(length))
        self.end_headers()
        if fault == "truncated":
            self.wfile.write(part[: len(part) // 2])
        elif fault == "reset":
            self.wfile.write(part[: len(part) // 2])
            self.wfile.flush()
            self.connection.setsockopt(socket.SOL_SOCKET, socket.SO_LINGER, struct.pack("ii", 1, 0))
            self.connection.close()
        elif fault == "slow":
            for byte in part[:40]:
                self.wfile.write(bytes([byte]))
                self.wfile.flush()
                time.sleep(0.02)
        elif fault == "drip":
            for at in range(0, len(part), 500):
                self.wfile.write(part[at : at + 500])
                self.wfile.flush()
                time.sleep(0.01)
        else:
            self.wfile.write(part)

    def _send(self, status: int, body: bytes, headers: dict[str, str]) -> None:
        self.send_response(status)
        for key, value in headers.items():
            self.send_header(key, value)
        self.send_header("Content-Length", str(len(body)))
        self.end_headers()
        self.wfile.write(body)

    def handle_one_request(self) -> None:
        try:
            super().handle_one_request()
        except (ConnectionError, ValueError, io.UnsupportedOperation):
            self.close_connection = True

    def finish(self) -> None:
        with contextlib.suppress(OSError, ValueError):
            super().finish()

    def log_message(self, *_: object) -> None:
        pass
