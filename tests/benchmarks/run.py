"""Print the table of ratios: `run.py [--rounds N] [--rooftop]`. Takes some minutes and 3 GB of memory."""

from __future__ import annotations

import argparse

import bench_assess
import bench_cover
import bench_paths
from protocol import ROUNDS, machine

if __name__ == "__main__":
    options = argparse.ArgumentParser(description=__doc__)
    options.add_argument("--rounds", type=int, default=ROUNDS)
    options.add_argument("--rooftop", action="store_true", help="without the million paths")
    chosen = options.parse_args()
    print(machine())
    for row in bench_paths.table(chosen.rounds, not chosen.rooftop):
        print(row.told())
    for row in bench_cover.table(chosen.rounds):
        print(row.told())
    print("\n".join(bench_assess.report()))
