"""What a large chain costs beside the rest of an answer: 40 parts, 16 outlets, 300 emissions, warm.

Run: `python tests/benchmarks/bench_chain.py`.
"""

from __future__ import annotations

import time

import numpy as np

from app.assumptions import Assumptions
from app.chain.parts import Aerial, Chain, Feeder, LaunchAmplifier, MastheadAmplifier, Outlet, Part, Receiver, Splitter
from app.link_budget import Signals, receive
from app.outlet_ledger import book_of

OUTLETS, EMISSIONS, REPEATS = 16, 300, 20


def large_chain() -> Chain:
    """Return aerial, two amplifiers, three splitters, a run to each outlet: 40 parts."""
    parts: list[Part] = [
        Aerial(id="a", name="Yagi", gain_dbd=((470, 9), (694, 13)), beamwidth_deg=35, front_to_back_db=24),
        MastheadAmplifier(id="m", name="m", gain_db=15, noise_figure_db=2, rated_output_dbuv=103),
        Feeder(id="f", name="f", cable="copper-7mm", length_m=15),
        LaunchAmplifier(id="l", name="l", gain_db=20, noise_figure_db=6, rated_output_dbuv=116),
        Splitter(id="s", name="s", ports=2),
        Splitter(id="s1", name="s1", ports=8, after=("s",)),
        Splitter(id="s2", name="s2", ports=8, after=("s",)),
    ]
    for n in range(OUTLETS):
        above = "s1" if n < OUTLETS // 2 else "s2"
        parts.append(Feeder(id=f"r{n}", name=f"run {n}", cable="copper-7mm", length_m=5 + n, after=(above,)))
        parts.append(Outlet(id=f"o{n}", name=f"Outlet {n}", loss_db=1, after=(f"r{n}",)))
    return Chain("large", (*parts, Receiver(id="r", name="set")))


def timed_ms(run: object) -> float:
    """Return the median of warm runs."""
    assert callable(run)
    run()
    spans = []
    for _ in range(REPEATS):
        began = time.perf_counter()
        run()
        spans.append(time.perf_counter() - began)
    return float(np.median(spans)) * 1000


if __name__ == "__main__":
    chain, assumptions = large_chain(), Assumptions()
    random = np.random.default_rng(5)
    signals = Signals(
        474 + 8.0 * (np.arange(EMISSIONS) % 28),
        np.full(EMISSIONS, 7.77),
        np.full(EMISSIONS, 20.1),
        np.full(EMISSIONS, 6.0),
        random.uniform(0, 360, EMISSIONS),
        ("horizontal",) * EMISSIONS,
    )
    field = random.uniform(20, 80, EMISSIONS)
    frame = (chain, signals, field)
    everywhere = np.arange(360.0)[:, None]
    once = timed_ms(lambda: receive(*frame, 0.0, "horizontal", assumptions))
    sweep = timed_ms(lambda: receive(*frame, everywhere, "horizontal", assumptions))

    def write() -> None:
        book = book_of(chain, signals, field, 0.0, "horizontal", assumptions)
        for name in chain.outlet_names:
            for index in range(EMISSIONS):
                book.steps(index, name)

    REPEATS = 3
    ledgers = timed_ms(write)
    print(f"{len(chain.parts)} parts, {OUTLETS} outlets, {EMISSIONS} emissions")
    print(f"one pointing {once:.1f} ms; 360 pointings {sweep:.0f} ms; {OUTLETS * EMISSIONS} ledgers {ledgers:.0f} ms")
