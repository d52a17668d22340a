"""The report on a kept roof, as a page and as a PDF."""

from __future__ import annotations

from typing import Annotated
from urllib.parse import quote

from fastapi import APIRouter, Path, Response
from fastapi.responses import HTMLResponse
from pydantic import ValidationError

from app.report.content import Document, report_content
from app.report.page import report_html
from app.report.paper import report_pdf
from app.transmitters.documents import damaged
from app.web.context import Context, ContextDep
from app.web.schemas import SavedRoofIn

router = APIRouter(tags=["report"])

Id = Annotated[str, Path(min_length=1, max_length=200)]
FRESH = {"Cache-Control": "no-cache"}


@router.get("/report/{id}.pdf", response_class=Response, summary="The report on a kept roof as a tagged PDF")
async def paper(id: Id, context: ContextDep) -> Response:
    """Set the report for A4."""
    content = await _content(id, context)
    return Response(await context.compute(report_pdf, content), media_type="application/pdf", headers=FRESH)


@router.get("/report/{id}", response_class=HTMLResponse, summary="The report on a kept roof")
async def page(id: Id, context: ContextDep) -> HTMLResponse:
    """Show the report."""
    content = await _content(id, context)
    return HTMLResponse(report_html(content, f"/report/{quote(id, safe='')}.pdf"), headers=FRESH)


async def _content(id: str, context: Context) -> Document:
    kept = context.store.get_roof(id)
    try:
        saved = SavedRoofIn(**{key: value for key, value in kept.items() if key in SavedRoofIn.model_fields})
    except ValidationError as error:
        raise damaged(f'roof "{kept["name"]}"', id) from error
    settings = context.settings
    asked = saved.question().model_copy(update={"ledgers": []})
    request = asked.request(settings.worth_per_multiplex, settings.reading_cost, context.store)
    return await context.compute(
        report_content, kept, request, context.store, context.ground, settings.refractivity_maps
    )
