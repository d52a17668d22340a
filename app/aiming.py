"""Where further aerials of a chain point, if nobody said."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from app.assumptions import Assumptions
from app.chain.parts import Aerial, AerialPolarisation, Chain
from app.margins import Air, turn
from app.roof import Roof

ROUNDS = 2  # each aerial is turned so often with the others held


def aimed(chain: Chain, air: Air, roof: Roof, counted: Sequence[str], assumptions: Assumptions) -> Chain:
    """Return the chain with a pointing for every aerial but the first, which `turn` looks for.

    One aerial after the other is turned to its best whole degree while the others are held; a chain of one
    aerial, or whose further aerials all say where they point, is returned as it is.
    """
    free = [aerial.id for aerial in chain.aerials[1:] if aerial.pointing_deg is None]
    if not free or not air.fields:
        return chain
    for _ in range(ROUNDS):
        for ident in (*free, chain.aerial.id):
            first = turn(chain, air, roof, counted, assumptions)
            held = _with(chain, chain.aerial.id, first.pointing_deg, first.polarisation)
            if ident == chain.aerial.id:
                continue
            turned = turn(_led_by(held, ident), air, roof, counted, assumptions)
            chain = _with(chain, ident, turned.pointing_deg, turned.polarisation)
    return chain


def _with(chain: Chain, ident: str, pointing_deg: float, polarisation: AerialPolarisation) -> Chain:
    """Return the chain with one aerial mounted so."""
    parts = tuple(
        replace(part, pointing_deg=pointing_deg, polarisation=polarisation)
        if isinstance(part, Aerial) and part.id == ident
        else part
        for part in chain.parts
    )
    return replace(chain, parts=parts)


def _led_by(chain: Chain, ident: str) -> Chain:
    """Return the same chain with another aerial as its first one, free to turn."""
    explicit = [
        replace(part, after=chain.tree.fed_by[part.id]) if part.id in chain.tree.fed_by else part
        for part in chain.parts
    ]
    first = next(part for part in explicit if part.id == ident)
    rest = [part for part in explicit if part.id != ident]
    assert isinstance(first, Aerial)
    return replace(chain, parts=(replace(first, pointing_deg=None), *rest), pointing_deg=None, polarisation=None)
