"""Questions about chains at a roof: what a change would bring, what would be cheapest, a block of flats."""

from __future__ import annotations

from fastapi import APIRouter
from fastapi.responses import JSONResponse

from app.block_query import block_document
from app.cheapest import cheapest_document
from app.sweeps import sweep_document
from app.web.context import ContextDep
from app.web.schemas import BlockIn, CheapestIn, SweepIn

router = APIRouter(prefix="/api", tags=["answers"])


@router.post("/sweep", summary="What turning, raising or doubling the aerial would change")
async def sweep(question: SweepIn, context: ContextDep) -> JSONResponse:
    """Chance of each multiplex for each whole degree, expected multiplexes by height, two aerials against one."""
    return JSONResponse(
        await context.compute(
            sweep_document,
            question.assess_request(),
            context.store,
            context.ground,
            tuple(question.heights_m),
            refractivity_maps=context.settings.refractivity_maps,
        )
    )


@router.post("/cheapest", summary="The cheapest chains that stored parts make, and why each dearer one pays")
async def cheapest(question: CheapestIn, context: ContextDep) -> JSONResponse:
    """Pareto front of price against expected multiplexes."""
    return JSONResponse(
        await context.compute(
            cheapest_document,
            question.assess_request(),
            question.wish(),
            context.store,
            context.ground,
            refractivity_maps=context.settings.refractivity_maps,
        )
    )


@router.post("/block", summary="A block of flats from four answers")
async def block(question: BlockIn, context: ContextDep) -> JSONResponse:
    """Proposed chain with the levels at its outlets and what lies outside the window."""
    return JSONResponse(
        await context.compute(
            block_document,
            question.assess_request(),
            question.question(),
            context.store,
            context.ground,
            refractivity_maps=context.settings.refractivity_maps,
        )
    )
