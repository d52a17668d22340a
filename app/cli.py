"""The same questions on the command line: parse, call one function of app, show."""

from __future__ import annotations

import socket
import sys
import time
from pathlib import Path
from typing import Annotated, Any

import typer

from app.chains_cli import chains
from app.cli_ground import cover, terrain
from app.cli_tools import Json, mendable, number, pair, place, show, whole
from app.errors import RequestError

main = typer.Typer(
    name="gainworth",
    help="Which television multiplexes will this roof receive, and is a better aerial worth its price?",
    no_args_is_help=True,
    add_completion=False,
    pretty_exceptions_enable=False,
)
transmitters = typer.Typer(help="What is on the air.", no_args_is_help=True)
readings = typer.Typer(help="What was read at a roof.", no_args_is_help=True)
main.add_typer(transmitters, name="transmitters")
main.add_typer(terrain, name="terrain")
main.add_typer(cover, name="cover")
main.add_typer(chains, name="chains")
main.add_typer(readings, name="readings")

WRONG = 1
WORTH_TELLING_S = 1.0  # of unpacking; less is no wait


@main.command()
def serve(
    host: Annotated[str | None, typer.Option(help="Address to listen on.")] = None,
    port: Annotated[int | None, typer.Option(help="Port to listen on; 0 takes a free one.", parser=whole)] = None,
    open_page: Annotated[bool, typer.Option("--open", help="Open the page in the browser.")] = False,
    as_json: Json = False,
) -> None:
    """Serve the page and the API until stopped; print the address."""
    import uvicorn

    from app.fast_paths import warm_up_in_background
    from app.paths import data_dir
    from app.settings import load_settings
    from app.web.main import create_app
    from app.world import open_world

    with mendable():
        settings = load_settings(data_dir())
        changes = {key: value for key, value in (("host", host), ("port", port)) if value is not None}
        settings = settings.model_copy(update=changes)
        listener = _listener(settings.host, settings.port)
        world = open_world()
    warm_up_in_background(world.ground)
    address = f"http://{f'[{settings.host}]' if ':' in settings.host else settings.host}:{listener.getsockname()[1]}/"
    show({"address": address}, as_json, lambda: f"Gainworth listens at {address} (stop with Ctrl-C)")
    sys.stdout.flush()
    if open_page:
        typer.launch(address)
    config = uvicorn.Config(create_app(world.store, world.ground, settings), log_level="warning")
    uvicorn.Server(config).run(sockets=[listener])


def _listener(host: str, port: int) -> socket.socket:
    if not 0 <= port <= 65535:
        raise RequestError(f"port {port} is not possible: use 0 to 65535", field="port", allowed="0 to 65535")
    try:
        family, *_, address = socket.getaddrinfo(host, port, type=socket.SOCK_STREAM)[0]
        return socket.create_server(address, family=family, backlog=128)
    except OSError as error:
        raise RequestError(
            f"cannot listen on {host} port {port} ({error.strerror or error}): "
            "use another one with --port, or --port 0 for a free one",
            field="port",
        ) from error


@main.command()
def assess(
    at: Annotated[str, typer.Option(metavar="LAT,LON", help="Position of the roof in degrees.")],
    height: Annotated[float, typer.Option(metavar="M", help="Aerial above the ground.", parser=number)] = 10.0,
    chain: Annotated[
        list[str] | None,
        typer.Option(metavar="NAME", help="Chain to compare; may be repeated. Default: all stored."),
    ] = None,
    now: Annotated[str | None, typer.Option(metavar="NAME|nothing", help="What is up now.")] = None,
    want: Annotated[
        list[str] | None,
        typer.Option(metavar="MULTIPLEX", help="Wanted multiplex; may be repeated. Default: those that differ."),
    ] = None,
    worth: Annotated[
        float | None, typer.Option(metavar="V", help="What one more wanted multiplex is worth.", parser=number)
    ] = None,
    reach: Annotated[
        float, typer.Option(metavar="KM", help="How far to look for transmitters.", parser=number)
    ] = 150.0,
    method: Annotated[str, typer.Option(help="p1812, p1546 or both.")] = "both",
    availability: Annotated[int, typer.Option(help="Share of time: 50, 90 or 99 %.", parser=whole)] = 99,
    surroundings: Annotated[
        str, typer.Option(help="open, suburban, urban, trees, or mapped: as land cover shows them.")
    ] = "mapped",
    leaves: Annotated[
        float, typer.Option(metavar="M", help="Leaves the signals pass before the aerial.", parser=number)
    ] = 0.0,
    cost: Annotated[float | None, typer.Option(metavar="C", help="What taking a reading costs.", parser=number)] = None,
    without_readings: Annotated[
        bool, typer.Option("--without-readings", help="Leave the stored readings of this roof out.")
    ] = False,
    as_json: Json = False,
) -> None:
    """Say what a roof receives with each chain, and whether a better one is worth its price."""
    from app.paths import data_dir
    from app.planner import assess as answer_to
    from app.request import AssessRequest
    from app.roof import Roof
    from app.settings import load_settings
    from app.telling import told
    from app.world import open_world

    with mendable():
        latitude_deg, longitude_deg = place(at)
        settings = load_settings(data_dir())
        request = AssessRequest(
            roof=Roof(latitude_deg, longitude_deg, height, surroundings, leaves_m=leaves),  # type: ignore[arg-type]  # Roof checks the word
            chains=tuple(chain) if chain else None,
            now=now,
            wanted=tuple(want) if want else None,
            worth_per_multiplex=settings.worth_per_multiplex if worth is None else worth,
            reading_cost=settings.reading_cost if cost is None else cost,
            stored_readings=not without_readings,
            availability_percent=availability,
            reach_km=reach,
            method=method,  # type: ignore[arg-type]  # AssessRequest checks the word
        )
        world = open_world()
        start = time.perf_counter()
        document = answer_to(request, world.store, world.ground, refractivity_maps=world.refractivity_maps)
    unpacking_s = world.ground.decoding_s
    if unpacking_s > WORTH_TELLING_S:
        whole_s = time.perf_counter() - start
        text = (
            f"This answer took {whole_s:.1f} s, {unpacking_s:.1f} s of it to unpack new ground; the next one does not."
        )
        typer.echo(text, err=True)
    show(document, as_json, lambda: told(document))


