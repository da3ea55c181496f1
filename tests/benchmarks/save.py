"""Saving one entry against a raw write, sync and replace of the same bytes, from 50 readings to 5,000.

    python -m tests.benchmarks.save

The raw floor writes the same bytes to a temporary file, syncs it, replaces the file and syncs the folder: what any
program must do that promises the old content or the new. Medians; both measured in turn, in one run.
"""

from __future__ import annotations

import argparse
import os
import statistics
import tempfile
import time
from datetime import UTC, datetime, timedelta
from pathlib import Path

from fieldtool.job.changes import Put, apply
from fieldtool.job.job import Job
from fieldtool.jobfile.opening import JobFile, read_job
from tests.jobs import empty_ring

START = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)


def job_of(path: Path, readings: int) -> Job:
    """A job whose readings were all entered through its history, corrections among them."""
    job = read_job(path)
    rows = []
    last: dict[tuple[str | None, str], str] = {}
    from fieldtool.job.reading import Reading

    for number in range(readings):
        point = job.points[number % len(job.points)]
        test = ("ln_cross", "le_cross", "zs")[number // len(job.points) % 3]
        row = Reading(id=f"m{number + 100}", circuit=point.circuit, point=point.id, test=test, value=0.5, raw="0.50",
                      at=START + timedelta(seconds=number), replaces=last.get((point.id, test)))  # fmt: skip
        last[(point.id, test)] = row.id
        rows.append(row)
    return apply(job, [Put("readings", row) for row in rows], at=START)


def raw_save(path: Path, data: bytes) -> None:
    """The floor: a temporary file written and synced, put in place, the folder synced."""
    fresh = path.with_name("raw.new")
    handle = os.open(fresh, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
    os.write(handle, data)
    os.fsync(handle)
    os.close(handle)
    os.replace(fresh, path)
    folder = os.open(path.parent, os.O_RDONLY)
    os.fsync(folder)
    os.close(folder)


def measure(readings: int, rounds: int) -> tuple[int, float, float, float]:
    """Bytes of the file; medians of one whole entry, its save alone, and the raw floor [s]."""
    from fieldtool.visit import Visit

    entries, saves, floors = [], [], []
    with tempfile.TemporaryDirectory(dir=os.environ.get("FIELDTOOL_BENCH_DIR")) as folder:
        path = Path(folder) / "job.json"
        start = empty_ring(Path(folder) / "start.json", 20)
        JobFile.create(path, job_of(start, readings), START).close()
        visit = Visit.open(path)
        cell = ("c3", "p5", "r1_r2", "as_found")
        for number in range(rounds):
            begun = time.perf_counter()
            entered = visit.enter(cell, f"0.{number + 31}")
            entries.append(time.perf_counter() - begun)
            assert entered.accepted
            begun = time.perf_counter()
            visit.retry_save()
            saves.append(time.perf_counter() - begun)
            data = path.read_bytes()
            raw = Path(folder) / "raw"
            begun = time.perf_counter()
            raw_save(raw, data)
            floors.append(time.perf_counter() - begun)
        visit.close()
    return len(data), statistics.median(entries), statistics.median(saves), statistics.median(floors)


def main() -> None:
    """Print the table."""
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--rounds", type=int, default=25)
    given = parser.parse_args()
    print(
        f"{'readings':>8} {'bytes':>10} {'raw ms':>8} {'save ms':>8} {'save/raw':>8} {'entry ms':>9} {'entry/raw':>9}"
    )
    for readings in (50, 500, 5000):
        size, entry, save, floor = measure(readings, given.rounds)
        print(f"{readings:>8} {size:>10,} {floor * 1e3:>8.2f} {save * 1e3:>8.2f} {save / floor:>8.2f} {entry * 1e3:>9.2f} {entry / floor:>9.2f}")  # fmt: skip


if __name__ == "__main__":
    main()
