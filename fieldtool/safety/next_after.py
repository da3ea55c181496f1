"""The next step after the work, and of work that was given up."""

from __future__ import annotations

from datetime import datetime

from fieldtool.answers import NextStep
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.request import Request
from fieldtool.safety.after import after_work
from fieldtool.safety.budget import name_of
from fieldtool.safety.first import arranged_first, back_first, is_ring, log_step, step_of
from fieldtool.safety.parting import earth_unproved, holds_back
from fieldtool.safety.states import CircuitState
from fieldtool.safety.tasks import AFTER, RADIAL, RING, Task

__all__ = ["abandoned_step", "after_step"]


def after_step(
    job: Job,
    circuit_id: str,
    found: CircuitState,
    now: datetime,
    request: Request,
    repeat: tuple[str, ...],
) -> NextStep:
    """The first test after the work that is not taken, with what comes before it; at the end the handing over."""
    due = [(test, place) for test, place, taken in after_work(job, request, repeat) if taken is None]
    dead = [item for item in due if TESTS[item[0]].state == "dead"]  # type: ignore[index]
    why = f"{len(due)} to go. Held against what was foretold before the work."
    if dead:
        test, place = dead[0]
        if not found.dead:
            return log_step(job, circuit_id, now, "board")
        table = RING if is_ring(job, circuit_id) else RADIAL
        arranged = arranged_first(job, circuit_id, table, test, found, now)
        if arranged is not None:
            return arranged
        return step_of(_after_words(AFTER[2], job, circuit_id, test, place), why, test, test=test, place=place)
    if holds_back(job, circuit_id):
        return back_first(job, circuit_id, found, now)
    if (due or earth_unproved(job, circuit_id)) and found.word != "live":
        return step_of(AFTER[3].words, "Live tests come last, with covers on.", "restored", circuit=circuit_id)
    if due:
        test, place = due[0]
        return step_of(_after_words(AFTER[4], job, circuit_id, test, place), why, test, test=test, place=place)
    if earth_unproved(job, circuit_id):
        return step_of("Read one live Zs: it proves the earth back on its bar.", "It was off its bar today.", "zs")
    if not any(entry.kind == "handed_over" and entry.circuit == circuit_id for entry in job.isolation):
        return step_of(AFTER[5].words, "The client has it in writing.", "handed_over", circuit=circuit_id)
    return step_of("Nothing left to do here. Keep the record.", "Everything asked for was taken.", "done")


def _after_words(task: Task, job: Job, circuit_id: str, test: str, place: str) -> str:
    spec = TESTS[test]  # type: ignore[index]
    where = "" if place == circuit_id else f" at {name_of(job, place)}"
    return task.words.format(
        what=f"read {spec.words}{where}." if spec.field else f"{spec.words}{where}, right or wrong?"
    )


def abandoned_step(job: Job, circuit_id: str) -> NextStep:
    """Leaving dead ends insulated, enclosed, locked and told of; that is a finish too."""
    if any(entry.kind == "abandoned" and entry.circuit == circuit_id for entry in job.isolation):
        return step_of("Left as logged: insulated, closed, locked, told.", "Abandoned on the record.", "done")
    return step_of(
        "Insulate dead ends, close, lock, tell in writing; log it: F9 +.",
        "Leaving it in a known state is a finish too.",
        "abandoned",
        circuit=circuit_id,
    )
