"""A chain as a document, in the shape of JSON and TOML, and back.

    name = "roof"                       # needed; short, as the command line uses it
    title = "Roof aerial"               # for people
    currency = "EUR"
    labour_price = 20                   # left out: not known
    visit_price = 0
    already_up = false
    pointing_deg = 118                  # left out: looked for
    polarisation = "horizontal"         # left out: looked for
    deciding_outlet = "Living room"     # left out: every outlet counts
    [[parts]]
    kind = "aerial"
    id = "roof-aerial"
    gain_dbd = [[470, 6], [694, 10]]    # pairs of MHz and dBd
    …
    [[parts]]
    kind = "feeder"
    after = "roof-aerial"               # left out: fed by the part before; a list at a combiner or switch
    …

A value that is not known is left out (TOML) or null (JSON).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import MISSING, fields
from typing import Any

from app.chain.parts import (
    AERIAL_POLARISATIONS,
    Aerial,
    Attenuator,
    Chain,
    Combiner,
    Equaliser,
    Feeder,
    Filter,
    FlyLead,
    LaunchAmplifier,
    MastheadAmplifier,
    MastTube,
    Outlet,
    Part,
    PowerInserter,
    Receiver,
    Splitter,
    Switch,
    Tap,
)
from app.chain.pattern import Cut, checked_cut
from app.errors import ChainError

KINDS: dict[str, type[Part]] = {
    kind.kind: kind
    for kind in (
        Aerial,
        Filter,
        MastheadAmplifier,
        Feeder,
        PowerInserter,
        LaunchAmplifier,
        Attenuator,
        Equaliser,
        Combiner,
        Switch,
        Splitter,
        Tap,
        Outlet,
        FlyLead,
        Receiver,
        MastTube,
    )
}
CHAIN_KEYS = tuple(field.name for field in fields(Chain) if field.init)
ALWAYS_WRITTEN = ("price", "pattern", "place", "measured")  # even if they are as usual


def chain_from_document(document: object) -> Chain:
    """Chain described by a document.

    Raises
    ------
    ChainError
        The chain, the part, what came, what is allowed and what to do; `field` is the place in the document.
    """
    if not isinstance(document, Mapping):
        raise ChainError(f"a chain is a table of keys and values, not {_came(document)}: give at least name and parts")
    what = f'chain "{document.get("title") or document.get("name") or ""}"'
    try:
        return _chain(document, what)
    except ChainError as error:
        message = error.message if error.message.startswith('chain "') else f"{what}: {error.message}"
        raise ChainError(message, field=_place(document, error), allowed=error.allowed, part=error.part) from error


def _chain(document: Mapping[Any, Any], what: str) -> Chain:
    _known_keys(document, CHAIN_KEYS, what, "")
    values = _values(Chain, document, what, "", skip=("parts",))
    parts = document.get("parts")
    if not isinstance(parts, list | tuple):
        raise ChainError(f"{what}: parts is {_came(parts)}: give a list of parts, the aerial first", field="parts")
    read = tuple(_part(part, index) for index, part in enumerate(parts))
    return Chain(parts=read, **values)


def _place(document: Mapping[Any, Any], error: ChainError) -> str | None:
    """Place in the document of what an error is about, also where the parts did not go together."""
    if error.part is None or not error.field or "[" in error.field:
        return error.field
    ids = [part.get("id") for part in document["parts"]]
    return f"parts[{ids.index(error.part)}].{error.field}" if error.part in ids else error.field


def chain_to_document(chain: Chain) -> dict[str, Any]:
    """Return the document of a chain; what is not known is left out, so that TOML can carry it."""
    frame = {key: getattr(chain, key) for key in CHAIN_KEYS if key != "parts"}
    if not chain.deciding_outlet:
        del frame["deciding_outlet"]
    return {**_without_none(frame), "parts": [part_to_document(part) for part in chain.parts]}


def part_from_document(document: object) -> Part:
    """Part described by a document outside a chain, as the list of parts with prices holds it.

    Raises
    ------
    ChainError
        What came, what is allowed and what to do.
    """
    return _part(document, 0)


def part_to_document(part: Part) -> dict[str, Any]:
    """Return the document of a part; what is as usual or not known is left out."""
    values: dict[str, Any] = {}
    for field in fields(part):
        value = getattr(part, field.name)
        if value == field.default and field.name not in ALWAYS_WRITTEN:
            continue
        if field.name == "after":
            values["after"] = value[0] if len(value) == 1 else list(value)
        elif field.name == "cuts":
            values["cuts"] = [cut_to_document(cut) for cut in value]
        elif isinstance(value, tuple):
            values[field.name] = [list(pair) for pair in value]
        else:
            values[field.name] = value
    return {"kind": part.kind, **_without_none(values)}


def cut_to_document(cut: Cut) -> dict[str, Any]:
    """Return the document of one cut of a measured pattern."""
    points = [list(pair) for pair in zip(cut.angle_deg, cut.loss_db, strict=True)]
    known = {key: getattr(cut, key) for key in ("frequency_mhz", "polarisation", "emission")}
    return {**_without_none(known), "points": points}


def _cuts(value: object, what: str, place: str) -> tuple[Cut, ...]:
    """Cuts of a measured pattern: tables with points and, where they hold for one only, frequency and polarisation."""
    cuts = []
    for number, one in enumerate(value if isinstance(value, list | tuple) else (value,)):
        here = f"{place}[{number}]"
        if not isinstance(one, Mapping):
            raise ChainError(f"{what} holds {_came(one)}: use tables with points = [[degrees, loss_db], …]", field=here)
        _known_keys(one, ("points", "frequency_mhz", "polarisation", "emission"), what, f"{here}.")
        points = _pairs(one.get("points"), f"{what}: points", f"{here}.points")
        frequency = one.get("frequency_mhz")
        planes = [one.get(key) for key in ("polarisation", "emission")]
        for plane in planes:
            if plane not in (None, *AERIAL_POLARISATIONS):
                listed = ", ".join(AERIAL_POLARISATIONS)
                raise ChainError(f"{what}: {_came(plane)} is no polarisation: use {listed}", field=here, allowed=listed)
        cuts.append(
            checked_cut(
                what,
                [pair[0] for pair in points],
                [pair[1] for pair in points],
                frequency_mhz=None if frequency is None else _read("float", frequency, what, f"{here}.frequency_mhz"),
                polarisation=planes[0],
                emission=planes[1],
            )
        )
    return tuple(cuts)


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
        place = f"{place}.{error.field}"
        raise ChainError(error.message, field=place, allowed=error.allowed, part=error.part) from error


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
        if field.name in skip or not field.init:
            continue
        value = document.get(field.name)
        if value is not None:
            values[field.name] = _read(str(field.type), value, f"{what}: {field.name}", f"{place}{field.name}")
        elif field.default is MISSING:
            raise ChainError(f"{what}: {field.name} is missing: add it", field=f"{place}{field.name}")
    return values


def _read(wanted: str, value: object, what: str, place: str) -> Any:
    """Value as a field of that annotated type takes it."""
    if wanted == "tuple[Cut, ...]":
        return _cuts(value, what, place)
    if wanted == "tuple[str, ...]":
        return _ids(value, what, place)
    if wanted.startswith(("tuple", "Table")):
        return _pairs(value, what, place)
    if wanted.startswith("float") and (_is_whole(value) or isinstance(value, float)):
        return float(value)  # type: ignore[arg-type]  # a number, as just asked
    if wanted == "int" and _is_whole(value):
        return value
    if wanted == "bool" and isinstance(value, bool):
        return value
    if not wanted.startswith(("float", "int", "bool")) and isinstance(value, str):
        return value
    allowed = {"float": "a number", "int": "a whole number", "bool": "true or false"}.get(wanted.split(" ")[0], "text")
    raise ChainError(f"{what} is {_came(value)}: use {allowed}", field=place, allowed=allowed)


def _is_whole(value: object) -> bool:
    """Whether it is a whole number that a file can mean: TOML and JSON write longer ones, too."""
    return isinstance(value, int) and not isinstance(value, bool) and value.bit_length() < 64


def _ids(value: object, what: str, place: str) -> tuple[str, ...]:
    ids = (value,) if isinstance(value, str) else value
    if not isinstance(ids, list | tuple) or not all(isinstance(one, str) for one in ids):
        raise ChainError(f"{what} is {_came(value)}: use the id of a part, or a list of ids", field=place)
    return tuple(ids)


def _pairs(value: object, what: str, place: str) -> tuple[tuple[float, float], ...]:
    pairs: list[tuple[float, float]] = []
    for pair in value if isinstance(value, list | tuple) else (value,):
        if not (isinstance(pair, list | tuple) and len(pair) == 2):
            raise ChainError(
                f"{what} holds {_came(pair)}: use a list of pairs such as [[470, 6], [694, 10]]",
                field=place,
            )
        pairs.append((_read("float", pair[0], what, place), _read("float", pair[1], what, place)))
    return tuple(pairs)


def _came(value: object) -> str:
    return "missing" if value is None else f'"{value}"' if isinstance(value, str) else f"{value!r}"[:60]
