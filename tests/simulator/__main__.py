"""``python -m tests.simulator --n 1000``: the score of the diagnosis on every fault."""

from __future__ import annotations

import argparse

from tests.diagnosis.scoring import table, timing
from tests.simulator.faults import FAULTS


def main() -> None:
    """Print one line a fault, then the time of one diagnosis."""
    parser = argparse.ArgumentParser(prog="python -m tests.simulator")
    parser.add_argument("--n", type=int, default=100, help="circuits a fault")
    parser.add_argument("--fault", action="append", choices=list(FAULTS), help="only this fault; may be repeated")
    parser.add_argument("--seed", default="2026")
    parser.add_argument("--jobs", type=int, default=1, help="processes")
    given = parser.parse_args()
    for line in table(given.fault or list(FAULTS), given.n, given.seed, given.jobs):
        print(line, flush=True)
    print(timing())


main()
