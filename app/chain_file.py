"""Chains and parts with prices as one TOML file, out of the store and into it.

[[chains]]
name = "roof"
…
[[chains.parts]]
kind = "aerial"
…
[[parts]]             # for sale: what `cheapest` chooses from, and prices of parts that chains leave out
kind = "feeder"
id = "downlead-20"
price = 14
…
"""

from __future__ import annotations

import tomllib
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import tomli_w

from app.chain.document import (
    CHAIN_KEYS,
    chain_from_document,
    chain_to_document,
    cut_to_document,
    part_from_document,
    part_to_document,
)
from app.chain.files import content_of, text_of
from app.chain.parts import Chain, Part
from app.chain.pattern import MeasuredPattern
from app.errors import ChainError
from app.transmitters.store import Store

MOST_FRONT_TO_BACK_DB = 60.0  # that an aerial may state
ADDED_BY_STORE = ("created", "updated")


@dataclass(frozen=True, slots=True)
class Imported:
    """What a file brought."""

    added: tuple[str, ...]  # names of chains
    changed: tuple[str, ...]
    parts: tuple[str, ...]  # ids
    dry_run: bool

    def document(self) -> dict[str, Any]:
        """Return the same for `--json`."""
        return {
            "added": list(self.added),
            "changed": list(self.changed),
            "parts": list(self.parts),
            "dry_run": self.dry_run,
        }

    def text(self) -> str:
        """Return the same in lines."""
        would = "would be " if self.dry_run else ""
        lines = [
            f"chains {would}added: {', '.join(self.added) or 'none'}",
            f"chains {would}changed: {', '.join(self.changed) or 'none'}",
            f"parts {would}stored: {len(self.parts)}",
        ]
        return "\n".join(lines)


def stored_parts(store: Store) -> tuple[Part, ...]:
    """Every stored part with its price."""
    return tuple(part_from_document(_without(one, ADDED_BY_STORE)) for one in store.list_parts())


def export_text(store: Store, names: Sequence[str] | None = None) -> str:
    """TOML of the stored chains, or of those named, and of the stored parts if none is named.

    Raises
    ------
    NotStoredError
        A name that the store does not hold.
    """
    found = store.list_chains() if not names else [store.get_chain(name) for name in names]
    chains = [chain_to_document(chain_from_document(_chain_keys(one))) for one in found]
    parts = [] if names else [part_to_document(part) for part in stored_parts(store)]
    document = {key: rows for key, rows in (("chains", chains), ("parts", parts)) if rows}
    return tomli_w.dumps(document)


def chain_text(chain: Mapping[str, Any]) -> str:
    """TOML of one chain's document, to edit and import."""
    return tomli_w.dumps({"chains": [dict(chain)]})


def pattern_document(pattern: MeasuredPattern) -> dict[str, Any]:
    """Measured pattern as the keys of an aerial: pattern, cuts, what they say in figures, the gain if its file does."""
    own = [cut for cut in pattern.cuts if not cut.is_cross]
    document: dict[str, Any] = {
        "pattern": "measured",
        "beamwidth_deg": round(max(cut.beamwidth_deg for cut in own), 1),
        "front_to_back_db": min(min(cut.back_db for cut in own), MOST_FRONT_TO_BACK_DB),
        "cuts": [cut_to_document(cut) for cut in pattern.cuts],
    }
    if pattern.gain_dbd:
        document["gain_dbd"] = [list(pair) for pair in pattern.gain_dbd]
    return document


def pattern_text(document: Mapping[str, Any]) -> str:
    """TOML of a pattern's document, to copy into an aerial."""
    return tomli_w.dumps(document)


def write_file(path: Path, text: str) -> None:
    """Write a file; ChainError says why it cannot be."""
    try:
        path.write_text(text, encoding="utf-8")
    except OSError as error:
        raise ChainError(
            f"{path}: cannot be written ({error.strerror}): choose another file or folder", field="out"
        ) from error


def import_file(path: Path, store: Store, dry_run: bool = False) -> Imported:
    """Store chains and parts of one TOML file: all of them, or none if one is not possible.

    A chain whose name is stored already takes its place.

    Raises
    ------
    ChainError
        No such file, too large, no TOML, or a chain or part that is not possible; it and the mend are named.
    """
    return import_text(path.name, text_of(path.name, content_of(path, "file"), "file"), store, dry_run)


def import_text(name: str, text: str, store: Store, dry_run: bool = False) -> Imported:
    """Do the same for the text of a file."""
    chains, parts = read_text(name, text)
    known = {str(one["name"]): str(one["id"]) for one in store.list_chains()}
    documents = [{"id": known.get(chain.name, chain.name), **chain_to_document(chain)} for chain in chains]
    if not dry_run:
        store.put_chains_and_parts(documents, [part_to_document(part) for part in parts])
    names = [chain.name for chain in chains]
    return Imported(
        tuple(one for one in names if one not in known),
        tuple(one for one in names if one in known),
        tuple(part.id for part in parts),
        dry_run,
    )


def read_text(name: str, text: str) -> tuple[list[Chain], list[Part]]:
    """Chains and parts of a TOML text; `name` is what errors call it."""
    try:
        document = tomllib.loads(text)
    except (ValueError, RecursionError) as error:  # also numbers and nesting that no parser takes
        raise ChainError(
            f"{name}: is no TOML ({error}): mend that line, or begin with `gainworth chains export`", field="file"
        ) from error
    if "parts" in document and "name" in document and "chains" not in document:
        document = {"chains": [document]}  # one chain alone, as the API writes it
    unknown = [key for key in document if key not in ("chains", "parts")]
    if unknown or not document:
        came = f'holds "{unknown[0]}"' if unknown else "holds nothing"
        raise ChainError(f"{name}: {came}: use [[chains]] and [[parts]]", field="file", allowed="chains, parts")
    chains = [
        _named(name, "chains", i, chain_from_document, one) for i, one in enumerate(_rows(name, document, "chains"))
    ]
    parts = [_named(name, "parts", i, part_from_document, one) for i, one in enumerate(_rows(name, document, "parts"))]
    for what, keys in (("chain", [one.name for one in chains]), ("part", [one.id for one in parts])):
        twice = next((key for key in keys if keys.count(key) > 1), None)
        if twice is not None:
            raise ChainError(f'{name}: {what} "{twice}" comes twice: give each its own name', field="file")
    return chains, parts


def _rows(name: str, document: Mapping[str, Any], key: str) -> list[Any]:
    rows = document.get(key, [])
    if not isinstance(rows, list):
        raise ChainError(f"{name}: {key} is no list of tables: write [[{key}]] above each", field=key)
    return rows


def _named(name: str, key: str, index: int, read: Any, row: Any) -> Any:
    try:
        return read(row)
    except ChainError as error:
        place = f"{key}[{index}]" if error.field is None else f"{key}[{index}].{error.field}"
        raise ChainError(f"{name}: {error.message}", field=place, allowed=error.allowed) from error


def _chain_keys(document: Mapping[str, Any]) -> dict[str, Any]:
    return {key: value for key, value in document.items() if key in CHAIN_KEYS}


def _without(document: Mapping[str, Any], keys: Sequence[str]) -> dict[str, Any]:
    return {key: value for key, value in document.items() if key not in keys}
