"""Names in the query of an address: what an address does not know is refused, never ignored."""

from __future__ import annotations

from fastapi import Request
from fastapi.routing import APIRoute

from app.errors import RequestError


def known_query(request: Request) -> None:
    """Refuse a name in the query that the address does not take, or takes once and was given twice.

    Raises
    ------
    RequestError
        The name, and those that the address knows.
    """
    route = request.scope.get("route")
    if not isinstance(route, APIRoute) or not route.include_in_schema:
        return  # the page itself: links to it may carry what others added
    names = [field.alias for field in route.dependant.query_params]
    given = [name for name, _ in request.query_params.multi_items()]
    allowed = ", ".join(names) or "none"
    for name in given:
        shown = name if len(name) <= 60 else f"{name[:59]}…"
        if name not in names:
            raise RequestError(f'"{shown}" is not known in this address: use {allowed}', field=shown, allowed=allowed)
        if given.count(name) > 1:
            raise RequestError(
                f'"{shown}" stands twice in this address: keep one of them', field=shown, allowed=allowed
            )
