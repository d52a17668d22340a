"""The application: page, API and tiles over one store and one ground."""

from __future__ import annotations

from importlib import metadata

from fastapi import Depends, FastAPI
from starlette.middleware.gzip import GZipMiddleware
from starlette.staticfiles import StaticFiles

from app.paths import static_dir
from app.settings import Settings
from app.transmitters.store import Store
from app.web.context import Context
from app.web.errors import add_error_handlers
from app.web.guard import Guard
from app.web.query import known_query
from app.web.routes import air, assess, kept, measured, pages, places, proposals, readings, report, tiles
from terrain.mosaic import Ground


def create_app(store: Store, ground: Ground, settings: Settings | None = None) -> FastAPI:
    """Return the application; any server for ASGI runs it."""
    settings = settings or Settings()
    app = FastAPI(
        title="Gainworth",
        version=metadata.version("gainworth"),
        description="Which television multiplexes a roof will receive, and whether a better aerial is worth it.",
        docs_url=None,
        redoc_url=None,
        redirect_slashes=False,  # an address with a slash too many is told so, not sent elsewhere
        dependencies=[Depends(known_query)],
    )
    app.state.context = Context(store, ground, settings)
    for part in (assess, air, proposals, measured, kept, places, readings, report, tiles, pages):
        app.include_router(part.router)
    app.mount("/static", StaticFiles(directory=static_dir()), name="static")
    add_error_handlers(app)
    app.add_middleware(GZipMiddleware, minimum_size=1024, compresslevel=5)
    app.add_middleware(
        Guard,
        host_names=(*settings.host_names, settings.host),
        largest_body_bytes=settings.largest_body_kb * 1024,
    )
    return app
