"""Chains as the store keeps them, read back as chains."""

from __future__ import annotations

from dataclasses import replace

from app.chain.document import CHAIN_KEYS, chain_from_document
from app.chain.parts import Chain
from app.transmitters.store import Store


def stored_chain(store: Store, name: str) -> Chain:
    """Return a stored chain by name or id, prices it leaves out from the stored parts; NotStoredError if none."""
    document = store.get_chain(name)
    chain = chain_from_document({key: value for key, value in document.items() if key in CHAIN_KEYS})
    if chain.parts_price is not None:
        return chain
    prices = {str(part["id"]): part.get("price") for part in store.list_parts()}
    parts = [replace(part, price=prices.get(part.id)) if part.price is None else part for part in chain.parts]
    return replace(chain, parts=tuple(parts))
