"""The page, its libraries, and the page over the API."""

from __future__ import annotations

from fastapi import APIRouter
from fastapi.responses import FileResponse
from starlette.exceptions import HTTPException

from app.paths import static_dir
from app.web.assets import ASSETS

router = APIRouter(include_in_schema=False)

REVALIDATE = {"Cache-Control": "no-cache"}


@router.get("/")
def index() -> FileResponse:
    """Return the page."""
    return FileResponse(static_dir() / "index.html", headers=REVALIDATE)


@router.get("/docs")
def docs() -> FileResponse:
    """Return our own page over /openapi.json, under the same policy as every other."""
    return FileResponse(static_dir() / "docs.html", headers=REVALIDATE)


@router.get("/favicon.ico")
def icon() -> FileResponse:
    """Return the mark, for browsers that ask at the root."""
    return FileResponse(static_dir() / "icon.svg", media_type="image/svg+xml")


@router.get("/vendor/{name}")
def vendor(name: str) -> FileResponse:
    """Return one listed library file out of its package."""
    asset = ASSETS.get(name)
    if asset is None:
        raise HTTPException(404)
    return FileResponse(asset.file, media_type=asset.media_type, headers={"Cache-Control": "max-age=86400"})
