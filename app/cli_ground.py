"""Commands for what lies under a path: elevation rasters, land cover, open tiles."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import Annotated

import typer

from app.cli_tools import MENDABLE, Json, mendable, number, place, show
from app.errors import AppError
from terrain.errors import TerrainError

terrain = typer.Typer(help="Elevation rasters.", no_args_is_help=True)
cover = typer.Typer(help="Land-cover maps.", no_args_is_help=True)


@terrain.command("add")
def add_rasters(
    paths: Annotated[list[Path], typer.Argument(metavar="PATH…", help="Raster files.")],
    crs: Annotated[str | None, typer.Option(help="Coordinate system of rasters that do not say, as EPSG:N.")] = None,
    kind: Annotated[str | None, typer.Option(help="surface, radar-surface or bare.")] = None,
    unit: Annotated[str | None, typer.Option(help="Unit of heights that do not say: m, ft or us survey foot.")] = None,
    as_json: Json = False,
) -> None:
    """Copy elevation rasters into the data folder, checked first; good ones are kept, refused ones told.

    A server that runs reads them when it is started again.
    """
    from app.ground_files import add_raster
    from app.lists import table

    rows, refused = [], []
    for one in paths:
        try:
            rows.append(add_raster(one, crs, kind, unit))
        except (AppError, TerrainError) as error:
            refused.append(str(error))
    if rows or as_json:
        show(rows, as_json, lambda: table(rows, ""))
    for message in refused:
        typer.echo(message, err=True)
    if refused:
        raise typer.Exit(MENDABLE)


@terrain.command("remove")
def remove_one_raster(
    name: Annotated[str, typer.Argument(metavar="FILE", help="Name as `terrain list` shows it.")], as_json: Json = False
) -> None:
    """Take a raster out of the data folder."""
    from app.ground_files import remove_raster
    from app.lists import table

    with mendable():
        row = remove_raster(name)
    show(row, as_json, lambda: table([row], ""))


@terrain.command("list")
def list_rasters(as_json: Json = False) -> None:
    """List rasters in use and those refused, with the reason."""
    from app.lists import raster_rows, table
    from app.world import open_world

    with mendable():
        rows = raster_rows(open_world().ground)
    show(rows, as_json, lambda: table(rows, "no raster: `gainworth terrain add FILE`"))


At = Annotated[str, typer.Option(metavar="POSITION", help="Middle of the circle, in any usual writing.")]
Reach = Annotated[float, typer.Option(metavar="KM", help="Radius of the circle.", parser=number)]
Source = Annotated[str | None, typer.Option(help="Id of the source; default: the first of its kind.")]
DryRun = Annotated[bool, typer.Option("--dry-run", help="Say how much it would be; fetch nothing.")]


@terrain.command("get")
def get_tiles(
    at: At, reach: Reach = 150.0, source: Source = None, dry_run: DryRun = False, as_json: Json = False
) -> None:
    """Fetch the open elevation tiles round a place; started again, it goes on where it was."""
    _get("elevation", at, reach, source, dry_run, as_json)


@cover.command("get")
def get_cover(
    at: At, reach: Reach = 50.0, source: Source = None, dry_run: DryRun = False, as_json: Json = False
) -> None:
    """Fetch the open land-cover tiles round a place."""
    _get("cover", at, reach, source, dry_run, as_json)


def _get(holds: str, at: str, reach: float, source: str | None, dry_run: bool, as_json: bool) -> None:
    from app.open_tiles import fetch_plan, outcome_document, plan, plan_document

    with mendable():
        planned = plan(holds, *place(at), reach, source)
        if dry_run:
            document = plan_document(planned)
            show(document, as_json, lambda: str(document["text"]))
            return
        typer.echo(planned.said_first(), err=as_json)
        on_screen = sys.stderr.isatty()
        progress = fetch_plan(
            planned, (lambda one: typer.echo(f"\r{one.text}  ", nl=False, err=True)) if on_screen else lambda one: None
        )
        if on_screen:
            typer.echo("", err=True)
        outcome = outcome_document(planned, progress)
    show(outcome, as_json, lambda: str(outcome["summary"]))
    if any(one["state"] in ("failed", "stopped") for one in outcome["outcomes"]):
        raise typer.Exit(MENDABLE)


@cover.command("add")
def add_maps(
    paths: Annotated[list[Path], typer.Argument(metavar="PATH…", help="GeoTIFF files of class codes.")],
    classes: Annotated[str | None, typer.Option(help="Class table: worldcover, corine or nlcd.")] = None,
    crs: Annotated[str | None, typer.Option(help="Coordinate system of maps that do not say, as EPSG:N.")] = None,
    as_json: Json = False,
) -> None:
    """Copy land-cover maps into the data folder, checked first."""
    from app.ground_files import add_cover
    from app.lists import table

    with mendable():
        rows = [add_cover(one, classes, crs) for one in paths]
    show(rows, as_json, lambda: table(rows, "nothing was added"))


@cover.command("list")
def list_maps(as_json: Json = False) -> None:
    """List land-cover maps in use and those refused, with the reason."""
    from app.lists import cover_rows, table
    from app.paths import cache_dir
    from app.world import cover_dir
    from terrain.cover import Cover

    with mendable():
        rows = cover_rows(Cover.open([cover_dir()], cache_dir()) if cover_dir().is_dir() else None)
    show(rows, as_json, lambda: table(rows, "no land cover: `gainworth cover get` or `gainworth cover add FILE`"))
