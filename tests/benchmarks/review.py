"""Reviewing a folder of jobs: files a second, memory, and one job against the least that any review must do.

    python -m tests.benchmarks.review --jobs 10000

Files a second are by the clock on the wall; files for each second that a core was busy hold on a machine that others
use too. The floor of one job is `json.loads` of its bytes plus one verdict: what the readings say, and every rule once on the
circuit as the way that stands would leave it, from a job already in memory. Four jobs in five have a way chosen and a
verdict kept, as jobs have whose work was begun; one in five asks for the best way still. The jobs are the samples with
their readings moved by up to 2 %, in folders of a hundred, in the form and with the seal that the tool writes.
"""

from __future__ import annotations

import argparse
import gc
import json
import random
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterable
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from fieldtool.commands.review import review_one
from fieldtool.commands.spread import cores
from fieldtool.diagnosis.explain import explain
from fieldtool.job.kinds import TESTS
from fieldtool.jobfile.opening import read_job
from fieldtool.jobfile.shelf import open_sample
from fieldtool.jobfile.storage import JobStorage
from fieldtool.jobfile.swap import Files
from fieldtool.jobfile.tree import Found, job_files
from fieldtool.verdict.best import by_way, standing
from fieldtool.verdict.compare import judge
from fieldtool.visit import Visit
from fieldtool.ways.way import every_way
from tests.jobs import SAMPLES

NOW = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)

_RUN = """
import resource, sys
from fieldtool.__main__ import main
if __name__ == "__main__":
    main(sys.argv[1:])
    own, helpers = resource.getrusage(resource.RUSAGE_SELF), resource.getrusage(resource.RUSAGE_CHILDREN)
    busy = own.ru_utime + own.ru_stime + helpers.ru_utime + helpers.ru_stime
    print(busy, own.ru_maxrss, helpers.ru_maxrss, file=sys.stderr)
"""


class Unsynced(Files):
    """File calls of a save without the waiting for the medium, which nobody measures here."""

    folder_sync = False

    def sync(self, handle: int) -> None:
        """Nothing."""


def templates(folder: Path) -> list[tuple[dict[str, Any], dict[str, Any]]]:
    """Of each sample the document as begun (way chosen, verdict kept) and as still asked."""
    out = []
    for sample in sorted(SAMPLES.glob("*.json")):
        path = open_sample(sample, folder)
        asked = json.loads(path.read_bytes())
        visit = Visit.open(path, clock=lambda: NOW)
        for request in visit.job.requests:
            way = standing(visit.job, request, explain(visit.job, request.circuit)).way
            visit.put("requests", request.model_copy(update={"chosen_way": way}))
            visit.keep_verdict(request.id, "work_begins")
        visit.close()
        out.append((json.loads(path.read_bytes()), asked))
    return out


def generate(folder: Path, jobs: int, seed: int = 1) -> None:
    """So many job files: a template each, its readings moved a little."""
    rng = random.Random(seed)
    with tempfile.TemporaryDirectory() as made:
        kinds = templates(Path(made))
    for number in range(jobs):
        begun, asked = kinds[number % len(kinds)]
        document = dict(asked if number % 5 == 4 else begun)
        document["readings"] = {key: _moved(row, rng) for key, row in document["readings"].items()}
        place = folder / f"{number // 100:03}" / f"job-{number:05}.json"
        place.parent.mkdir(exist_ok=True)
        JobStorage(place, Unsynced()).write(document)


def _moved(row: dict[str, Any], rng: random.Random) -> dict[str, Any]:
    field = TESTS[row["test"]].field
    if row["value"] is None or field not in ("low_ohm", "loop_ohm"):
        return row
    value = round(row["value"] * rng.uniform(0.98, 1.02), 2)
    return {**row, "value": value, "raw": f"{value:.2f}"}