@main.command()
def path(
    start: Annotated[str, typer.Option("--from", metavar="LAT,LON", help="Position of the transmitter.")],
    end: Annotated[str, typer.Option("--to", metavar="LAT,LON", help="Position of the roof.")],
    frequency: Annotated[float, typer.Option(metavar="MHZ", help="Centre frequency.", parser=number)],
    heights: Annotated[str, typer.Option(metavar="TX,RX", help="Antenna and aerial above ground, in m.")] = "100,10",
    polarisation: Annotated[str, typer.Option(help="horizontal or vertical.")] = "horizontal",
    as_json: Json = False,
) -> None:
    """Compute one path with both methods and show every term, for 1 kW ERP."""
    from app.path_query import path_document, told_path
    from app.world import open_world

    with mendable():
        world = open_world()
        document = path_document(
            world.ground,
            *place(start),
            *place(end),
            frequency,
            *pair(heights, "--heights", "150,10"),
            polarisation,
            world.refractivity_maps,
        )
    show(document, as_json, lambda: told_path(document))


@main.command()
def verify(
    folder: Annotated[
        Path | None, typer.Argument(metavar="[DIR]", help="Worked examples; default: those in the package.")
    ] = None,
    as_json: Json = False,
) -> None:
    """Replay published worked examples; leaves with 1 if a case is off by more than 1e-6 dB."""
    from app.verify import verify as replay

    with mendable():
        report = replay(folder)
    show(report.document(), as_json, report.text)
    if report.failed:
        raise typer.Exit(WRONG)


@transmitters.command("import")
def import_file(
    file: Annotated[Path, typer.Argument(metavar="FILE", help="CSV in our template's columns.")],
    dry_run: Annotated[bool, typer.Option("--dry-run", help="Check only; store nothing.")] = False,
    as_json: Json = False,
) -> None:
    """Import transmitters; good rows are kept, refused rows are listed."""
    from app.paths import data_dir
    from app.transmitters.store import Store
    from app.transmitters.template import import_template

    with mendable():
        summary = import_template(file, Store.open(data_dir()), dry_run)
    show(summary.document(), as_json, summary.text)


@transmitters.command("remove")
def remove_source(
    source: Annotated[str, typer.Argument(metavar="SOURCE", help="Source as `transmitters list` shows it.")],
    as_json: Json = False,
) -> None:
    """Take everything out that one import brought; the demo comes back when nothing else is stored."""
    from app.paths import data_dir
    from app.transmitters.store import Store

    with mendable():
        removed = Store.open(data_dir()).delete_source(source)
    document = {"source": source, "emissions_removed": removed}
    show(document, as_json, lambda: f'{removed} emissions of source "{source}" taken out')


@transmitters.command("template")
def print_template() -> None:
    """Print an example of the CSV template, to fill in."""
    from app.transmitters.template import template_example

    typer.echo(template_example().rstrip("\n"))


@transmitters.command("list")
def list_transmitters(as_json: Json = False) -> None:
    """List what is on the air."""
    from app.lists import emission_rows, table
    from app.world import open_world

    with mendable():
        rows = emission_rows(open_world().store)
    show(rows, as_json, lambda: table(rows, "no transmitter is stored: `gainworth transmitters import FILE`"))


@main.command()
def compare(
    at: Annotated[list[str], typer.Option(metavar="LAT,LON", help="A roof; may be repeated for several.")],
    chain: Annotated[
        list[str] | None, typer.Option(metavar="NAME", help="Chain to compare; may be repeated. Default: all stored.")
    ] = None,
    now: Annotated[str | None, typer.Option(metavar="NAME|nothing", help="What is up now.")] = None,
    height: Annotated[float, typer.Option(metavar="M", help="Aerial above the ground.", parser=number)] = 10.0,
    as_json: Json = False,
) -> None:
    """Set roofs side by side with the same chains, at 50, 90 and 99 % of time, and count the answers that change."""
    from app.compare import side_by_side, told
    from app.request import AssessRequest
    from app.roof import Roof
    from app.world import open_world

    with mendable():
        roofs = [Roof(*place(one), height) for one in at]
        world = open_world()
        requests = [AssessRequest(roof, chains=tuple(chain) if chain else None, now=now) for roof in roofs]
        document = side_by_side(requests, world.store, world.ground)
    show(document, as_json, lambda: told(document))


