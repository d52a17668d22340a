"""Measured files: the match of an aerial, and its pattern."""

from __future__ import annotations

from fastapi import APIRouter
from fastapi.responses import JSONResponse

from app.measured_files import uploaded_match, uploaded_pattern
from app.web.context import ContextDep
from app.web.schemas import MatchIn, PatternIn

router = APIRouter(prefix="/api", tags=["answers"])


@router.post("/match", summary="How a measured aerial matches 75 ohms, its pad removed; match is not gain")
async def match(sent: MatchIn, context: ContextDep) -> JSONResponse:
    """Read a Touchstone file and say VSWR, return loss and mismatch in each wanted channel."""
    return JSONResponse(
        await context.compute(
            uploaded_match,
            sent.sweep.upload("sweep"),
            sent.calibrated,
            sent.pad,
            None if sent.own_pad is None else sent.own_pad.upload("own_pad"),
            sent.standard_ohm,
            sent.emissions,
            sent.raster,
            sent.channels,
            context.store,
        )
    )


@router.post("/pattern", summary="A measured pattern (our CSV, NSMA) as an aerial of a chain takes it")
async def pattern(sent: PatternIn, context: ContextDep) -> JSONResponse:
    """Read a pattern and give it back as keys of an aerial, with beamwidth and front-to-back ratio of each cut."""
    return JSONResponse(await context.compute(uploaded_pattern, sent.file.upload("file")))