def best_of(run: Callable[[], Any], rounds: int = 3) -> float:
    """The quickest of some runs [s of a busy core]: what the machine does when nothing else wants it."""
    times = []
    for _ in range(rounds):
        begun = time.process_time()
        run()
        times.append(time.process_time() - begun)
    return min(times)


def one_job(folder: Path, found: Found) -> tuple[float, float, float, float, bool]:
    """Seconds of json.loads, of one verdict, of that with its margins, of the whole review; whether a way was chosen."""
    path = folder / found.name
    data = path.read_bytes()
    job = read_job(path)
    request = job.requests[0]
    reading = explain(job, request.circuit)
    way = next(way for way in every_way() if way.key == standing(job, request, reading).way)
    parse = best_of(lambda: json.loads(data))
    verdict = best_of(lambda: by_way(job, request, way, explain(job, request.circuit)))
    margins = best_of(lambda: judge(job, request, way, explain(job, request.circuit)))
    review = best_of(lambda: json.dumps(review_one(folder, NOW, found)))
    return parse, verdict, margins, review, request.chosen_way is not None


def spread_run(folder: Path, helpers: int) -> tuple[float, float, int, int]:
    """Seconds of the command over a folder, and of all its cores busy; peak memory of it and its largest helper [KiB]."""
    begun = time.perf_counter()
    done = subprocess.run(
        [sys.executable, "-c", _RUN, "review", str(folder), "--json", "--cores", str(helpers)],
        stdout=subprocess.DEVNULL,
        stderr=subprocess.PIPE,
        text=True,
        check=True,
    )
    busy, own, other = done.stderr.split()[-3:]
    return time.perf_counter() - begun, float(busy), int(own), int(other)


def _print_one(label: str, rows: Iterable[tuple[float, float, float, float, bool]]) -> None:
    rows = list(rows)
    if not rows:
        return
    parse, verdict, margins, review = (statistics.mean(row[n] for row in rows) * 1e3 for n in range(4))
    print(
        f"{label:<22} {len(rows):>5} {parse:>8.2f} {verdict:>8.2f} {margins:>9.2f} {review:>8.2f} "
        f"{review / (parse + verdict):>7.2f} {review / (parse + margins):>10.2f}"
    )


def main() -> None:
    """Print the tables."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--jobs", type=int, default=10000)
    parser.add_argument("--sample", type=int, default=120, help="jobs looked at one by one")
    given = parser.parse_args()
    print(f"{'jobs':>7} {'cores':>5} {'s':>8} {'files/s':>8} {'/busy s':>8} {'MiB':>6} {'MiB a helper':>13}")
    with tempfile.TemporaryDirectory() as root:
        for jobs in sorted({max(1, given.jobs // 10), given.jobs}):
            folder = Path(root) / str(jobs)
            folder.mkdir()
            begun = time.process_time()
            generate(folder, jobs)
            made = time.process_time() - begun
            for helpers in sorted({1, cores()}):
                took, busy, own, other = spread_run(folder, helpers)
                print(f"{jobs:>7} {helpers:>5} {took:>8.1f} {jobs / took:>8.1f} {jobs / busy:>8.1f} "
                      f"{own / 1024:>6.0f} {other / 1024 if helpers > 1 else 0:>13.0f}", flush=True)  # fmt: skip
            print(f"        ({jobs} files made in {made:.1f} s)", flush=True)
        found = random.Random(2).sample(list(job_files(folder)), min(given.sample, given.jobs))
        gc.collect()
        gc.freeze()
        rows = [one_job(folder, item) for item in found]
    print(f"\n{'ms a job':<22} {'jobs':>5} {'loads':>8} {'verdict':>8} {'+margins':>9} {'review':>8} "
          f"{'x floor':>7} {'x +margins':>10}")  # fmt: skip
    _print_one("way chosen, kept", [row for row in rows if row[4]])
    _print_one("best way still asked", [row for row in rows if not row[4]])
    _print_one("all", rows)


if __name__ == "__main__":
    main()
