"""What chances, readings and verdict cost beside the computation of the fields. A report.

python tests/benchmarks/cost.py
"""

from __future__ import annotations

import os
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

sys.path.insert(0, str(Path(__file__).parents[2]))

from app.assumptions import Assumptions
from app.demo.scenario import DEMO_ROOFS
from app.fields import fields_at
from app.interferers import interferers_at
from app.margins import air_of, multiplex_chances, turn
from app.planner import assess
from app.readings import Reading
from app.request import AssessRequest
from app.roof import Roof
from app.stored_chains import stored_chain
from app.world import open_world

TIMES = 5


def best(what: Callable[[], Any]) -> float:
    """Least time of a few runs, in milliseconds."""
    spent = []
    for _ in range(TIMES):
        start = time.perf_counter()
        what()
        spent.append(1e3 * (time.perf_counter() - start))
    return min(spent)


def main() -> None:
    os.environ["GAINWORTH_DATA_DIR"] = tempfile.mkdtemp()
    world = open_world()
    roof = Roof(DEMO_ROOFS[3].latitude_deg, DEMO_ROOFS[3].longitude_deg)
    assumptions = Assumptions()
    found = world.store.emissions_within(roof.latitude_deg, roof.longitude_deg, 150)
    chains = [stored_chain(world.store, str(one["name"])) for one in world.store.list_chains()]
    fields = fields_at(roof, found, world.ground, assumptions, 99)
    air = air_of(fields, interferers_at(roof, fields, found, world.ground, assumptions, 99))
    names = sorted(set(air.multiplex_of))
    turned = [turn(chain, air, roof, names, assumptions) for chain in chains]
    request = AssessRequest(roof, now="roof-yagi")
    levels = tuple(Reading(kind="level", emission=channel, value_db=40.0) for channel in ("48", "42"))
    words = (*levels, Reading(kind="seen", multiplex="strait-1", state="breaks up"))
    fields_ms = best(lambda: fields_at(roof, found, world.ground, assumptions, 99))
    chances_ms = best(lambda: [multiplex_chances(one, air, names) for one in turned])
    plain_ms = best(lambda: assess(request, world.store, world.ground))
    read_ms = best(lambda: assess(AssessRequest(roof, now="roof-yagi", readings=words), world.store, world.ground))
    print(f"{len(found)} emissions, {len(chains)} chains, best of {TIMES}:")
    print(f"  fields {fields_ms:.0f} ms; joint chances {chances_ms:.0f} ms")
    print(f"  whole answer {plain_ms:.0f} ms; with three readings {read_ms:.0f} ms")


if __name__ == "__main__":
    main()
