"""Score of the diagnosis against the simulator: first, shown, and confidently wrong, for each fault."""

from __future__ import annotations

import time
from collections.abc import Iterator, Sequence
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass, field
from itertools import repeat
from typing import Any

import numpy as np

from fieldtool.answers import CircuitReading
from fieldtool.diagnosis.explain import explain
from fieldtool.job.job import Job
from tests.diagnosis.oracle import separable
from tests.jobs import made
from tests.simulator.draw import Drawn
from tests.simulator.faults import FAULTS, draw

AT = "2026-11-02T09:00:00+00:00"


def job_of(drawn: Drawn) -> Job:
    """The readings as a job: what the electrician knows, never what was drawn."""
    points: list[dict[str, Any]] = []
    for number, name in enumerate(drawn.trunk, start=1):
        points.append({"id": name, "circuit": "c1"} | ({"walk_order": number} if drawn.ordered else {}))
    for name, (parent, _) in drawn.spurs.items():
        points.append({"id": name, "circuit": "c1"} | ({"spur_from": parent} if name in drawn.traced else {}))
    return job_from(points, drawn.readings, {"cable": drawn.cable, "label_claims": "ring", **drawn.survey})


def job_from(points: list[dict[str, Any]], readings: list[dict[str, Any]], circuit: dict[str, Any]) -> Job:
    """A job of one circuit from plain rows."""
    rows = []
    for number, reading in enumerate(readings):
        row = {key: value for key, value in reading.items() if value is not None}
        own: dict[str, Any] = {"board": "b1"} if row["test"] in ("ze", "zdb", "ra", "pfc") else {"circuit": "c1"}
        if "value" in row:
            row.setdefault("raw", f"{row['value']:.2f}")
        rows.append({"id": f"m{number}", "at": AT, **own, **row})
    return made(
        {
            "boards": [{"id": "b1"}],
            "circuits": [{"id": "c1", "board": "b1", **circuit}],
            "points": points,
            "readings": rows,
        }
    )


@dataclass
class Score:
    """How often the right class came first, was shown, and another was called almost certain.

    ``told`` counts the circuits whose readings hold the answer at all (the oracle), with the same two beside it.
    """

    fault: str
    n: int = 0
    first: int = 0
    shown: int = 0
    sure_wrong: int = 0
    told: int = 0
    told_first: int = 0
    told_sure_wrong: int = 0
    spurs: int = 0
    spurs_in_band: int = 0
    wrong: dict[str, int] = field(default_factory=dict)

    def add(self, other: Score) -> None:
        """Add the counts of another score of the same fault."""
        for name in (
            "n",
            "first",
            "shown",
            "sure_wrong",
            "told",
            "told_first",
            "told_sure_wrong",
            "spurs",
            "spurs_in_band",
        ):
            setattr(self, name, getattr(self, name) + getattr(other, name))
        for key, count in other.wrong.items():
            self.wrong[key] = self.wrong.get(key, 0) + count

    def line(self) -> str:
        """One row of the table."""
        worst = ", ".join(f"{key} {count}" for key, count in sorted(self.wrong.items(), key=lambda kv: -kv[1])[:3])
        band = f"{100 * self.spurs_in_band / self.spurs:6.1f}" if self.spurs else "     –"
        return (
            f"{self.fault:42}{self.n:6}{100 * self.first / self.n:8.1f}{100 * self.shown / self.n:8.1f}"
            f"{100 * self.sure_wrong / self.n:8.1f}{100 * self.told / self.n:8.1f}"
            f"{100 * self.told_first / max(1, self.told):8.1f}{100 * self.told_sure_wrong / max(1, self.told):8.1f}"
            f"{band}  {worst}"
        )


HEAD = f"{'fault':42}{'n':>6}{'first %':>8}{'shown %':>8}{'sure✗ %':>8}{'oracle%':>8}{'o.first':>8}{'o.sure✗':>8}{'band %':>6}  called instead"


def names_of(reading: CircuitReading, index: int) -> set[str]:
    """Every id in the class of the explanation at this place."""
    group = reading.explanations[index].group
    return {item.id for item in reading.explanations if item.group == group}


def score_one(key: str, seed: str) -> Score:
    """Draw one circuit, explain it, and compare."""
    drawn = draw(key, seed)
    job = job_of(drawn)
    score = judged(key, drawn, explain(job, "c1"))
    if score.first or separable(drawn, job):
        score.told, score.told_first, score.told_sure_wrong = 1, score.first, score.sure_wrong
    return score


def judged(key: str, drawn: Drawn, reading: CircuitReading) -> Score:
    """The score of one answer."""
    names = FAULTS[key].names
    score = Score(key, 1)
    ids = [item.id for item in reading.explanations]
    if reading.nothing_fits and not ids:
        ids = ["nothing_fits"]
    first = bool(ids) and bool(names & (names_of(reading, 0) if reading.explanations else set(ids)))
    score.first = int(first)
    score.shown = int(bool(names & set(ids)))
    sure = bool(reading.explanations) and reading.explanations[0].odds == "almost_certainly"
    true_too = first or bool(FAULTS[key].true_too & set(ids[:1]))
    score.sure_wrong = int(sure and not true_too)
    if not first:
        score.wrong = {ids[0] if ids else "nothing said": 1}
    for place, metres in spur_ends(drawn).items():
        stated = [
            item
            for item in (reading.explanations[0].inferred if reading.explanations else ())
            if item.what == "spur_length_m" and item.place == place
        ]
        if stated and first:
            score.spurs += 1
            score.spurs_in_band += stated[0].low <= metres <= stated[0].high
    return score


def spur_ends(drawn: Drawn) -> dict[str, float]:
    """Metres from the ring to each spur's end."""
    out: dict[str, float] = {}
    for name, (parent, metres) in drawn.spurs.items():
        out[name] = metres + out.get(parent, 0.0)
    return out


def score(key: str, n: int, seed: str) -> Score:
    """The score of ``n`` circuits with one fault."""
    total = Score(key)
    for number in range(n):
        total.add(score_one(key, f"{seed}.{number}"))
    return total


def table(keys: Sequence[str], n: int, seed: str, jobs: int = 1) -> Iterator[str]:
    """The printed table, line by line."""
    yield HEAD
    if jobs <= 1:
        for key in keys:
            yield score(key, n, seed).line()
        return
    with ProcessPoolExecutor(jobs) as pool:
        for one in pool.map(score, keys, repeat(n), repeat(seed)):
            yield one.line()


def timing() -> str:
    """One 16-point diagnosis as a multiple of a bare 16x16 solve."""
    rng = np.random.default_rng(1)
    matrix, right = rng.random((16, 16)) + 16 * np.eye(16), rng.random(16)
    solve = min(_timed(lambda: [np.linalg.solve(matrix, right) for _ in range(100)]) for _ in range(20)) / 100
    jobs = [job_of(draw(key, f"time.{n}", 16)) for key in FAULTS for n in range(2)]
    took = sorted(min(_timed(lambda job=job: explain(job, "c1")) for _ in range(2)) for job in jobs)
    middle, slow = took[len(took) // 2], took[-1]
    return (
        f"one 16-point diagnosis: median {middle * 1e3:.1f} ms = {middle / solve:.0f} bare 16x16 solves "
        f"({solve * 1e6:.1f} µs); slowest of {len(took)}: {slow * 1e3:.1f} ms = {slow / solve:.0f}"
    )


def _timed(call: Any) -> float:
    begin = time.perf_counter()
    call()
    return time.perf_counter() - begin
