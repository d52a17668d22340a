"""What is on the air, and what the answers rest on."""

from __future__ import annotations

import dataclasses
from importlib import metadata
from typing import Annotated, Any

from fastapi import APIRouter, Path, Query

from app.assumptions import Assumptions
from app.chain.tables import CABLES
from app.demo.scenario import DEMO_ROOFS
from app.errors import RequestError
from app.mapped import cover_in_use, credits_of
from app.request import LONGEST_REACH_KM
from app.transmitters.store import DEMO_SOURCE
from app.web.assets import ASSETS
from app.web.context import ContextDep
from app.web.schemas import SwitchIn

router = APIRouter(prefix="/api", tags=["what is known"])

Id = Annotated[str, Path(min_length=1, max_length=200)]
Latitude = Annotated[float | None, Query(ge=-90, le=90, allow_inf_nan=False)]
Longitude = Annotated[float | None, Query(ge=-180, le=180, allow_inf_nan=False)]
Reach = Annotated[float, Query(ge=1, le=LONGEST_REACH_KM, allow_inf_nan=False)]


@router.get("/emissions", summary="Channels on the air, everywhere or within reach of a place")
def emissions(
    context: ContextDep, latitude_deg: Latitude = None, longitude_deg: Longitude = None, reach_km: Reach = 150.0
) -> dict[str, list[dict[str, Any]]]:
    """List emissions; with a place also distance and bearing from there, nearest first."""
    if (latitude_deg is None) != (longitude_deg is None):
        missing = "latitude_deg" if latitude_deg is None else "longitude_deg"
        raise RequestError(f"{missing} is missing: a place needs both, or leave both out", field=missing)
    if latitude_deg is None or longitude_deg is None:
        return {"emissions": [dataclasses.asdict(one) for one in context.store.emissions()]}
    found = context.store.emissions_within(latitude_deg, longitude_deg, reach_km)
    return {
        "emissions": [
            dataclasses.asdict(emission) | {"distance_km": distance_km, "bearing_deg": bearing_deg}
            for emission, _, distance_km, bearing_deg in found
        ]
    }


@router.put("/emissions/{id}", summary="Keep a channel on the air or leave it out")
def switch_emission(id: Id, wish: SwitchIn, context: ContextDep) -> dict[str, Any]:
    """Switch one emission on or off for every answer; its import says anew what is on."""
    return dataclasses.asdict(context.store.switch_emission(id, wish.on))


@router.get("/transmitters", summary="Masts")
def transmitters(context: ContextDep) -> dict[str, list[dict[str, Any]]]:
    """List every mast in use."""
    return {"transmitters": [dataclasses.asdict(one) for one in context.store.transmitters()]}


@router.get("/multiplexes", summary="What people want to watch")
def multiplexes(context: ContextDep) -> dict[str, list[dict[str, Any]]]:
    """List every multiplex in use."""
    return {"multiplexes": [dataclasses.asdict(one) for one in context.store.multiplexes().values()]}


@router.get("/assumptions", summary="Every value we chose, with the reason")
def assumptions() -> dict[str, list[dict[str, object]]]:
    """List the values that hold unless a question changes them."""
    return {"assumptions": Assumptions().document()}


@router.get("/cables", summary="Classes of cable that a feeder can be of")
def cables() -> dict[str, list[str]]:
    """List the classes by name."""
    return {"cables": list(CABLES)}


@router.get("/health", summary="What this server knows")
def health(context: ContextDep) -> dict[str, Any]:
    """Tell version, ground, sources and libraries: what the page needs before there is a roof."""
    ground = context.ground
    sources = context.store.sources()
    is_demo = [source.id for source in sources] == [DEMO_SOURCE]
    return {
        "status": "ok",
        "version": metadata.version("gainworth"),
        "read_only": context.store.read_only,
        "ground": {
            "version": ground.version,
            "rasters": [
                {
                    "name": raster.name,
                    "kind": raster.kind,
                    "spacing_m": raster.spacing_m,
                    "bounds_deg": list(raster.bounds),
                    "attribution": raster.attribution,
                }
                for raster in ground.rasters
            ],
            "cover": [
                {"name": one.name, "classes": one.classes, "spacing_m": one.grid.spacing_m}
                for one in cover_in_use(ground)
            ],
            "credits": credits_of(ground),
            "refused": [{"file": one.path.name, "message": one.message} for one in ground.refused],
        },
        "sources": [dataclasses.asdict(one) for one in sources],
        "demo_roofs": [dataclasses.asdict(one) for one in DEMO_ROOFS] if is_demo else [],
        "libraries": [
            {"file": one.name, "package": one.package, "version": one.version, "licence": one.licence}
            for one in ASSETS.values()
        ],
    }
