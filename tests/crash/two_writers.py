"""Two processes at one job: whoever is second is told, and nothing that was accepted is lost.

python -m tests.crash.two_writers --seconds 30
"""

from __future__ import annotations

import argparse
import json
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from fieldtool.jobfile.opening import read_job
from fieldtool.visit import Visit
from tests.jobs import empty_ring


def work(path: Path, mark: str, seconds: float) -> None:
    """Open, enter a few readings if the job can be written, close, again and again; print what was accepted.

    ``mark`` is the digit that tells this process's readings from the other's.
    """
    accepted: list[str] = []
    told, number, end = 0, 0, time.monotonic() + seconds
    while time.monotonic() < end:
        visit = Visit.open(path)
        if visit.read_only:
            assert visit.notes, "a second opener has to be told"
            told += 1
            visit.follow()
            time.sleep(0.01)
        else:
            for _ in range(4):
                number += 1
                raw = f"0.{mark}{number:04}"
                point = visit.job.points[number % len(visit.job.points)]
                if visit.enter((point.circuit, point.id, "ln_cross", "as_found"), raw).accepted:
                    assert not visit.save_problem
                    accepted.append(raw)
        visit.close()
        if not visit.read_only:
            # The other one gets its turn.
            time.sleep(0.03)
    print(json.dumps({"accepted": accepted, "told": told}))


def both(path: Path, seconds: float) -> tuple[int, int, int]:
    """Run two of them at once; how many entries were accepted, how many are lost, how often one was told."""
    command = [sys.executable, "-m", "tests.crash.two_writers", "--at", str(path), "--seconds", str(seconds), "--mark"]
    running = [subprocess.Popen([*command, mark], stdout=subprocess.PIPE, text=True) for mark in "12"]
    said = [json.loads(process.communicate()[0]) for process in running]
    kept = {reading.raw for reading in read_job(path).readings}
    accepted = [entry for one in said for entry in one["accepted"]]
    return len(accepted), sum(entry not in kept for entry in accepted), sum(one["told"] for one in said)


def main() -> None:
    """The command, and what each of its two processes runs."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--seconds", type=float, default=30.0)
    parser.add_argument("--at", type=Path)
    parser.add_argument("--mark", default="")
    given = parser.parse_args()
    if given.at is not None:
        work(given.at, given.mark, given.seconds)
        return
    with tempfile.TemporaryDirectory() as folder:
        accepted, lost, told = both(empty_ring(Path(folder) / "ring.json", 20), given.seconds)
    print(f"{given.seconds:.0f} s, two processes: {accepted} entries accepted, {lost} lost, {told} times one was told")


if __name__ == "__main__":
    main()
