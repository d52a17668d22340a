"""The question put to the planner, checked."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Literal

from app.chain.parts import Chain
from app.errors import RequestError
from app.readings import Reading
from app.roof import Roof

Method = Literal["p1812", "p1546", "both"]
METHODS: tuple[Method, ...] = ("p1812", "p1546", "both")
AVAILABILITIES = (50, 90, 99)
NOTHING = "nothing"  # said of what is up now: there is no aerial
LONGEST_REACH_KM = 500.0


@dataclass(frozen=True, slots=True)
class AssessRequest:
    """One roof, the chains to compare and what is asked of them; all but the roof has a default."""

    roof: Roof
    chains: tuple[str | Chain, ...] | None = None  # names in the store or chains; None: all stored
    now: str | None = None  # a chain's name, "nothing", or None: not said
    wanted: tuple[str, ...] | None = None  # multiplex ids; None: those that differ
    worth_per_multiplex: float | None = None  # in the chains' currency
    reading_cost: float | None = None
    availability_percent: int = 99
    reach_km: float = 150.0
    method: Method = "both"
    readings: tuple[Reading, ...] = ()  # beside those stored for this roof
    stored_readings: bool = True  # whether those count too
    assumptions: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    ledgers: frozenset[str] | None = None  # emissions whose ledgers are wanted; None: all

    def __post_init__(self) -> None:
        """Refuse what cannot be answered, saying what can."""
        if not (math.isfinite(self.reach_km) and 1 <= self.reach_km <= LONGEST_REACH_KM):
            raise RequestError(
                f"reach {self.reach_km:g} km is not possible: use 1 to {LONGEST_REACH_KM:g} km",
                field="reach_km",
                allowed=f"1 to {LONGEST_REACH_KM:g}",
            )
        _one_of("availability_percent", self.availability_percent, AVAILABILITIES)
        _one_of("method", self.method, METHODS)
        for name in ("worth_per_multiplex", "reading_cost"):
            value = getattr(self, name)
            if value is not None and not (math.isfinite(value) and 0 <= value <= 1e6):
                raise RequestError(
                    f"{name} {value:g} is not possible: use 0 to 1000000 in the chains' currency",
                    field=name,
                    allowed="0 to 1000000",
                )
        if self.wanted is not None and not self.wanted:
            raise RequestError(
                "no multiplex is wanted: name at least one, or leave the wish out to compare all that differ",
                field="wanted",
                allowed="one or more multiplex ids",
            )

    @property
    def stated_values(self) -> dict[str, float]:
        """Assumptions that the request states by a field of their own."""
        stated = {"worth_per_multiplex": self.worth_per_multiplex, "reading_cost": self.reading_cost}
        return {key: value for key, value in stated.items() if value is not None}


def _one_of(name: str, value: object, allowed: tuple[object, ...]) -> None:
    if value not in allowed:
        words = ", ".join(str(one) for one in allowed)
        raise RequestError(f"{name} {value} is not known: use {words}", field=name, allowed=words)