@readings.command("add")
def add_reading(
    at: Annotated[str, typer.Option(metavar="LAT,LON", help="Position of the roof in degrees.")],
    kind: Annotated[str, typer.Option(help="level, cn, mer, seen, count, order, neighbour or scan-list.")] = "level",
    of: Annotated[str | None, typer.Option(metavar="CHANNEL|MULTIPLEX", help="What was read.")] = None,
    value: Annotated[
        float | None, typer.Option(metavar="DB", help="Level in dB(µV), C/N or MER in dB.", parser=number)
    ] = None,
    state: Annotated[str | None, typer.Option(help="perfect, breaks up or not found.")] = None,
    file: Annotated[
        Path | None, typer.Option(metavar="FILE", help="Text of a scan list; - reads what is piped in.")
    ] = None,
    complete: Annotated[bool, typer.Option("--complete", help="The scan list is all that the set found.")] = False,
    count: Annotated[
        int | None, typer.Option(metavar="N", help="How many multiplexes are received today.", parser=whole)
    ] = None,
    chain: Annotated[str | None, typer.Option(metavar="NAME", help="Through which chain.")] = None,
    point: Annotated[str | None, typer.Option(help="Outlet, or aerial for its terminals.")] = None,
    pointing: Annotated[
        float | None, typer.Option(metavar="DEG", help="True bearing of the aerial.", parser=number)
    ] = None,
    polarisation: Annotated[str | None, typer.Option(help="horizontal or vertical.")] = None,
    height: Annotated[float | None, typer.Option(metavar="M", help="Aerial above the ground.", parser=number)] = None,
    day: Annotated[str | None, typer.Option(metavar="DATE", help="Year first: 2026-10-31.")] = None,
    instrument: Annotated[str | None, typer.Option(help="meter, analyser, stick or set.")] = None,
    spread: Annotated[
        float | None, typer.Option(metavar="DB", help="Standard deviation, if known.", parser=number)
    ] = None,
    works: Annotated[bool | None, typer.Option("--works/--fails", help="Whether a neighbour's aerial works.")] = None,
    confirmed: Annotated[bool, typer.Option("--confirmed", help="Looked at twice: counts however surprising.")] = False,
    as_json: Json = False,
) -> None:
    """Keep a reading of a roof, or all that a set's scan list says; every later answer for this roof counts it."""
    from app.kept_readings import keep, told_kept
    from app.world import open_world

    with mendable():
        where = place(at)
        said: dict[str, Any] = {
            "emission": of, "multiplex": of, "value_db": value, "state": state, "chain": chain, "point": point,
            "pointing_deg": pointing, "polarisation": polarisation, "aerial_agl_m": height, "day": day,
            "instrument": instrument, "count": count, "sd_db": spread, "works": works,
        }  # fmt: skip
        if kind == "scan-list":
            said = {key: said[key] for key in ("chain", "point", "pointing_deg", "polarisation", "day")}
            said |= {"text": _text_of(file), "complete": complete, "kind": "scan list"}
        else:
            said |= {"kind": kind, "confirmed": confirmed}
        document = keep(open_world().store, *where, {key: one for key, one in said.items() if one is not None})
    show(document, as_json, lambda: told_kept(document))


def _text_of(file: Path | None) -> str:
    if file is None:
        raise RequestError("a scan list needs --file FILE: save what the set shows as text, one channel a line")
    try:
        return sys.stdin.read() if str(file) == "-" else file.read_text("utf-8", "replace")
    except OSError as error:
        raise RequestError(f"{file} cannot be read ({error.strerror}): name a text file") from error


@readings.command("list")
def list_readings(as_json: Json = False) -> None:
    """List kept readings."""
    from app.kept_readings import reading_rows
    from app.lists import table
    from app.world import open_world

    with mendable():
        rows = reading_rows(open_world().store)
    show(rows, as_json, lambda: table(rows, "no reading is kept: `gainworth readings add`"))


@readings.command("delete")
def delete_reading(id: Annotated[str, typer.Argument(metavar="ID", help="As listed.")]) -> None:
    """Forget a reading."""
    from app.world import open_world

    with mendable():
        open_world().store.delete_reading(id)
    typer.echo(f"reading {id} is forgotten")


@readings.command("logbook")
def show_logbook(as_json: Json = False) -> None:
    """Compare every kept figure with its prediction: our own track record."""
    from app.logbook import logbook, told
    from app.world import open_world

    with mendable():
        world = open_world()
        document = logbook(world.store, world.ground)
    show(document, as_json, lambda: told(document))


if __name__ == "__main__":
    main()
