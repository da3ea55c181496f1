"""After the work: the tests still to take, and what keeps the job from being finished."""

from __future__ import annotations

from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS, TestKey
from fieldtool.job.reading import Reading
from fieldtool.job.request import Request
from fieldtool.safety.parting import outstanding

__all__ = ["after_work", "finished"]


def after_work(job: Job, request: Request, repeat: tuple[str, ...] = ()) -> tuple[tuple[str, str, Reading | None], ...]:
    """The tests to take after the work, in order, each with its place and the reading where it was taken.

    ``repeat`` are the way's own tests; without them the fewest that any addition needs. A crossed step of a ring is
    read at every point again; Zs besides at the existing point that read highest before.
    """
    tests: tuple[str, ...] = repeat or ("r1_r2", "ir_live_e", "polarity", "zs", "rcd_ms", "function")
    ordered = [test for test in TESTS if test in tests]
    standing = job.standing()
    out: list[tuple[str, str, Reading | None]] = []
    for test in ordered:
        for place in _places(job, request, test):
            point = place if TESTS[test].where == "point" else None
            cell = (request.circuit, point, test, "after_work")
            taken = next((r for r in reversed(standing) if r.cell == cell and (r.counts or r.why_not)), None)
            out.append((test, place, taken))
    return tuple(out)


def _places(job: Job, request: Request, test: TestKey) -> list[str]:
    """Where one test is taken after the work: the circuit itself, or points, new ones first."""
    if TESTS[test].where != "point":
        return [request.circuit]
    places = [outlet.id for outlet in request.outlets] or ([request.swap] if request.swap else [])
    if test in ("ln_cross", "le_cross"):
        places += [point.id for point in job.points_of(request.circuit)]
    elif test == "zs":
        found = [
            reading
            for cell, reading in job.counted().items()
            if cell[0] == request.circuit and cell[2] == "zs" and cell[3] == "as_found" and reading.value is not None
        ]
        worst = max(found, key=lambda reading: reading.value or 0.0, default=None)
        if worst is not None and worst.point is not None:
            places.append(worst.point)
    return list(dict.fromkeys(places))


def finished(job: Job, request: Request, repeat: tuple[str, ...] = (), out_of_band: int = 0) -> tuple[str, ...]:
    """What keeps the job from being called finished; empty where nothing does.

    Abandoned counts as finished once its dead ends are recorded. One live Zs (or the earth read to the main
    terminal) is what proves the earth back on its bar.
    """
    if request.abandoned_at is not None:
        left = [] if any(entry.kind == "abandoned" for entry in job.isolation) else ["how it was left is not logged"]
        return tuple(left)
    reasons = [f"{row.what}: still {row.sort}" for row in outstanding(job, request.circuit)]
    if request.work_done_at is None:
        reasons.append("the work is not logged as done")
    reasons += [
        f"{TESTS[test].words} at {_named(job, request, place)} not taken"  # type: ignore[index]
        for test, place, taken in after_work(job, request, repeat)
        if taken is None
    ]
    live = [r for r in job.standing() if r.circuit == request.circuit and r.stage == "after_work" and r.counts]
    if not any(r.test in ("zs", "cpc_to_met") for r in live):
        reasons.append("no live Zs after the work proves the earth back on its bar")
    if out_of_band:
        reasons.append(f"{out_of_band} readings are outside what was foretold")
    if not any(entry.kind == "handed_over" and entry.circuit == request.circuit for entry in job.isolation):
        reasons.append("not handed over")
    return tuple(dict.fromkeys(reasons))


def _named(job: Job, request: Request, place: str) -> str:
    return (job.circuit(place).name or place) if place == request.circuit else job.point_name(place)
