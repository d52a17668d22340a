"""Chains on the command line: parse, call one function of app, show."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from app.cli_tools import Json, mendable, number, place, show, whole

chains = typer.Typer(help="Aerials with everything behind them.", no_args_is_help=True)

At = Annotated[str, typer.Option(metavar="LAT,LON", help="Position of the roof in degrees.")]
Height = Annotated[float, typer.Option(metavar="M", help="Aerial above the ground.", parser=number)]
Names = Annotated[list[str] | None, typer.Option("--chain", metavar="NAME", help="Chain; may be repeated.")]


@chains.command("list")
def list_chains(as_json: Json = False) -> None:
    """List stored chains with their parts and prices."""
    from app.lists import chain_rows, table
    from app.world import open_world

    with mendable():
        rows = chain_rows(open_world().store)
    show(rows, as_json, lambda: table(rows, "no chain is stored"))


@chains.command("export")
def export_chains(
    names: Annotated[
        list[str] | None, typer.Argument(metavar="[NAME]…", help="Chains; default: all, with parts.")
    ] = None,
    out: Annotated[Path | None, typer.Option(metavar="FILE", help="Write there instead of showing it.")] = None,
) -> None:
    """Write stored chains, and parts with prices, as one TOML file."""
    from app.chain_file import export_text, write_file
    from app.world import open_world

    with mendable():
        text = export_text(open_world().store, names)
        if out is not None:
            write_file(out, text)
    if out is None:
        typer.echo(text.rstrip("\n"))


@chains.command("import")
def import_chains(
    file: Annotated[Path, typer.Argument(metavar="FILE", help="TOML with [[chains]] and [[parts]].")],
    dry_run: Annotated[bool, typer.Option("--dry-run", help="Check only; store nothing.")] = False,
    as_json: Json = False,
) -> None:
    """Store chains and parts of a TOML file: all of them, or none if one is not possible."""
    from app.chain_file import import_file
    from app.world import open_world

    with mendable():
        summary = import_file(file, open_world().store, dry_run)
    show(summary.document(), as_json, summary.text)


@chains.command("sweep")
def sweep(at: At, height: Height = 10.0, names: Names = None, heights: bool = True, as_json: Json = False) -> None:
    """Say what turning, raising or doubling the aerial would change at a roof."""
    from app.chain_tellings import told_sweep
    from app.request import AssessRequest
    from app.roof import Roof
    from app.sweeps import HEIGHTS_M, sweep_document
    from app.world import open_world

    with mendable():
        roof = Roof(*place(at), height)
        world = open_world()
        request = AssessRequest(roof=roof, chains=tuple(names) if names else None)
        document = sweep_document(
            request, world.store, world.ground, HEIGHTS_M if heights else (), refractivity_maps=world.refractivity_maps
        )
    show(document, as_json, lambda: told_sweep(document))


@chains.command("cheapest")
def cheapest(
    at: At,
    height: Height = 10.0,
    outlets: Annotated[int, typer.Option(help="How many outlets.", parser=whole)] = 1,
    feeder: Annotated[float, typer.Option(metavar="M", help="Length of feeder needed.", parser=number)] = 15.0,
    labour: Annotated[float, typer.Option(metavar="PRICE", help="Price of the work.", parser=number)] = 0.0,
    visit: Annotated[float, typer.Option(metavar="PRICE", help="Price of the visit.", parser=number)] = 0.0,
    want: Annotated[list[str] | None, typer.Option(metavar="MULTIPLEX", help="Multiplex that counts.")] = None,
    as_json: Json = False,
) -> None:
    """Find the cheapest chains that stored parts with prices make, and why each dearer one pays."""
    from app.chain_tellings import told_cheapest
    from app.cheapest import Wish, cheapest_document
    from app.request import AssessRequest
    from app.roof import Roof
    from app.world import open_world

    with mendable():
        roof = Roof(*place(at), height)
        world = open_world()
        request = AssessRequest(roof=roof, wanted=tuple(want) if want else None)
        wish = Wish(outlets, feeder, labour, visit)
        document = cheapest_document(
            request, wish, world.store, world.ground, refractivity_maps=world.refractivity_maps
        )
    show(document, as_json, lambda: told_cheapest(document))


@chains.command("block")
def block(
    at: At,
    outlets: Annotated[int, typer.Option(help="How many outlets.", parser=whole)],
    aerial: Annotated[str, typer.Option(metavar="ID", help="Stored aerial, or the chain that has it.")],
    layout: Annotated[str, typer.Option(help="star or riser.")] = "star",
    longest: Annotated[float, typer.Option(metavar="M", help="Longest run.", parser=number)] = 40.0,
    shortest: Annotated[float, typer.Option(metavar="M", help="Shortest run.", parser=number)] = 10.0,
    standard: Annotated[str, typer.Option(help="Level window, such as en-60728-1.")] = "en-60728-1",
    height: Height = 10.0,
    out: Annotated[Path | None, typer.Option(metavar="FILE", help="Write the chain there as TOML.")] = None,
    as_json: Json = False,
) -> None:
    """Propose amplifier, taps and equaliser for a block of flats from four answers."""
    from app.block_query import BlockQuestion, block_document
    from app.chain_file import chain_text, write_file
    from app.chain_tellings import told_block
    from app.request import AssessRequest
    from app.roof import Roof
    from app.world import open_world

    with mendable():
        roof = Roof(*place(at), height)
        world = open_world()
        question = BlockQuestion(outlets, layout, longest, shortest, aerial, standard)
        document = block_document(
            AssessRequest(roof=roof), question, world.store, world.ground, refractivity_maps=world.refractivity_maps
        )
        if out is not None:
            write_file(out, chain_text(document["chain"]))
    show(document, as_json, lambda: told_block(document))


@chains.command("match")
def match(
    file: Annotated[Path, typer.Argument(metavar="FILE.s1p", help="Sweep of the aerial's terminals.")],
    calibrated: Annotated[str, typer.Option(help="behind-pad or before-pad: where the standards were screwed on.")],
    pad: Annotated[str, typer.Option(help="none, minimum-loss, series-25 or own.")] = "none",
    own_pad: Annotated[Path | None, typer.Option(metavar="FILE.s2p", help="Your pad, port 1 at the analyser.")] = None,
    standard: Annotated[
        float | None, typer.Option("--ohm", help="Load used in calibration; default as the file says.", parser=number)
    ] = None,
    raster: Annotated[str, typer.Option(help="Channel raster.")] = "europe-uhf-8",
    channel: Annotated[list[str] | None, typer.Option(help="Channel; may be repeated.")] = None,
    as_json: Json = False,
) -> None:
    """Show how an aerial matches 75 ohms, with the pad removed; match is not gain."""
    from app.chain.match import Measurement
    from app.chain.touchstone import read_touchstone
    from app.match_query import channels_of_raster, match_document, told_match

    with mendable():
        pad_sweep = None if own_pad is None else read_touchstone(own_pad)
        # measured_match checks the words
        measured = Measurement(read_touchstone(file), calibrated, pad, pad_sweep, standard)  # type: ignore[arg-type]
        document = match_document(measured, channels_of_raster(raster, channel or ()))
    show(document, as_json, lambda: told_match(document))


@chains.command("pattern")
def pattern(
    file: Annotated[Path, typer.Argument(metavar="FILE", help="Our CSV, or the NSMA format.")], as_json: Json = False
) -> None:
    """Read a measured pattern and show it as the cuts that an aerial in a chain's file takes."""
    from app.chain.pattern_files import read_pattern
    from app.chain_file import pattern_document, pattern_text

    with mendable():
        document = pattern_document(read_pattern(file))
    show(document, as_json, lambda: pattern_text(document))
