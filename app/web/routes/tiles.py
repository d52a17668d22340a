"""Relief tiles, drawn on this machine from the ground it knows."""

from __future__ import annotations

from typing import Annotated, Literal

from fastapi import APIRouter, Path, Query, Response
from starlette.exceptions import HTTPException

from app.web.context import ContextDep
from terrain.relief import tile_webp

router = APIRouter(tags=["map"])

FINEST_ZOOM = 17
# One transparent pixel: where there is no ground, the map shows its paper and no tile is missing.
EMPTY_PNG = bytes.fromhex(
    "89504e470d0a1a0a0000000d4948445200000001000000010804000000b51c0c02"
    "0000000b4944415478da6360600000000300012b094d840000000049454e44ae426082"
)


@router.get(
    "/tiles/relief/{z}/{x}/{y}",
    response_class=Response,
    responses={200: {"content": {"image/webp": {}}}},
    summary="One map tile of shaded relief",
)
def relief(
    z: Annotated[int, Path(ge=0, le=FINEST_ZOOM)],
    x: int,
    y: int,
    context: ContextDep,
    theme: Literal["light", "dark"] = "light",
    version: Annotated[str, Query(description="the ground's version: a tile named with it never changes")] = "",
) -> Response:
    """Return a Web Mercator tile of 256 pixels in neutral greys."""
    if not (0 <= x < 2**z and 0 <= y < 2**z):
        raise HTTPException(404)
    image = tile_webp(context.ground, z, x, y, dark=theme == "dark")
    age = "max-age=31536000, immutable" if version == context.ground.version else "max-age=60"
    media_type = "image/png" if image is None else "image/webp"
    return Response(image or EMPTY_PNG, media_type=media_type, headers={"Cache-Control": age})
