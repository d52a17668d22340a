"""What the user keeps: roofs, chains, and parts with prices."""

from __future__ import annotations

from typing import Annotated, Any

from fastapi import APIRouter, Path, Response

from app.chain.document import chain_from_document, chain_to_document, part_from_document, part_to_document
from app.web.context import ContextDep
from app.web.schemas import ChainDocument, SavedRoofIn

router = APIRouter(prefix="/api", tags=["what you keep"])

Id = Annotated[str, Path(min_length=1, max_length=200)]
Document = dict[str, Any]
ADDED_BY_STORE = ("id", "created", "updated")


@router.get("/roofs", summary="Kept roofs")
def roofs(context: ContextDep) -> dict[str, list[Document]]:
    """List every kept roof, by name."""
    return {"roofs": context.store.list_roofs()}


@router.post("/roofs", status_code=201, summary="Keep a roof")
def keep_roof(saved: SavedRoofIn, context: ContextDep) -> Document:
    """Keep a roof under a new id."""
    return context.store.put_roof(_checked(saved))


@router.get("/roofs/{id}", summary="One kept roof")
def roof(id: Id, context: ContextDep) -> Document:
    """Return one kept roof."""
    return context.store.get_roof(id)


@router.put("/roofs/{id}", summary="Change a kept roof")
def change_roof(id: Id, saved: SavedRoofIn, context: ContextDep) -> Document:
    """Put a roof in the place of a kept one."""
    kept = context.store.get_roof(id)
    return context.store.put_roof(_checked(saved) | {"id": kept["id"]})


@router.delete("/roofs/{id}", status_code=204, summary="Forget a roof")
def forget_roof(id: Id, context: ContextDep) -> Response:
    """Remove one kept roof."""
    context.store.delete_roof(id)
    return Response(status_code=204)


@router.get("/chains", summary="Kept chains")
def chains(context: ContextDep) -> dict[str, list[Document]]:
    """List every kept chain, by name."""
    return {"chains": context.store.list_chains()}


@router.post("/chains", status_code=201, summary="Keep a chain")
def keep_chain(chain: ChainDocument, context: ContextDep) -> Document:
    """Keep a chain under a new id, once it has been read as one."""
    return context.store.put_chain(_read(chain))


@router.get("/chains/{id}", summary="One kept chain, by id or name")
def chain(id: Id, context: ContextDep) -> Document:
    """Return one kept chain."""
    return context.store.get_chain(id)


@router.put("/chains/{id}", summary="Change a kept chain")
def change_chain(id: Id, chain: ChainDocument, context: ContextDep) -> Document:
    """Put a chain in the place of a kept one, once it has been read as one."""
    kept = context.store.get_chain(id)
    return context.store.put_chain(_read(chain) | {"id": kept["id"]})


@router.delete("/chains/{id}", status_code=204, summary="Forget a chain")
def forget_chain(id: Id, context: ContextDep) -> Response:
    """Remove one kept chain."""
    context.store.delete_chain(id)
    return Response(status_code=204)


@router.get("/parts", summary="Kept parts with prices")
def parts(context: ContextDep) -> dict[str, list[Document]]:
    """List every kept part."""
    return {"parts": context.store.list_parts()}


@router.post("/parts", status_code=201, summary="Keep a part")
def keep_part(part: ChainDocument, context: ContextDep) -> Document:
    """Keep a part under its id, once it has been read as one."""
    return context.store.put_part(_read_part(part))


@router.get("/parts/{id}", summary="One kept part")
def part(id: Id, context: ContextDep) -> Document:
    """Return one kept part."""
    return context.store.get_part(id)


@router.put("/parts/{id}", summary="Change a kept part")
def change_part(id: Id, part: ChainDocument, context: ContextDep) -> Document:
    """Put a part in the place of a kept one, once it has been read as one."""
    kept = context.store.get_part(id)
    return context.store.put_part(_read_part({**part, "id": kept["id"]}))


@router.delete("/parts/{id}", status_code=204, summary="Forget a part")
def forget_part(id: Id, context: ContextDep) -> Response:
    """Remove one kept part."""
    context.store.delete_part(id)
    return Response(status_code=204)


def _read_part(part: Document) -> Document:
    return part_to_document(part_from_document({key: part[key] for key in part if key not in ("created", "updated")}))


def _checked(saved: SavedRoofIn) -> Document:
    saved.roof.roof()
    return saved.model_dump()


def _read(chain: Document) -> Document:
    """Return the document of a chain as it is read back, without what the store adds."""
    return chain_to_document(chain_from_document({key: chain[key] for key in chain if key not in ADDED_BY_STORE}))
