"""Where a roof is, and the open tiles round it."""

from __future__ import annotations

from datetime import date
from typing import Annotated, Any, Literal

from fastapi import APIRouter, Query
from pydantic import Field

from app.declination import declination
from app.open_tiles import plan, plan_document, sources
from app.position import parse_position
from app.web.context import ContextDep
from app.web.schemas import Strict

router = APIRouter(prefix="/api", tags=["places"])

Latitude = Annotated[float, Query(ge=-90, le=90, allow_inf_nan=False)]
Longitude = Annotated[float, Query(ge=-180, le=180, allow_inf_nan=False)]
Holds = Literal["elevation", "cover"]


class CircleIn(Strict):
    """Tiles to fetch, once the user has agreed to go online."""

    agreed_to_go_online: Literal[True]
    holds: Holds = "elevation"
    latitude_deg: float = Field(ge=-90, le=90, allow_inf_nan=False, examples=[0.0])
    longitude_deg: float = Field(ge=-180, le=180, allow_inf_nan=False, examples=[0.0])
    reach_km: float = Field(150.0, allow_inf_nan=False)
    source: str | None = Field(None, max_length=100)


@router.get("/position", summary="A position in any usual writing")
def position(text: Annotated[str, Query(max_length=200)]) -> dict[str, Any]:
    """Read decimal degrees, degrees and minutes, projected coordinates or a Plus Code."""
    found = parse_position(text)
    return {
        "latitude_deg": found.latitude_deg,
        "longitude_deg": found.longitude_deg,
        "form": found.form,
        "question": found.question,
    }


@router.get("/declination", summary="Where a compass points")
def magnetic(latitude_deg: Latitude, longitude_deg: Longitude, day: date | None = None) -> dict[str, Any]:
    """Tell the magnetic declination at a place, today or on another day, with its error."""
    found = declination(latitude_deg, longitude_deg, day or date.today())
    return {
        "declination_deg": found.declination_deg,
        "error_deg": found.error_deg,
        "model": found.model,
        "day": found.day.isoformat(),
        "text": found.text,
    }


@router.get("/tile-sources", summary="Where open tiles come from")
def tile_sources() -> dict[str, list[dict[str, Any]]]:
    """List the sources of open tiles with their licence; none of them is asked anything."""
    return {
        "sources": [
            {
                "id": one.id,
                "title": one.title,
                "holds": one.holds,
                "spacing_m": one.spacing_m,
                "licence": one.licence,
                "attribution": one.attribution,
            }
            for one in sources().values()
        ]
    }


@router.get("/download-plan", summary="How many tiles and megabytes a circle needs")
async def download_plan(
    latitude_deg: Latitude,
    longitude_deg: Longitude,
    context: ContextDep,
    reach_km: float = 150.0,
    holds: Holds = "elevation",
    source: str | None = None,
) -> dict[str, Any]:
    """Plan a download without going online."""
    return plan_document(await context.compute(plan, holds, latitude_deg, longitude_deg, reach_km, source))


@router.get("/download", summary="How far the download is")
def download_state(context: ContextDep) -> dict[str, Any]:
    """Tell state, tiles done and what became of each."""
    return context.downloads.document()


@router.post("/download", status_code=202, summary="Fetch the open tiles of a circle")
async def start_download(circle: CircleIn, context: ContextDep) -> dict[str, Any]:
    """Begin in the background; the ground is opened anew once it has ended."""
    planned = await context.compute(
        plan, circle.holds, circle.latitude_deg, circle.longitude_deg, circle.reach_km, circle.source
    )
    context.downloads.start(planned, context.open_ground_anew)
    return context.downloads.document()


@router.delete("/download", summary="Stop the download")
def stop_download(context: ContextDep) -> dict[str, Any]:
    """Stop at the next piece; what has arrived is taken up again by the next start."""
    context.downloads.stop()
    return context.downloads.document()
