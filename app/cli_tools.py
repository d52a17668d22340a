"""What all commands share: mendable errors, JSON or text, pairs of numbers, positions."""

from __future__ import annotations

import json
import re
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Annotated, Any

import typer

from app.errors import AppError, RequestError
from propagation.errors import PropagationError
from terrain.errors import TerrainError

Json = Annotated[bool, typer.Option("--json", help="Print one JSON document instead of text.")]
MENDABLE = 2
NUMBER = r"[+-]?([0-9]{1,15}(\.[0-9]*)?|\.[0-9]+)([eE][+-]?[0-9]{1,2})?"


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


def number(text: str | float) -> float:
    """Read the value of an option as a number; a default is one already."""
    if isinstance(text, (int, float)):
        return float(text)
    if not re.fullmatch(NUMBER, text.strip()):
        comma = (
            f"; with a point, {text.replace(',', '.')}" if re.fullmatch(NUMBER, text.strip().replace(",", ".")) else ""
        )
        raise typer.BadParameter(f'"{_short(text)}" is not a number: write one such as 10 or 2.5{comma}')
    return float(text)


def whole(text: str | int) -> int:
    """Read the value of an option as a whole number; a default is one already."""
    if isinstance(text, int):
        return text
    if not re.fullmatch(r"[+-]?\d{1,15}", text.strip(), re.ASCII):
        raise typer.BadParameter(f'"{_short(text)}" is not a whole number: write one such as 4')
    return int(text)


def _short(text: str) -> str:
    return text if len(text) <= 60 else f"{text[:59]}…"


def pair(text: str, what: str, example: str) -> tuple[float, float]:
    """Two numbers with a comma between them."""
    parts = [part.strip() for part in text.split(",")]
    if len(parts) != 2 or not all(re.fullmatch(NUMBER, part) for part in parts):
        raise RequestError(f'{what} is "{_short(text)}": write two numbers with a comma, such as {example}')
    return float(parts[0]), float(parts[1])


def place(text: str) -> tuple[float, float]:
    """A position in any usual writing; what looks swapped is asked on the way."""
    from app.position import parse_position

    position = parse_position(text)
    if position.question is not None:
        typer.echo(f"Caution: {position.question}", err=True)
    return position.latitude_deg, position.longitude_deg
