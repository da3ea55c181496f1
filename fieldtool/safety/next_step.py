"""The one next safe step, a whole sentence within its cells, with its reason.

Works from the job, the time and what was already judged; it computes no network.
"""

from __future__ import annotations

from collections.abc import Iterable
from datetime import datetime

from fieldtool.answers import CircuitReading, Missing, NextStep, Verdict
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.quantities.show import shorten
from fieldtool.safety.budget import NAME_CELLS, name_of
from fieldtool.safety.first import arranged_first, back_first, is_ring, log_step, step_of, task_of
from fieldtool.safety.next_after import abandoned_step, after_step
from fieldtool.safety.parting import holds_back, outstanding
from fieldtool.safety.states import CircuitState, state
from fieldtool.safety.tasks import AFTER, RADIAL, RING

__all__ = ["next_step", "shelf_step"]


def shelf_step() -> NextStep:
    """The next step while no job is open."""
    return step_of("Choose a job, or 9 to check one addition now.", "Nothing is open yet.", "choose")


def next_step(
    job: Job,
    circuit_id: str | None,
    now: datetime,
    *,
    verdict: Verdict | None = None,
    reading: CircuitReading | None = None,
    request_id: str | None = None,
    repeat: tuple[str, ...] = (),
) -> NextStep:
    """Exactly one next safe step for a circuit, with its reason. ``repeat`` are the tests after the chosen way.

    Danger first, then what waits for an answer, then the steps into the state that the first undone task needs,
    then that task.
    """
    if circuit_id is None:
        if not job.circuits:
            return step_of(
                "Add the circuit you will work on: F2, Board survey.", "Nothing is judged without it.", "survey"
            )
        return step_of(
            "Choose the circuit you will work on: F2, Board survey.", "Treat every circuit as live.", "choose"
        )
    found = state(job, circuit_id, now)
    return (
        _danger(job, circuit_id, found)
        or _waiting(job, circuit_id, found)
        or _slips(job, circuit_id, reading)
        or _parted_overnight(job, circuit_id, found, now)
        or _earth_off(found, verdict)
        or _missing(job, circuit_id, found, now, verdict)
        or _asked_for(job, circuit_id, found, now, verdict, request_id, repeat)
    )


def _danger(job: Job, circuit_id: str, found: CircuitState) -> NextStep | None:
    if found.alarm:
        return step_of(
            found.alarm, f"{found.alarm} Log what you did about it; then the sequence starts anew.", "stopped"
        )
    if job.site.asbestos == "yes":
        return step_of(
            "Asbestos suspected: do not open, do not drill. Have it surveyed.",
            "Old flash guards, boards and coatings; the survey says it is suspected.",
            "stopped",
        )
    if job.circuit(circuit_id).back_feed == "found":
        return step_of(
            "Unplug what feeds back into the circuit, then say so: F2.", "It stays live when it is off.", "survey"
        )
    return None


def _waiting(job: Job, circuit_id: str, found: CircuitState) -> NextStep | None:
    standing = [reading for reading in job.standing() if reading.circuit == circuit_id]
    if any(reading.needs_taken and reading.taken is None for reading in standing):
        log = "" if found.dead else "; then log it dead before more"
        return step_of(
            f"Say when this was taken{log}.",
            "A dead test on a circuit that is not proved dead can hurt you and the meter.",
            "question",
        )
    doubtful = [reading for reading in standing if reading.doubt and not reading.confirmed]
    if doubtful:
        last = doubtful[-1]
        return step_of(
            f"Look again at {name_of(job, last.point)}: {last.raw} is not likely. - goes back to it.",
            last.doubt,
            "doubt",
            place=last.point or "",
            test=last.test,
        )
    return None


def _slips(job: Job, circuit_id: str, reading: CircuitReading | None) -> NextStep | None:
    leading = reading.leading if reading is not None else None
    if leading is not None and leading.id == "ends_joined_wrongly":
        points = job.points_of(circuit_id)
        first = name_of(job, points[0].id) if points else "the first point"
        return step_of(
            f"At the board: swap the two pairs, then start again at {first}.",
            leading.sentence,
            "slip",
            test=leading.test or "ln_cross",
        )
    return None


def _parted_overnight(job: Job, circuit_id: str, found: CircuitState, now: datetime) -> NextStep | None:
    """Something parted on a circuit that is no longer proved dead: the log comes before anything else."""
    rows = outstanding(job, circuit_id)
    if not rows or found.dead:
        return None
    made = log_step(job, circuit_id, now, "board")
    return NextStep(made.sentence, f"Still {rows[0].sort}: {rows[0].what}. {found.reason} {made.why}", made.kind)


def _earth_off(found: CircuitState, verdict: Verdict | None) -> NextStep | None:
    """During an origin test: once its readings are taken the earth goes back before anything else."""
    if found.word != "origin_test":
        return None
    first = verdict.missing[0] if verdict is not None and verdict.missing else None
    if first is not None and first.test in _AT_ORIGIN:
        return None
    return step_of(
        "Earth back on its terminal, tight; log the test over: F9 +.",
        "While the earthing conductor is off, every exposed part of the building has no earth.",
        "origin_test_ends",
    )


