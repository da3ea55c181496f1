"""The one next safe step, a whole sentence within its cells, with its reason.

Works from the job, the time and what was already judged; it computes no network.
"""

from __future__ import annotations

from collections.abc import Iterable
from datetime import datetime

from fieldtool.answers import CircuitReading, Missing, NextStep, Verdict
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.request import Request
from fieldtool.quantities.show import shorten
from fieldtool.safety.after import after_work
from fieldtool.safety.budget import NAME_CELLS, fit, name_of
from fieldtool.safety.log import steps
from fieldtool.safety.parting import outstanding
from fieldtool.safety.states import CircuitState, blocked_by, state
from fieldtool.safety.tasks import AFTER, RADIAL, RING, Task

__all__ = ["next_step", "shelf_step"]

_DO: dict[str, tuple[str, str]] = {
    "survey_eye": (
        "Look before you open: heat, crumbling cable, asbestos? Log it: F9.",
        "What you see first can stop the work: old boards, burnt covers and crumbling cable are not opened.",
    ),
    "metalwork_checked": (
        "Check an outlet and metalwork for abnormal voltage; log it: F9.",
        "A lost neutral or earth can put metalwork at mains. It is checked before anything is touched.",
    ),
    "permission": (
        "Ask who allows it and who is affected; log the name: F9.",
        "Freezers, alarms, medical devices and people alone in the house are asked about before it goes off.",
    ),
    "identified": (
        "Find {circuit} at the board, by label and by test; log it: F9.",
        "A label alone is not proof: switch it and see what goes off.",
    ),
    "off": ("Turn off {circuit} at the board, then log it: F9.", "Its own device goes off first."),
    "main_switch_off": (
        "Main switch off, then log it: F9. Incoming terminals stay LIVE.",
        "This circuit may share a neutral or a leg: both poles of the board go off.",
    ),
    "locked": ("Lock it off, keep the key, put a label; log it: F9.", "Nobody else can switch it on behind your back."),
    "sources_isolated": (
        "Isolate every other source; log how: F9.",
        "Panels, a battery or a generator keep a circuit live when the board is off.",
    ),
    "tester_proved_before": (
        "Prove your tester on a known source; log it: F9.",
        "A tester that does not work reads dead everywhere.",
    ),
    "dead_tested": (
        "Test for dead at {place}: L-N, L-E, N-E; type the volts: F9.",
        "Three readings at the place where you will work. Any volts: it is not dead.",
    ),
    "tester_proved_after": (
        "Prove your tester again, then log it: F9.",
        "Only a tester that works before and after has told you anything.",
    ),
}


def _step(sentence: str, why: str, kind: str, **where: str) -> NextStep:
    return NextStep(fit(sentence), why, kind, **where)


def shelf_step() -> NextStep:
    """The next step while no job is open."""
    return _step("Choose a job, or 9 to check one addition now.", "Nothing is open yet.", "choose")


def next_step(
    job: Job,
    circuit_id: str | None,
    now: datetime,
    *,
    verdict: Verdict | None = None,
    reading: CircuitReading | None = None,
    request_id: str | None = None,
) -> NextStep:
    """Exactly one next safe step for a circuit, with its reason.

    Danger first, then what waits for an answer, then the steps into the state that the first undone task needs,
    then that task.
    """
    if circuit_id is None:
        if not job.circuits:
            return _step(
                "Add the circuit you will work on: F2, Board survey.", "Nothing is judged without it.", "survey"
            )
        return _step("Choose the circuit you will work on: F2, Board survey.", "Treat every circuit as live.", "choose")
    found = state(job, circuit_id, now)
    return (
        _danger(job, circuit_id, found)
        or _waiting(job, circuit_id, found)
        or _slips(job, circuit_id, reading)
        or _parted_overnight(job, circuit_id, found, now)
        or _missing(job, circuit_id, found, now, verdict)
        or _asked_for(job, circuit_id, found, now, verdict, request_id)
    )


