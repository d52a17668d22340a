"""A chain as a document, in the shape of JSON and TOML, and back.

    name = "roof"                       # needed; short, as the command line uses it
    title = "Roof aerial"               # for people
    currency = "EUR"
    labour_price = 20                   # left out: not known
    visit_price = 0
    already_up = false
    pointing_deg = 118                  # left out: looked for
    polarisation = "horizontal"         # left out: looked for
    [[parts]]
    kind = "aerial"
    id = "roof-aerial"
    gain_dbd = [[470, 6], [694, 10]]    # pairs of MHz and dBd
    …

A value that is not known is left out (TOML) or null (JSON).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import MISSING, fields
from typing import Any

from app.chain.parts import Aerial, Chain, Feeder, MastheadAmplifier, Outlet, Part, Receiver, Splitter
from app.errors import ChainError

KINDS: dict[str, type[Part]] = {
    kind.kind: kind for kind in (Aerial, MastheadAmplifier, Feeder, Splitter, Outlet, Receiver)
}
CHAIN_KEYS = tuple(field.name for field in fields(Chain))


def chain_from_document(document: object) -> Chain:
    """Chain described by a document.

    Raises
    ------
    ChainError
        The part, what came, what is allowed and what to do; `field` is the place in the document.
    """
    if not isinstance(document, Mapping):
        raise ChainError(f"a chain is a table of keys and values, not {_came(document)}: give at least name and parts")
    what = f'chain "{document.get("name") or ""}"'
    _known_keys(document, CHAIN_KEYS, what, "")
    values = _values(Chain, document, what, "", skip=("parts",))
    parts = document.get("parts")
    if not isinstance(parts, list | tuple):
        raise ChainError(f"{what}: parts is {_came(parts)}: give a list of parts, the aerial first", field="parts")
    read = tuple(_part(part, index) for index, part in enumerate(parts))
    return Chain(parts=read, **values)


def chain_to_document(chain: Chain) -> dict[str, Any]:
    """Return the document of a chain; what is not known is left out, so that TOML can carry it."""
    frame = {key: getattr(chain, key) for key in CHAIN_KEYS if key != "parts"}
    return {**_without_none(frame), "parts": [_part_document(part) for part in chain.parts]}


def _part_document(part: Part) -> dict[str, Any]:
    values = {field.name: getattr(part, field.name) for field in fields(part)}
    if isinstance(part, Aerial):
        values["gain_dbd"] = [list(pair) for pair in part.gain_dbd]
    return {"kind": part.kind, **_without_none(values)}


def _without_none(values: Mapping[str, Any]) -> dict[str, Any]:
    return {key: value for key, value in values.items() if value is not None}


def _part(document: object, index: int) -> Part:
    place = f"parts[{index}]"
    if not isinstance(document, Mapping):
        raise ChainError(
            f"part {index + 1} of the chain is {_came(document)}: give a table with kind, id, name and price",
            field=place,
        )
    label = document.get("name") or document.get("id") or index + 1
    kind = KINDS.get(str(document.get("kind")))
    if kind is None:
        listed = ", ".join(KINDS)
        raise ChainError(
            f'part "{label}" is of kind "{document.get("kind", "")}": use one of {listed}',
            field=f"{place}.kind",
            allowed=listed,
        )
    what = f'{kind.kind} "{label}"'
    _known_keys(document, ("kind", *(field.name for field in fields(kind))), what, f"{place}.")
    values = _values(kind, document, what, f"{place}.")
    try:
        return kind(**values)
    except ChainError as error:
        raise ChainError(error.message, field=f"{place}.{error.field}", allowed=error.allowed) from error


def _known_keys(document: Mapping[Any, Any], allowed: Sequence[str], what: str, place: str) -> None:
    for key in document:
        if key not in allowed:
            listed = ", ".join(allowed)
            raise ChainError(f'{what}: "{key}" is not a key of it: use {listed}', field=f"{place}{key}", allowed=listed)


def _values(
    kind: type[Part] | type[Chain],
    document: Mapping[Any, Any],
    what: str,
    place: str,
    skip: Sequence[str] = (),
) -> dict[str, Any]:
    values: dict[str, Any] = {}
    for field in fields(kind):
        if field.name in skip:
            continue
        value = document.get(field.name)
        if value is not None:
            values[field.name] = _read(str(field.type), value, f"{what}: {field.name}", f"{place}{field.name}")
        elif field.default is MISSING:
            raise ChainError(f"{what}: {field.name} is missing: add it", field=f"{place}{field.name}")
    return values


def _read(wanted: str, value: object, what: str, place: str) -> Any:
    """Value as a field of that annotated type takes it."""
    if wanted.startswith("tuple"):
        return _pairs(value, what, place)
    if wanted.startswith("float") and isinstance(value, int | float) and not isinstance(value, bool):
        return float(value)
    if wanted == "int" and isinstance(value, int) and not isinstance(value, bool):
        return value
    if wanted == "bool" and isinstance(value, bool):
        return value
    if not wanted.startswith(("float", "int", "bool")) and isinstance(value, str):
        return value
    allowed = {"float": "a number", "int": "a whole number", "bool": "true or false"}.get(wanted.split(" ")[0], "text")
    raise ChainError(f"{what} is {_came(value)}: use {allowed}", field=place, allowed=allowed)


def _pairs(value: object, what: str, place: str) -> tuple[tuple[float, float], ...]:
    pairs: list[tuple[float, float]] = []
    for pair in value if isinstance(value, list | tuple) else (value,):
        if not (isinstance(pair, list | tuple) and len(pair) == 2):
            raise ChainError(
                f"{what} holds {_came(pair)}: use a list of pairs such as [[470, 6], [694, 10]], MHz and dBd",
                field=place,
            )
        pairs.append((_read("float", pair[0], what, place), _read("float", pair[1], what, place)))
    return tuple(pairs)


def _came(value: object) -> str:
    return "missing" if value is None else f'"{value}"' if isinstance(value, str) else f"{value!r}"[:60]
