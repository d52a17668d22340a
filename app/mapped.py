"""What land cover adds: surroundings of a roof, and credits of the maps in use."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from app.request import AssessRequest
from app.roof import Roof, Surroundings
from terrain.cover import CoverRaster, categories
from terrain.geodesy import destination
from terrain.mosaic import Ground

# The neighbourhood that stands for the surroundings. Our choice: about where a house before the aerial stands.
_RINGS_M = (15.0, 30.0, 50.0)
_BEARINGS_DEG = np.arange(0.0, 360.0, 30.0)
COASTLINE = "Coastline: Natural Earth 1:10m, public domain"
_WORDS: dict[str, Surroundings] = {"suburban": "suburban", "urban": "urban", "trees": "trees"}


def with_surroundings(roof: Roof, ground: Ground) -> tuple[Roof, str]:
    """Put the most frequent land cover within 50 m in the place of "mapped", and say so; "open" where none is known."""
    if roof.surroundings != "mapped":
        return roof, ""
    cover = ground.overlay.cover if ground.overlay is not None else None
    if cover is None:
        return replace(roof, surroundings="open"), ""
    bearing, metres = np.meshgrid(_BEARINGS_DEG, _RINGS_M)
    lat, lon = destination(roof.latitude_deg, roof.longitude_deg, bearing.ravel(), metres.ravel() / 1e3)
    seen = cover.category(lat, lon)
    known = seen[seen > 0]
    if known.size == 0:
        return replace(roof, surroundings="open"), "No land cover is known at the roof: its surroundings count as open."
    name = categories()[int(np.bincount(known).argmax())]
    word = _WORDS.get(name, "open")
    return (
        replace(roof, surroundings=word),
        f"Surroundings by land cover: {name}, taken as {word}. Say what stands there if that is wrong.",
    )


def settled(request: AssessRequest, ground: Ground) -> tuple[AssessRequest, str]:
    """Put what land cover shows in the place of a request's "mapped" surroundings, and say so."""
    roof, told = with_surroundings(request.roof, ground)
    return replace(request, roof=roof), told


def credits_of(ground: Ground) -> list[str]:
    """Credits that the licences of the rasters in use ask for, each once."""
    credits = {*ground.credits, *(one.attribution for one in cover_in_use(ground))}
    if ground.overlay is not None:
        credits.add(COASTLINE)
    return sorted(credits - {""})


def cover_in_use(ground: Ground) -> tuple[CoverRaster, ...]:
    """Maps of land cover that stand over a ground."""
    cover = ground.overlay.cover if ground.overlay is not None else None
    return () if cover is None else cover.rasters
