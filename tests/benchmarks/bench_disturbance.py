"""Cost of interference: 300 wanted emissions, 2,000 more as interferers, 4 chains, 360 pointings.

Run `python tests/benchmarks/bench_disturbance.py`; it prints the time of `turn` with and without company.
"""

from __future__ import annotations

import time
from dataclasses import replace

import numpy as np

from app.assumptions import Assumptions
from app.chain.catalogue import demo_chains
from app.fields import EmissionField, PathFacts
from app.interferers import Interferer
from app.margins import air_of, multiplex_chances, turn
from app.roof import Roof
from app.transmitters.model import Emission, Transmitter

PATH = PathFacts("", "clear", True, 1.0, 0.0, 100.0, 0.0, 40.0, 0.0, ("bare",), 5.0)


def field(k: int, km: float, level_dbuv_m: float, rng: np.random.Generator) -> EmissionField:
    """Return an emission of an invented mast, six to a mast."""
    mast = k // 6
    where = np.random.default_rng(mast).uniform(-1, 1, 2)
    made = Emission(
        f"e{k}",
        f"m{mast}",
        f"x{k}",
        "",
        474.0 + 8 * int(rng.integers(27)),
        8,
        "DVB-T2",
        "256-QAM 2/3",
        1.0,
        "horizontal",
        100,
    )
    site = Transmitter(f"m{mast}", f"m{mast}", 44 + float(where[0]), -37 + float(where[1]), None, "bench")
    bearing = float(np.degrees(np.arctan2(where[1], where[0])) % 360)
    return EmissionField(
        made, site, km, bearing, 1.0, 90.0,
        path=PATH, p1546_dbuv_m=level_dbuv_m, p1812_dbuv_m=level_dbuv_m, used_dbuv_m=level_dbuv_m, method="p1812",
        fade_db=3.0, enhancement_db=10.0,
    )  # fmt: skip


def interferer(one: EmissionField) -> Interferer:
    """Return the same emission as it disturbs."""
    return Interferer(
        one.emission,
        one.transmitter,
        one.distance_km,
        one.bearing_deg,
        one.used_dbuv_m,
        one.enhancement_db,
        5.0,
        False,
        True,
    )


def main() -> None:
    """Time four chains without company and with it."""
    rng = np.random.default_rng(1)
    wanted = [field(k, 60.0, float(rng.uniform(30, 80)), rng) for k in range(300)]
    far = [field(k, 200.0, float(rng.uniform(-10, 35)), rng) for k in range(300, 2300)]
    roof, assumptions = Roof(44.3, -37.45), Assumptions()
    names = [one.emission.multiplex_id for one in wanted]
    spread = [replace(one, emission=replace(one.emission, frequency_mhz=50.0 + 3 * k)) for k, one in enumerate(wanted)]
    for told, ones, others in (
        ("alone", spread, []),
        ("300 among themselves", wanted, []),
        ("2,000 more", wanted, far),
    ):
        for _ in range(2):
            start = time.perf_counter()
            air = air_of(ones, [interferer(one) for one in (*ones, *others)])
            gathered = time.perf_counter()
            turned = [turn(chain, air, roof, names, assumptions) for chain in demo_chains()]
            swept = time.perf_counter()
            for one in turned:
                multiplex_chances(one, air, names)
            end = time.perf_counter()
        print(
            f"{told}: gather {gathered - start:.2f} s, 4 chains x 360 pointings {swept - gathered:.2f} s, "
            f"joint draws {end - swept:.2f} s, pairs {air.company.pairs.disturber.size}"
        )


if __name__ == "__main__":
    main()
