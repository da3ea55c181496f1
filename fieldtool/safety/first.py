"""What comes before a step can be done: the log's own steps, what is parted or joined first, what goes back first."""

from __future__ import annotations

from datetime import datetime

from fieldtool.answers import NextStep
from fieldtool.job.job import Job
from fieldtool.quantities.show import shorten
from fieldtool.safety.budget import NAME_CELLS, fit, name_of
from fieldtool.safety.log import steps
from fieldtool.safety.parting import holds_back, outstanding
from fieldtool.safety.states import CircuitState, blocked_by, state
from fieldtool.safety.tasks import RADIAL, RING, Task

__all__ = ["arranged_first", "back_first", "is_ring", "log_step", "put_back", "step_of", "task_of"]

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


def step_of(sentence: str, why: str, kind: str, **where: str) -> NextStep:
    """A next step whose sentence fits its row."""
    return NextStep(fit(sentence), why, kind, **where)


def log_step(job: Job, circuit_id: str, now: datetime, place: str) -> NextStep:
    """The next step of the isolation log at a place."""
    blocked = blocked_by(job, circuit_id)
    due = next((step for step in steps(job, circuit_id, now, place=place) if step.next), None)
    if due is None or (blocked and due.kind in ("tester_proved_before", "dead_tested")):
        return step_of(blocked or "Log it dead again: F9.", blocked or "The proof no longer holds.", "survey")
    sentence, why = _DO[due.kind]
    circuit = shorten(job.circuit(circuit_id).name or circuit_id, NAME_CELLS)
    found = state(job, circuit_id, now)
    return step_of(
        sentence.format(circuit=circuit, place=name_of(job, place)),
        f"{why} {found.reason}".strip(),
        due.kind,
        place=place,
        circuit=circuit_id,
    )


def is_ring(job: Job, circuit_id: str) -> bool:
    """Whether the tests of a ring are the ones to take: by its end to end readings, else by its label."""
    ends = [r for r in job.standing() if r.circuit == circuit_id and r.test in ("r1", "rn", "r2") and r.counts]
    if any(r.sign == "=" for r in ends):
        return True
    return job.circuit(circuit_id).label_claims != "radial" and not (len(ends) >= 3)


def task_of(table: tuple[Task, ...], test: str) -> Task | None:
    """The task that reads a test; None where the table has none."""
    if test.startswith("ir_"):
        return next(item for item in table if item.key == "insulation")
    return next((item for item in table if item.test == test), None)


def _board_dead_first(job: Job, circuit_id: str, found: CircuitState, now: datetime) -> NextStep:
    """Nothing is parted or joined at the board before the main switch is off and locked, and the board proved dead."""
    if "main_switch_off" in dict(found.done):
        return log_step(job, circuit_id, now, "board")
    name = shorten(job.circuit(circuit_id).name or circuit_id, NAME_CELLS)
    return step_of(
        f"Main switch off, locked, before {name} is parted: F9 +.",
        "A borrowed neutral rises to mains when it is lifted. Incoming terminals stay live.",
        "main_switch_off",
        circuit=circuit_id,
    )


_JOIN_FOR = {"ln_cross": "join_2", "le_cross": "join_3", "r1_r2": "join"}
_NOTHING_JOINED = ("r1", "rn", "r2", "legs", "cpc_to_met")
_RING_PARTED = ("r1", "rn", "r2", "ln_cross", "le_cross")
_RADIAL_PARTED = ("legs", "r1_r2")


def arranged_first(
    job: Job, circuit_id: str, table: tuple[Task, ...], test: str, found: CircuitState, now: datetime
) -> NextStep | None:
    """What has to be taken off, parted or joined before a reading: the first thing that is not as it must be."""
    rows = outstanding(job, circuit_id)
    joined = [row for row in rows if row.sort == "joined"]
    join = next((item for item in (*table, *RADIAL) if item.key == _JOIN_FOR.get(test)), None)
    wanted = {what for what, _ in join.joins} if join is not None else set()
    wrong = [row for row in joined if row.what not in wanted]
    if wrong and (test in _NOTHING_JOINED or test.startswith("ir_") or wanted):
        why = "A join reads as a fault here." if test.startswith("ir_") else "This is read with that join off."
        return step_of(f"Take the join off: {wrong[0].what}: F9 +.", why, "put_back")
    parted = {row.conductor for row in rows if row.sort == "parted"}
    part = table[0]
    tests = _RING_PARTED if table is RING else _RADIAL_PARTED
    first: NextStep | None = None
    if test in tests and not {conductor for _, conductor in part.parts} <= parted:
        first = step_of(part.words, part.why or "Both ends of each conductor are out of the way for this test.", "part")
    elif join is not None and not joined:
        first = step_of(join.words, join.why or "The arrangement that the reading is taken in.", "join")
    if first is not None and found.word != "board_dead":
        return _board_dead_first(job, circuit_id, found, now)
    return first


def back_first(job: Job, circuit_id: str, found: CircuitState, now: datetime) -> NextStep:
    """What is parted or joined goes back before the supply does; the log comes first where it is not dead."""
    return put_back(job, circuit_id) if found.dead else log_step(job, circuit_id, now, "board")


def put_back(job: Job, circuit_id: str) -> NextStep:
    """The first thing that keeps the supply from coming back: a join off and proved open, or what is parted back."""
    rows = holds_back(job, circuit_id)
    mine = rows[0].circuit == circuit_id
    whose = "" if mine else f" of {shorten(job.circuit(rows[0].circuit).name or rows[0].circuit, NAME_CELLS)}"
    if rows[0].sort == "joined":
        return step_of(
            f"Take off {rows[0].what}{whose}; check it open: F9 +.",
            "A join left on is a short circuit when the supply comes back.",
            "put_back",
            circuit=rows[0].circuit,
        )
    parted = {row.conductor for row in rows if row.circuit == rows[0].circuit}
    letters = " ".join(letter for letter, key in (("L", "line"), ("N", "neutral"), ("E", "cpc")) if key in parted)
    what = f"put legs {letters}{whose} back in the way" if letters else f"put back {rows[0].what}{whose}"
    return step_of(
        f"At the board: {what}, then say so: F9 +.",
        "An earth parted and not put back passes every dead ring test.",
        "put_back",
        circuit=rows[0].circuit,
    )
