"""Do the chances mean what they say, in worlds drawn from the model? A report.

    python tests/benchmarks/self_consistency.py [WORLDS_PER_ROOF]        default 400: 20,000 worlds over 50 roofs

Self-consistent is all that this can show: whether the chances meet real roofs, only measurements can say.
"""

from __future__ import annotations

import sys
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[2]))
sys.path.insert(0, str(Path(__file__).parent))

import numpy as np
from worlds import Read, RoofCase, Tally, consistency, earnings, level_of, low_mast, roof_case, scaled, world

from app.logbook import learnt_scale

ROOFS = 50
SEED = 20261201  # fixed before the first run
TOO_SMALL = 0.7


def told(name: str, tally: Tally) -> list[str]:
    lines = [f"{name}: 90 % intervals hold {tally.coverage():.1%}, Brier score {tally.brier():.4f}"]
    lines += [
        f"  {n:7d} chances around {p:.3f}: happened {y:.3f}, {100 * (y - p):+.1f} points, standard error {100 * s:.1f}"
        for n, p, y, s in tally.deciles()
    ]
    return lines


def surprises(cases: list[RoofCase], scale: float, seed: int) -> list[float]:
    """Differences of one level per roof from its prediction, in units of the predicted spread."""
    rng = np.random.default_rng(seed)
    z = []
    for case in cases:
        read = Read()
        level_of(read, case, world(case, rng, scale), 0, rng, {})
        site, loadings = read.sites[0], read.loadings()
        z.append(site.value_db / float(np.hypot(np.sqrt((loadings.db**2).sum()), site.sd_db)))
    return z


def main() -> None:
    worlds = int(sys.argv[1]) if len(sys.argv) > 1 else 400
    cases = [roof_case(number) for number in range(ROOFS)]
    start = time.perf_counter()
    print(f"{ROOFS * worlds} worlds over {ROOFS} roofs, seed {SEED}")
    before, after = consistency(cases, worlds, SEED)
    print("\n".join([*told("before readings", before), *told("after two levels and three words", after)]))
    print(f"  {1e3 * (time.perf_counter() - start) / (ROOFS * worlds):.1f} ms per world")

    many = [roof_case(number) for number in range(4 * ROOFS)]
    paid = earnings(many, max(10, worlds // 4), SEED + 1)
    print(f"earnings per roof over {len(many)} roofs (standard error {paid.rule_error:.2f}):")
    print(f"  the rule {paid.rule:.2f}, a reading first on {paid.measured_share:.0%} of roofs")
    print(f"  always buying {paid.always:.2f}, never {paid.never:.2f}, by median margin {paid.median_margin:.2f}")

    fewer = max(10, worlds // 10)
    wide_before, wide_after = consistency(cases, fewer, SEED + 2, scale=1 / TOO_SMALL)
    print("\n".join(told(f"spread {1 - TOO_SMALL:.0%} too small, before readings", wide_before)))
    print("\n".join(told(f"spread {1 - TOO_SMALL:.0%} too small, after readings", wide_after)))
    z = surprises(cases, 1 / TOO_SMALL, SEED + 3)
    for count in (4, 5, 10, 50):
        scale = learnt_scale(z[:count])
        words = "none" if scale is None else f"{scale:.2f}"
        print(f"  scale learnt from {count} readings: {words} (true {1 / TOO_SMALL:.2f})")
    learnt = learnt_scale(z)
    assert learnt is not None
    rng, inside = np.random.default_rng(SEED + 4), []
    for case in cases:
        half = 1.6449 * scaled(case.now, learnt).sigma_db
        inside += [np.abs(world(case, rng, 1 / TOO_SMALL).now - case.now.median_db) <= half for _ in range(fewer)]
    print(f"  with that scale 90 % intervals hold {np.mean(inside):.1%}")

    scores = low_mast(cases, fewer, SEED + 5)
    print(
        f"one transmitter 8 dB low: Brier score of its multiplexes {scores['unread']:.4f}, known {scores['told']:.4f}; "
        f"after two readings of it {scores['read']:.4f}, known {scores['told_read']:.4f}: "
        f"{scores['removed']:.0%} of the excess removed"
    )


if __name__ == "__main__":
    main()
