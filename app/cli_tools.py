"""What all commands share: mendable errors, JSON or text, pairs of numbers, positions."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Annotated, Any

import typer

from app.errors import AppError, RequestError
from propagation.errors import PropagationError
from terrain.errors import TerrainError

Json = Annotated[bool, typer.Option("--json", help="Print one JSON document instead of text.")]
MENDABLE = 2


@contextmanager
def mendable() -> Iterator[None]:
    """Print what the user can mend as one line and leave with 2."""
    try:
        yield
    except (AppError, TerrainError, PropagationError) as error:
        typer.echo(str(error), err=True)
        raise typer.Exit(MENDABLE) from error


def show(document: Any, as_json: bool, text: Callable[[], str]) -> None:
    """Print a document as JSON, or as the text that a function makes of it."""
    typer.echo(json.dumps(document, ensure_ascii=False, indent=1) if as_json else text().rstrip("\n"))


def pair(text: str, what: str, example: str) -> tuple[float, float]:
    """Two numbers with a comma between them."""
    try:
        first, second = (float(part) for part in text.split(","))
    except ValueError:
        raise RequestError(f'{what} is "{text}": write two numbers with a comma, such as {example}') from None
    return first, second


def place(text: str) -> tuple[float, float]:
    """A position in any usual writing; what looks swapped is asked on the way."""
    from app.position import parse_position

    position = parse_position(text)
    if position.question is not None:
        typer.echo(f"Caution: {position.question}", err=True)
    return position.latitude_deg, position.longitude_deg
