"""Roofs, chains and priced parts as JSON documents: {"id", "name", "created", "updated", and whatever they hold}."""

from __future__ import annotations

import json
import sqlite3
import uuid
from collections.abc import Mapping
from datetime import UTC, datetime
from typing import Any, Literal, cast

from app.errors import NotStoredError, RequestError, StoreError

Document = dict[str, Any]
Kind = Literal["roof", "chain", "part"]

_SELECT = "SELECT id, name, body, created, updated FROM document"
_OURS = ("id", "name", "created", "updated")


def listed(connection: sqlite3.Connection, kind: Kind) -> list[Document]:
    """Every document of a kind, oldest first."""
    rows = connection.execute(f"{_SELECT} WHERE kind = ? ORDER BY rowid", [kind])
    return [_document(row) for row in rows]


def one(connection: sqlite3.Connection, kind: Kind, key: str) -> Document:
    """One document by id, a chain also by name; NotStoredError names what there is."""
    rows = connection.execute(
        f"{_SELECT} WHERE kind = ? AND (id = ? OR (kind = 'chain' AND name = ?)) ORDER BY id != ?",
        [kind, key, key, key],
    ).fetchall()
    if rows:
        return _document(rows[0])
    names = [row[0] for row in connection.execute("SELECT name FROM document WHERE kind = ? ORDER BY name", [kind])]
    known = ", ".join(f'"{name}"' for name in names[:12]) + (" …" if len(names) > 12 else "")
    raise NotStoredError(
        f'there is no {kind} "{key}": ' + (f"stored are {known}" if names else f"no {kind} is stored yet, add one"),
        field=kind,
        allowed=known or None,
    )


def put(connection: sqlite3.Connection, kind: Kind, document: Mapping[str, Any]) -> Document:
    """Store a document under its "id", or as a new one without.

    Raises
    ------
    RequestError
        No fit name, a chain's name taken by another chain, or contents that JSON cannot hold.
    """
    name = _name(kind, document.get("name"))
    key = str(document.get("id") or uuid.uuid4().hex[:12])
    try:
        body = {field: value for field, value in document.items() if field not in _OURS}
        text = json.dumps(body, allow_nan=False, ensure_ascii=False)
        (text + key).encode()  # half a surrogate pair has no UTF-8
    except (TypeError, ValueError) as error:
        raise RequestError(f'{kind} "{name}" cannot be stored ({error}): use JSON with finite numbers') from error
    # Chains are asked for by name, so a name means one of them.
    taken = connection.execute(
        "SELECT 1 FROM document WHERE kind = ? AND kind = 'chain' AND id != ? AND (name = ? OR id = ?)",
        [kind, key, name, name],
    ).fetchone()
    if taken:
        raise RequestError(
            f'there is a chain "{name}" already: choose another name or change that one',
            field="name",
            allowed="a name that no other chain has",
        )
    now = datetime.now(UTC).isoformat(timespec="seconds")
    connection.execute(
        "INSERT INTO document (kind, id, name, body, created, updated) VALUES (?, ?, ?, ?, ?, ?) "
        "ON CONFLICT (kind, id) DO UPDATE "
        "SET name = excluded.name, body = excluded.body, updated = excluded.updated",
        [kind, key, name, text, now, now],
    )
    return one(connection, kind, key)


def remove(connection: sqlite3.Connection, kind: Kind, key: str) -> None:
    """Remove one document; NotStoredError if there is none."""
    found = one(connection, kind, key)
    connection.execute("DELETE FROM document WHERE kind = ? AND id = ?", [kind, found["id"]])


def _document(row: tuple[Any, ...]) -> Document:
    key, name, body, created, updated = row
    held = read_body(body, f'document "{name}"', key)
    if not isinstance(held, dict) or not all(isinstance(one, str) for one in (key, name, created, updated)):
        raise damaged(f'document "{name}"', key)
    return {"id": key, "name": name, **cast(Document, held), "created": created, "updated": updated}


def read_body(body: Any, what: str, key: Any) -> object:
    """Return what a row holds as JSON; StoreError if another program damaged it."""
    try:
        return json.loads(body)
    except (ValueError, TypeError, RecursionError) as error:
        raise damaged(what, key) from error


def damaged(what: str, key: Any) -> StoreError:
    """Return the error of a row that cannot be read."""
    return StoreError(f'the stored {what} is damaged: restore a backup, or remove the row "{key}"')


def _name(kind: Kind, value: object) -> str:
    if not isinstance(value, str) or not value.strip() or len(value) > 120 or not value.isprintable():
        raise RequestError(
            f"the name of a {kind} is {value!r}: write 1 to 120 printable characters",
            field="name",
            allowed="1 to 120 printable characters",
        )
    return value.strip()