def _danger(job: Job, circuit_id: str, found: CircuitState) -> NextStep | None:
    if found.alarm:
        return _step(found.alarm, f"{found.alarm} Log what you did about it; then the sequence starts anew.", "stopped")
    if job.site.asbestos == "yes":
        return _step(
            "Asbestos suspected: do not open, do not drill. Have it surveyed.",
            "Old flash guards, boards and coatings; the survey says it is suspected.",
            "stopped",
        )
    if job.circuit(circuit_id).back_feed == "found":
        return _step(
            "Unplug what feeds back into the circuit, then say so: F2.", "It stays live when it is off.", "survey"
        )
    return None


def _waiting(job: Job, circuit_id: str, found: CircuitState) -> NextStep | None:
    standing = [reading for reading in job.standing() if reading.circuit == circuit_id]
    if any(reading.needs_taken and reading.taken is None for reading in standing):
        log = "" if found.dead else "; then log it dead before more"
        return _step(
            f"Say when this was taken{log}.",
            "A dead test on a circuit that is not proved dead can hurt you and the meter.",
            "question",
        )
    doubtful = [reading for reading in standing if reading.doubt and not reading.confirmed]
    if doubtful:
        last = doubtful[-1]
        return _step(
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
        return _step(
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
    made = _log_step(job, circuit_id, now, "board")
    return NextStep(made.sentence, f"Still {rows[0].sort}: {rows[0].what}. {found.reason} {made.why}", made.kind)


def _log_step(job: Job, circuit_id: str, now: datetime, place: str) -> NextStep:
    """The next step of the isolation log at a place."""
    blocked = blocked_by(job, circuit_id)
    due = next((step for step in steps(job, circuit_id, now, place=place) if step.next), None)
    if due is None or (blocked and due.kind in ("tester_proved_before", "dead_tested")):
        return _step(blocked or "Log it dead again: F9.", blocked or "The proof no longer holds.", "survey")
    sentence, why = _DO[due.kind]
    circuit = shorten(job.circuit(circuit_id).name or circuit_id, NAME_CELLS)
    found = state(job, circuit_id, now)
    return _step(
        sentence.format(circuit=circuit, place=name_of(job, place)),
        f"{why} {found.reason}".strip(),
        due.kind,
        place=place,
        circuit=circuit_id,
    )


def _ring(job: Job, circuit_id: str) -> bool:
    ends = [r for r in job.standing() if r.circuit == circuit_id and r.test in ("r1", "rn", "r2") and r.counts]
    if any(r.sign == "=" for r in ends):
        return True
    return job.circuit(circuit_id).label_claims != "radial" and not (len(ends) >= 3)


def _missing(job: Job, circuit_id: str, found: CircuitState, now: datetime, verdict: Verdict | None) -> NextStep | None:
    if verdict is None or not verdict.missing:
        return None
    first = verdict.missing[0]
    if first.test == "survey":
        pane = "F4" if first.field.startswith(("route", "outlets", "request")) else "F2"
        return _step(f"Answer: {first.words} ({pane}).", "The verdict waits for it.", "survey", field=first.field)
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
    table = RING if _ring(job, circuit_id) else RADIAL
    if not found.dead:
        return _log_step(job, circuit_id, now, "board")
    task = next((item for item in table if item.test == first.test), None)
    if task is None and first.test.startswith("ir_"):
        task = next(item for item in table if item.key == "insulation")
    at_board = task is not None and task.needs == "board_dead" and first.test in ("r1", "rn", "r2", "legs")
    if at_board and found.word != "board_dead":
        return _main_switch(job, circuit_id)
    arranged = _arranged(job, circuit_id, table, first, found)
    if arranged is not None:
        return arranged
    if task is None:
        return _step(f"Read {spec.words} at {name_of(job, place)}.", "The verdict waits for it.", first.test, **where)
    left = sum(gap.test == first.test for gap in gaps)
    return _step(
        task.words.format(test=spec.words, place=name_of(job, place)),
        f"{left} of this test to go. {task.why}".strip(),
        first.test,
        **where,
    )


def _main_switch(job: Job, circuit_id: str) -> NextStep:
    name = shorten(job.circuit(circuit_id).name or circuit_id, NAME_CELLS)
    return _step(
        f"Main switch off and locked before legs of {name} are parted: F9.",
        "A borrowed neutral rises to mains when it is lifted. Incoming terminals stay live.",
        "main_switch_off",
        circuit=circuit_id,
    )


def _arranged(
    job: Job, circuit_id: str, table: tuple[Task, ...], first: Missing, found: CircuitState
) -> NextStep | None:
    """What has to be parted, joined or taken off before a reading: the first thing that is not as it must be."""
    rows = outstanding(job, circuit_id)
    parted = {row.conductor for row in rows if row.sort == "parted"}
    joined = [row for row in rows if row.sort == "joined"]
    ring = table is RING
    if first.test in ("r1", "rn", "r2", "legs") and joined:
        return _step(
            f"Take the join off first: {joined[0].what}.", "End to end is read with nothing joined.", "put_back"
        )
    if ring and first.test in ("r1", "rn", "r2") and not {"line", "neutral", "cpc"} <= parted:
        if found.word != "board_dead":
            return _main_switch(job, circuit_id)
        return _step(table[0].words, "Each conductor is read end to end with both its ends out of the way.", "part")
    wanted = {"ln_cross": "L to N", "le_cross": "L to E"}.get(first.test)
    if wanted and joined and not any(wanted in row.what.replace(" of A", "").replace(" of B", "") for row in joined):
        return _step(
            f"Take the join off first: {joined[0].what}.", "The joins of the other step are still on.", "put_back"
        )
    if first.test.startswith("ir_") and joined:
        return _step(f"Take the join off first: {joined[0].what}.", "A join reads as a fault here.", "put_back")
    return None


def _origin(first: Missing, where: dict[str, str]) -> NextStep:
    words = {
        "ze": "Read Ze at the origin, or enter the distributor's figure.",
        "pfc": "Read the fault current at the board, in kA.",
        "ra": "Read the earth electrode's resistance.",
    }
    return _step(
        words.get(first.test, f"Read {first.words}."),
        "The earthing conductor may be parted for it: log the origin test, and put it back before anything else.",
        first.test,
        **where,
    )


def _live(
    job: Job, circuit_id: str, found: CircuitState, now: datetime, first: Missing, where: dict[str, str]
) -> NextStep:
    rows = outstanding(job, circuit_id)
    if rows:
        if not found.dead:
            return _log_step(job, circuit_id, now, "board")
        return _put_back(job, circuit_id)
    if found.word != "live":
        name = shorten(job.circuit(circuit_id).name or circuit_id, NAME_CELLS)
        return _step(
            f"Covers on, {name} on; log it restored (F9). Then live tests.",
            "Live tests are taken with covers on and everything back in its place.",
            "restored",
            circuit=circuit_id,
        )
    spec = TESTS[first.test]  # type: ignore[index]
    if first.test == "zs":
        sentence = f"Covers on: read Zs at {name_of(job, first.place)}, high-current if it can."
        if "again" in first.words:
            sentence = f"Read Zs at {name_of(job, first.place)} again, high-current test."
        return _step(sentence, "The no-trip test can be 0.3 Ω off.", "zs", **where)
    return _step(f"Read {spec.words}, covers on.", "The verdict waits for it.", first.test, **where)


def _put_back(job: Job, circuit_id: str) -> NextStep:
    rows = outstanding(job, circuit_id)
    if rows[0].sort == "joined":
        return _step(
            f"At the board: take off {rows[0].what}; check it open, say so.",
            "A join left on is a short circuit when the supply comes back.",
            "put_back",
            circuit=circuit_id,
        )
    letters = " ".join(
        letter for letter, key in (("L", "line"), ("N", "neutral"), ("E", "cpc")) if key in {r.conductor for r in rows}
    )
    what = f"put legs {letters} back in the way" if letters else f"put back {rows[0].what}"
    return _step(
        f"At the board: {what}, then say so.",
        "An earth parted and not put back passes every dead ring test.",
        "put_back",
        circuit=circuit_id,
    )


def _asked_for(
    job: Job,
    circuit_id: str,
    found: CircuitState,
    now: datetime,
    verdict: Verdict | None,
    request_id: str | None,
) -> NextStep:
    request = next((row for row in job.requests if row.id == request_id), None)
    if request is None or not (request.outlets or request.swap):
        return _step("Say what is wanted, where and how far: F4, Proposed work.", "Every way is judged at once.", "ask")
    if request.abandoned_at is not None:
        return _abandoned(job, circuit_id)
    if request.work_done_at is not None:
        return _after(job, circuit_id, found, now, request, verdict)
    if verdict is None:
        return _step("Look at the verdict: F5.", "Every reading it needs is there.", "verdict")
    if verdict.outcome == "stop":
        first = verdict.reasons("broken")
        why = first[0].says if first else ""
        return _step("Do not start: look at the reasons, or another way (F5).", why, "stopped")
    if request.chosen_way is None:
        return _step(
            "Choose the way: F4, then / and its digit, then Enter.",
            "The verdict is kept for the way you choose.",
            "ask",
        )
    place = request.at or request.swap or "board"
    if place not in found.places:
        return _log_step(job, circuit_id, now, place)
    return _step(
        AFTER[1].words.format(place=name_of(job, place)),
        "Proved dead there. Cut only what you have proved dead at the cut.",
        "work",
        place=place,
        circuit=circuit_id,
    )


def _after(
    job: Job,
    circuit_id: str,
    found: CircuitState,
    now: datetime,
    request: Request,
    verdict: Verdict | None,
) -> NextStep:
    del verdict
    due = [(test, place) for test, place, taken in after_work(job, request) if taken is None]
    dead = [item for item in due if TESTS[item[0]].state == "dead"]  # type: ignore[index]
    if dead:
        test, place = dead[0]
        if not found.dead:
            return _log_step(job, circuit_id, now, "board")
        sentence = AFTER[2].words.format(test=TESTS[test].words, place=name_of(job, place))  # type: ignore[index]
        return _step(sentence, "Held against what was foretold before the work.", test, test=test, place=place)
    if outstanding(job, circuit_id):
        return _put_back(job, circuit_id) if found.dead else _log_step(job, circuit_id, now, "board")
    if due and found.word != "live":
        return _step(AFTER[3].words, "Live tests come last, with covers on.", "restored", circuit=circuit_id)
    if due:
        test, place = due[0]
        sentence = AFTER[4].words.format(test=TESTS[test].words, place=name_of(job, place))  # type: ignore[index]
        return _step(sentence, "Held against what was foretold before the work.", test, test=test, place=place)
    if not any(entry.kind == "handed_over" and entry.circuit == circuit_id for entry in job.isolation):
        return _step(AFTER[5].words, "The client has it in writing.", "handed_over", circuit=circuit_id)
    return _step("Nothing left to do here. Keep the record.", "Everything asked for was taken.", "done")


def _abandoned(job: Job, circuit_id: str) -> NextStep:
    if any(entry.kind == "abandoned" and entry.circuit == circuit_id for entry in job.isolation):
        return _step("Left as logged: insulated, closed, locked, told.", "Abandoned on the record.", "done")
    return _step(
        "Insulate dead ends, close, lock, tell in writing; log it: F9.",
        "Leaving it in a known state is a finish too.",
        "abandoned",
        circuit=circuit_id,
    )
