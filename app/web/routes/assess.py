"""The main question, and one path of it."""

from __future__ import annotations

from typing import Annotated

from fastapi import APIRouter, Query
from fastapi.responses import JSONResponse

from app.path_query import path_document
from app.planner import assess
from app.skyline import skyline_document
from app.web.context import ContextDep
from app.web.schemas import AssessIn

router = APIRouter(prefix="/api", tags=["answers"])


@router.post("/assess", summary="Which multiplexes will this roof receive, and is a better chain worth it?")
async def assess_roof(question: AssessIn, context: ContextDep) -> JSONResponse:
    """Answer one roof: every multiplex, emission, chain and verdict, with assumptions and cautions."""
    request = question.request(context.settings.worth_per_multiplex, context.settings.reading_cost, context.store)
    return JSONResponse(
        await context.compute(
            assess,
            request,
            context.store,
            context.ground,
            refractivity_maps=context.settings.refractivity_maps,
        )
    )


Number = Annotated[float, Query(allow_inf_nan=False)]


@router.get("/path", summary="One path, both methods, every term, for 1 kW ERP")
async def path(
    from_latitude_deg: Number,
    from_longitude_deg: Number,
    to_latitude_deg: Number,
    to_longitude_deg: Number,
    frequency_mhz: Number,
    context: ContextDep,
    antenna_agl_m: Number = 100.0,
    aerial_agl_m: Number = 10.0,
    polarisation: str = "horizontal",
) -> JSONResponse:
    """Follow one path from a transmitter to a roof: profile, field by both methods, loss terms."""
    document = await context.compute(
        path_document,
        context.ground,
        from_latitude_deg,
        from_longitude_deg,
        to_latitude_deg,
        to_longitude_deg,
        frequency_mhz,
        antenna_agl_m,
        aerial_agl_m,
        polarisation,
        context.settings.refractivity_maps,
    )
    return JSONResponse(document)


@router.get("/skyline", summary="The horizon all round a roof, and which masts stand above or behind it")
async def skyline(
    latitude_deg: Number,
    longitude_deg: Number,
    context: ContextDep,
    aerial_agl_m: Number = 10.0,
    reach_km: Number = 60.0,
) -> JSONResponse:
    """Give angle and distance of the horizon for every half degree, and each mast in reach against it."""
    document = await context.compute(
        skyline_document,
        context.ground,
        context.store,
        latitude_deg,
        longitude_deg,
        aerial_agl_m,
        reach_km,
        context.settings.refractivity_maps,
    )
    return JSONResponse(document)
