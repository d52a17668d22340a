"""Print the table of ratios: `python tests/benchmarks/run.py [--rounds N]`. Takes some minutes and 3 GB of memory."""

from __future__ import annotations

import argparse

import bench_assess
import bench_paths
from protocol import ROUNDS, machine

if __name__ == "__main__":
    options = argparse.ArgumentParser(description=__doc__)
    options.add_argument("--rounds", type=int, default=ROUNDS)
    rounds = options.parse_args().rounds
    print(machine())
    for row in bench_paths.table(rounds):
        print(row.told())
    print("\n".join(bench_assess.report()))
