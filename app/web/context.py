"""What every route works with."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Annotated, ParamSpec, TypeVar

import anyio
import anyio.to_thread
from fastapi import Depends, Request

from app.fast_paths import is_ready, warm_up_in_background
from app.open_tiles import Downloads
from app.settings import Settings
from app.transmitters.store import Store
from app.world import is_demo, open_ground
from terrain.mosaic import Ground

P = ParamSpec("P")
T = TypeVar("T")


@dataclass(slots=True)
class Context:
    """Store, ground and settings of this server, and its places for computing."""

    store: Store
    ground: Ground  # put in the place of the one before when tiles have come
    settings: Settings
    downloads: Downloads = field(default_factory=Downloads)
    places: anyio.CapacityLimiter = field(init=False)

    def __post_init__(self) -> None:
        """Make as many places as questions may be computed at once; tiles and lists have threads of their own."""
        self.places = anyio.CapacityLimiter(self.settings.workers)

    def open_ground_anew(self) -> None:
        """Take up what lies in the data folder now; answers under way keep the ground they began with."""
        before, self.ground = self.ground, open_ground(is_demo(self.store))
        if is_ready(before):
            warm_up_in_background(self.ground)

    async def compute(self, function: Callable[P, T], *args: P.args, **kwargs: P.kwargs) -> T:
        """Run a long function in a thread, at most `settings.workers` at once."""
        return await anyio.to_thread.run_sync(lambda: function(*args, **kwargs), limiter=self.places)


def _context(request: Request) -> Context:
    context: Context = request.app.state.context
    return context


ContextDep = Annotated[Context, Depends(_context)]