_AT_ORIGIN = ("ze", "pfc", "ra")


def _missing(job: Job, circuit_id: str, found: CircuitState, now: datetime, verdict: Verdict | None) -> NextStep | None:
    if verdict is None or not verdict.missing:
        return None
    first = verdict.missing[0]
    if first.test == "survey":
        pane = "F4" if first.field.startswith(("route", "outlets", "request")) else "F2"
        return step_of(f"Answer: {first.words} ({pane}).", "The verdict waits for it.", "survey", field=first.field)
    return _take(job, circuit_id, found, now, first, verdict.missing)


def _take(
    job: Job, circuit_id: str, found: CircuitState, now: datetime, first: Missing, gaps: Iterable[Missing]
) -> NextStep:
    spec = TESTS[first.test]  # type: ignore[index]
    place = first.place if spec.where == "point" else "board"
    where = {"test": first.test, "place": first.place, "circuit": circuit_id}
    if spec.state == "origin":
        return _origin(first, where)
    if spec.state == "live":
        return _live(job, circuit_id, found, now, first, where)
    table = RING if is_ring(job, circuit_id) else RADIAL
    if not found.dead:
        return log_step(job, circuit_id, now, "board")
    task = task_of(table, first.test)
    arranged = arranged_first(job, circuit_id, table, first.test, found, now)
    if arranged is not None:
        return arranged
    if task is None:
        asked = f"Read {spec.words}" if spec.field else f"Say whether {spec.words} is right"
        at = f" at {name_of(job, place)}" if spec.where == "point" or spec.field else ""
        return step_of(f"{asked}{at}.", "The verdict waits for it.", first.test, **where)
    left = sum(gap.test == first.test for gap in gaps)
    return step_of(
        task.words.format(test=spec.words, place=name_of(job, place)),
        f"{left} of this test to go. {task.why}".strip(),
        first.test,
        **where,
    )


def _origin(first: Missing, where: dict[str, str]) -> NextStep:
    words = {
        "ze": "Read Ze at the origin, or enter the distributor's figure.",
        "pfc": "Read the fault current at the board, in kA.",
        "ra": "Read the earth electrode's resistance.",
    }
    return step_of(
        words.get(first.test, f"Read {first.words}."),
        "The earthing conductor may be parted for it: log the origin test, and put it back before anything else.",
        first.test,
        **where,
    )


def _live(
    job: Job, circuit_id: str, found: CircuitState, now: datetime, first: Missing, where: dict[str, str]
) -> NextStep:
    if holds_back(job, circuit_id):
        return back_first(job, circuit_id, found, now)
    if found.word != "live":
        name = shorten(job.circuit(circuit_id).name or circuit_id, NAME_CELLS)
        return step_of(
            f"Covers on, {name} on; log it restored: F9 +.",
            "Live tests are taken with covers on and everything back in its place.",
            "restored",
            circuit=circuit_id,
        )
    spec = TESTS[first.test]  # type: ignore[index]
    if first.test == "zs":
        sentence = f"Covers on: read Zs at {name_of(job, first.place)}, high-current if it can."
        if "again" in first.words:
            sentence = f"Read Zs at {name_of(job, first.place)} again, high-current test."
        return step_of(sentence, "The no-trip test can be 0.3 Ω off.", "zs", **where)
    return step_of(f"Read {spec.words}, covers on.", "The verdict waits for it.", first.test, **where)


def _asked_for(
    job: Job,
    circuit_id: str,
    found: CircuitState,
    now: datetime,
    verdict: Verdict | None,
    request_id: str | None,
    repeat: tuple[str, ...],
) -> NextStep:
    request = next((row for row in job.requests if row.id == request_id), None)
    if request is None or not (request.outlets or request.swap):
        return step_of(
            "Say what is wanted, where and how far: F4, Proposed work.", "Every way is judged at once.", "ask"
        )
    if request.abandoned_at is not None:
        return abandoned_step(job, circuit_id)
    if request.work_done_at is not None:
        return after_step(job, circuit_id, found, now, request, repeat)
    if verdict is None:
        return step_of("Wait: the verdict is being worked out.", "What was entered last is not judged yet.", "verdict")
    if verdict.outcome == "stop":
        first = verdict.reasons("broken")
        why = first[0].says if first else ""
        return step_of("Do not start: look at the reasons, or another way (F5).", why, "stopped")
    if request.chosen_way is None:
        return step_of(
            "Choose the way: F4, then / and its digit, then Enter.",
            "The verdict is kept for the way you choose.",
            "ask",
        )
    if request.work_begun_at is None:
        return step_of(
            "Keep this verdict and begin the work: F5, then 1.",
            "What was known when the work began stands on the record with its figures.",
            "begin",
        )
    place = request.at or request.swap or "board"
    if place not in found.places:
        return log_step(job, circuit_id, now, place)
    return step_of(
        AFTER[1].words.format(place=name_of(job, place)),
        "Proved dead there. Cut only what you have proved dead at the cut.",
        "work",
        place=place,
        circuit=circuit_id,
    )
