"""Chains as the store keeps them, read back as chains."""

from __future__ import annotations

from app.chain.document import CHAIN_KEYS, chain_from_document
from app.chain.parts import Chain
from app.transmitters.store import Store


def stored_chain(store: Store, name: str) -> Chain:
    """Return a stored chain by name or id; NotStoredError if there is none."""
    document = store.get_chain(name)
    return chain_from_document({key: value for key, value in document.items() if key in CHAIN_KEYS})
