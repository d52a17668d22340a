"""Readings that the user keeps, scan lists among them, and how they compare with the predictions."""

from __future__ import annotations

from typing import Annotated, Any

from fastapi import APIRouter, Path, Response
from fastapi.responses import JSONResponse

from app.kept_readings import keep
from app.logbook import logbook
from app.readings import reading_from_document, reading_to_document
from app.web.context import ContextDep
from app.web.schemas import ReadingIn

router = APIRouter(prefix="/api", tags=["readings"])

Id = Annotated[str, Path(min_length=1, max_length=200)]


@router.get("/readings", summary="Kept readings")
def readings(context: ContextDep) -> dict[str, list[dict[str, Any]]]:
    """List every kept reading, oldest first."""
    return {"readings": context.store.list_readings()}


@router.post("/readings", status_code=201, summary="Keep a reading or a scan list")
def keep_reading(sent: ReadingIn, context: ContextDep) -> dict[str, Any]:
    """Keep one reading, or all that a pasted scan list says; what was not understood of a list comes back."""
    return keep(context.store, sent.latitude_deg, sent.longitude_deg, sent.reading)


@router.get("/readings/{id}", summary="One kept reading")
def reading(id: Id, context: ContextDep) -> dict[str, Any]:
    """Return one kept reading."""
    return context.store.get_reading(id)


@router.put("/readings/{id}", summary="Change a kept reading, such as confirm it")
def change_reading(id: Id, sent: ReadingIn, context: ContextDep) -> dict[str, Any]:
    """Put a reading in the place of a kept one."""
    kept = context.store.get_reading(id)
    body = reading_to_document(reading_from_document(sent.reading))
    place = {"latitude_deg": sent.latitude_deg, "longitude_deg": sent.longitude_deg}
    return context.store.put_reading({**place, "reading": body, "id": kept["id"]})


@router.delete("/readings/{id}", status_code=204, summary="Forget a reading")
def forget_reading(id: Id, context: ContextDep) -> Response:
    """Remove one kept reading."""
    context.store.delete_reading(id)
    return Response(status_code=204)


@router.get("/logbook", summary="Our own track record: predicted against read")
async def track_record(context: ContextDep) -> JSONResponse:
    """Compare every kept level, C/N and MER with its prediction: mean and spread of the difference."""
    return JSONResponse(await context.compute(logbook, context.store, context.ground))
