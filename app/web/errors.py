"""Every error as `{"error": {"code", "message", "field", "allowed"}}`: one table from class to status."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from fastapi import FastAPI, Request
from fastapi.exceptions import RequestValidationError
from fastapi.responses import JSONResponse
from starlette.exceptions import HTTPException

from app.errors import (
    AppError,
    ChainError,
    ModeError,
    NotStoredError,
    ReadingError,
    RequestError,
    RoofError,
    StoreError,
    TransmitterFileError,
)
from propagation.errors import ProfileError, PropagationError, RangeError
from terrain.errors import (
    CacheError,
    CoverageError,
    DiskError,
    DownloadError,
    OfflineError,
    RasterError,
    TerrainError,
)

# From the leaves to the roots: the first class that fits answers.
STATUS: tuple[tuple[type[Exception], int, str], ...] = (
    (NotStoredError, 404, "not_stored"),
    (RoofError, 422, "roof"),
    (RequestError, 422, "request"),
    (ChainError, 422, "chain"),
    (ReadingError, 422, "reading"),
    (TransmitterFileError, 422, "transmitter_file"),
    (ModeError, 422, "mode"),
    (StoreError, 503, "store"),
    (AppError, 422, "request"),
    (CoverageError, 422, "coverage"),
    (RasterError, 422, "raster"),
    (CacheError, 503, "cache"),
    (DiskError, 507, "disk"),
    (OfflineError, 503, "offline"),
    (DownloadError, 502, "download"),
    (TerrainError, 422, "terrain"),
    (RangeError, 422, "range"),
    (ProfileError, 422, "profile"),
    (PropagationError, 422, "propagation"),
)

PLAIN_HTTP = {
    404: ("not_found", "there is nothing at {path}: the addresses are listed at /docs"),
    405: ("method", "{path} does not answer {method}: what it answers is listed at /docs"),
    400: ("json", "the request is not JSON that can be read: send an object such as {{}} in UTF-8"),
}

# What a pydantic error type means to the person who sent the value.
WANTED = {
    "float_type": "a number, not in quotes",
    "float_parsing": "a number",
    "int_type": "a whole number, not in quotes",
    "int_parsing": "a whole number",
    "int_from_float": "a whole number",
    "finite_number": "a finite number",
    "string_type": "text in quotes",
    "string_unicode": "text in UTF-8",
    "bool_type": "true or false",
    "list_type": "a list",
    "dict_type": "an object",
    "model_type": "an object",
    "model_attributes_type": "an object",
}


def error_response(
    status: int, code: str, message: str, field: str | None = None, allowed: str | None = None
) -> JSONResponse:
    """Return one error in the one shape that all errors have."""
    error = {"code": code, "message": message, "field": field, "allowed": allowed}
    clean = {key: value and value.encode("utf-8", "replace").decode() for key, value in error.items()}
    return JSONResponse({"error": clean}, status_code=status)


def add_error_handlers(app: FastAPI) -> None:
    """Let the application answer every known error from the tables above."""

    async def ours(request: Request, error: Exception) -> JSONResponse:
        status, code = next((status, code) for kind, status, code in STATUS if isinstance(error, kind))
        message = str(getattr(error, "message", error))
        return error_response(status, code, message, getattr(error, "field", None), getattr(error, "allowed", None))

    async def http(request: Request, error: Exception) -> JSONResponse:
        assert isinstance(error, HTTPException)
        code, words = PLAIN_HTTP.get(error.status_code, ("http", "the request cannot be answered: {detail}"))
        path = request.url.path
        message = words.format(
            path=path if len(path) <= 200 else f"{path[:199]}…", method=request.method, detail=error.detail
        )
        if error.status_code == 404 and path.endswith("/"):
            message = f"{message}; it may be meant without the slash at its end"
        response = error_response(error.status_code, code, message)
        response.headers.update(error.headers or {})
        return response

    async def invalid(request: Request, error: Exception) -> JSONResponse:
        assert isinstance(error, RequestValidationError)
        return error_response(422, "request", *plain_words(error.errors()))

    for root in (AppError, TerrainError, PropagationError):
        app.add_exception_handler(root, ours)
    app.add_exception_handler(HTTPException, http)
    app.add_exception_handler(RequestValidationError, invalid)


def plain_words(errors: Sequence[Mapping[str, Any]]) -> tuple[str, str | None, str | None]:
    """Return message, field and allowed values for what pydantic found, told by its first finding."""
    first = errors[0]
    context = first.get("ctx") or {}
    kind = str(first["type"])
    place = list(first["loc"][1:])  # without "body", "query" or "path"
    if kind == "json_invalid":
        return PLAIN_HTTP[400][1].format(), None, "JSON"
    if kind == "unknown_field":
        place.append(str(context["name"]))
        allowed = str(context["allowed"])
        field = _field(place)
        return f'"{field}" is not known here: use {allowed}', field, allowed
    field = _field(place)
    if kind == "missing":
        return f"{field or 'the request'} is missing: it is needed here", field or None, None
    allowed = _allowed(kind, context, errors)
    return f"{field or 'the request'} is {_shown(first.get('input'))}: use {allowed}", field or None, allowed


def _allowed(kind: str, context: Mapping[str, Any], errors: Sequence[Mapping[str, Any]]) -> str:
    if kind == "literal_error":
        return str(context["expected"]).replace("'", "").replace("True", "true")
    bounds = {"greater_than_equal": "ge", "less_than_equal": "le", "greater_than": "gt", "less_than": "lt"}
    words = {"ge": "at least", "le": "at most", "gt": "more than", "lt": "less than"}
    if kind in bounds:
        return f"{words[bounds[kind]]} {context[bounds[kind]]:g}"
    if kind in ("string_too_short", "too_short"):
        return f"at least {context['min_length']} of them" if kind == "too_short" else "text that is not empty"
    if kind in ("string_too_long", "too_long"):
        return f"at most {context['max_length']}" + (" characters" if kind == "string_too_long" else " of them")
    if kind == "plain_value":
        return str(context["allowed"])
    if kind.startswith("date_"):
        return "a date, year first, such as 2026-10-31"
    if kind.startswith("int_"):  # also one of more digits than a machine's whole number
        return "a whole number"
    options = [
        WANTED[str(one["type"])] for one in errors if one["loc"][1:2] == errors[0]["loc"][1:2] and one["type"] in WANTED
    ]
    return " or ".join(dict.fromkeys(options)) or "another value; /docs shows what is possible"


def _field(place: Sequence[str | int]) -> str:
    """Write a place as in JSON, `roof.latitude_deg`, without pydantic's names for the members of a union."""
    return ".".join(str(part) for part in place if not (part in ("str", "constrained-str") or "[" in str(part)))


def _shown(value: object) -> str:
    if value is None:
        return "null"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, dict):
        return "an object"
    if isinstance(value, list):
        return "a list"
    text = f'"{value}"' if isinstance(value, str) else f"{value}"
    return text if len(text) <= 60 else f"{text[:57]}…"
