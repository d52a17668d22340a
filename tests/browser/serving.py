"""A server in a thread of the tests."""

from __future__ import annotations

import contextlib
import threading
import time
from collections.abc import Iterator

import uvicorn
from fastapi import FastAPI


@contextlib.contextmanager
def serving(app: FastAPI) -> Iterator[str]:
    """Serve on a free port and yield the address."""
    server = uvicorn.Server(uvicorn.Config(app, port=0, log_level="error"))
    thread = threading.Thread(target=server.run, daemon=True)
    thread.start()
    end = time.monotonic() + 20
    while not server.started:
        assert time.monotonic() < end, "the server did not start"
        time.sleep(0.05)
    yield f"http://127.0.0.1:{server.servers[0].sockets[0].getsockname()[1]}"
    server.should_exit = True
    thread.join(10)
