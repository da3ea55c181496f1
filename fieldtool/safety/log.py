"""The isolation log step by step: what comes next, what each step asks, and what is refused."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Literal

from fieldtool.job.isolation import IsolationEntry
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS, IsolationKind, words
from fieldtool.safety.parting import earth_unproved, may_restore
from fieldtool.safety.states import blocked_by, both_poles_needed, sequence, state

__all__ = ["HANDS_S", "Accepted", "LogStep", "Refused", "accept", "early_live", "needs_taken", "steps"]

HANDS_S = 0.7
"""A step cannot be done again, and two steps cannot both be done by hand, within this time [s]."""

Asks = Literal["nothing", "well", "detail", "tester", "volts"]

_ASKS: dict[str, Asks] = {
    "survey_eye": "well",
    "metalwork_checked": "well",
    "permission": "detail",
    "locked": "detail",
    "sources_isolated": "detail",
    "tester_proved_before": "tester",
    "tester_proved_after": "tester",
    "dead_tested": "volts",
}

_NEEDS_BACK = ("restored", "unlocked", "handed_over")
_ANY_TIME = ("left_site", "cover_off", "cover_on", "stopped", "neutral_clamped", "abandoned", "origin_permission")


@dataclass(frozen=True, slots=True)
class LogStep:
    """One step as the log shows it: its digit, its words, what it asks, when it was done, whether it is next."""

    digit: str
    kind: str
    words: str
    asks: Asks
    done_at: datetime | None
    next: bool
    detail: str = ""


@dataclass(frozen=True, slots=True)
class Accepted:
    """A step that may be logged, as the entry to keep."""

    entry: IsolationEntry


@dataclass(frozen=True, slots=True)
class Refused:
    """A step that may not be logged now: why, and what comes first."""

    sentence: str
    first: str = ""


def steps(job: Job, circuit_id: str, now: datetime, *, place: str = "board") -> tuple[LogStep, ...]:
    """The steps of the log for one circuit at one place, each with the digit that does it."""
    found = state(job, circuit_id, now)
    done = dict(found.done)
    detail = dict(found.detail)
    if found.dead and place not in found.places:
        # Proved elsewhere only: the tester and the dead test are done again here.
        for kind in ("tester_proved_before", "dead_tested", "tester_proved_after"):
            done.pop(kind, None)
    wanted = sequence(job, circuit_id)
    due = next((kind for kind in wanted if kind not in done), "")
    return tuple(
        LogStep(
            str(number % 10),
            kind,
            _words(job, circuit_id, kind, place),
            _ASKS.get(kind, "nothing"),
            done.get(kind),
            kind == due,
            detail.get(kind, ""),
        )
        for number, kind in enumerate(wanted, start=1)
    )


def _words(job: Job, circuit_id: str, kind: str, place: str) -> str:
    if kind == "off":
        return f"{job.circuit(circuit_id).name or circuit_id} off"
    if kind == "dead_tested":
        return f"dead at {job.point_name(place)}: L-N, L-E, N-E"
    return words(kind)


def accept(
    job: Job,
    kind: IsolationKind,
    circuit_id: str | None,
    now: datetime,
    *,
    entry_id: str,
    place: str = "board",
    detail: str = "",
    volts: tuple[float, float, float] | None = None,
    found_well: bool | None = None,
    tester: str = "",
    proving_unit: str = "",
    tick_s: float | None = None,
    last_tick_s: float | None = None,
    by: str | None = None,
) -> Accepted | Refused:
    """Whether one step may be logged now. Out of order it is refused with the reason and what comes first."""
    fast = tick_s is not None and last_tick_s is not None and tick_s - last_tick_s < HANDS_S
    last = job.isolation[-1] if job.isolation else None
    if last is not None and last.kind == kind and last.circuit == circuit_id:
        same = fast or (tick_s is None and now - last.at < timedelta(seconds=HANDS_S))
        if same:
            return Refused("That step was logged a moment ago.")
    if circuit_id is None and kind not in _ANY_TIME:
        return Refused("Choose the circuit first.")
    refused = _refused(job, kind, circuit_id, now, place, volts, found_well, tester, detail)
    if refused is not None:
        return refused
    board = job.circuit(circuit_id).board if circuit_id is not None else None
    return Accepted(
        IsolationEntry(
            id=entry_id,
            kind=kind,
            board=board,
            circuit=circuit_id,
            place=place if kind in ("dead_tested", "cover_off", "cover_on") else None,
            at=now,
            tick_s=tick_s,
            by=by,
            tester=tester,
            proving_unit=proving_unit,
            detail=detail,
            found_well=found_well,
            volts=volts,
            too_fast=fast,
        )
    )


def _refused(
    job: Job,
    kind: IsolationKind,
    circuit_id: str | None,
    now: datetime,
    place: str,
    volts: tuple[float, float, float] | None,
    found_well: bool | None,
    tester: str,
    detail: str,
) -> Refused | None:
    if circuit_id is None or kind in _ANY_TIME:
        return None
    if kind in _NEEDS_BACK:
        return _not_yet_back(job, kind, circuit_id, now)
    if kind == "origin_test_begins":
        done = dict(state(job, circuit_id, now).done)
        ready = "main_switch_off" in done and "locked" in done
        return None if ready else Refused("Main switch off and locked first; the incoming terminals stay live.")
    if kind == "origin_test_ends":
        return None
    board = job.board(job.circuit(circuit_id).board)
    if kind == "main_switch_off" and board.main_switch in ("line_only", "none") and both_poles_needed(job, circuit_id):
        return Refused("The main switch does not cut all poles: isolate ahead of it.")
    wanted = sequence(job, circuit_id)
    if kind == "main_switch_off" and kind not in wanted:
        # Nobody is kept from switching more off than is needed; it takes its place before the lock.
        at = wanted.index("locked")
        wanted = (*wanted[:at], "main_switch_off", *wanted[at:])
    if kind not in wanted:
        return Refused(f"{words(kind)[:1].upper()}{words(kind)[1:]}: not a step of this log.")
    listed = steps(job, circuit_id, now, place=place)
    behind = {step.kind for step in listed if step.done_at is not None}
    before = wanted[: wanted.index(kind)]
    gap = next((step for step in before if step not in behind), None)
    if gap is not None:
        return Refused(f"First: {words(gap)}. {_number(wanted, gap)} comes before {_number(wanted, kind)}.", gap)
    if kind in ("tester_proved_before", "dead_tested"):
        blocked = blocked_by(job, circuit_id)
        if blocked:
            return Refused(blocked, "survey")
    return _incomplete(kind, volts, found_well, tester, detail)


def _not_yet_back(job: Job, kind: IsolationKind, circuit_id: str, now: datetime) -> Refused | None:
    """Why the supply, the lock or the circuit may not be given back yet."""
    if state(job, circuit_id, now).word == "origin_test":
        return Refused("The origin test is not over: earth back and tight first, and log it.", "origin_test_ends")
    why = may_restore(job, circuit_id)
    if why:
        return Refused(why, "put_back")
    if kind == "handed_over" and earth_unproved(job, circuit_id):
        return Refused("The earth was off its bar: one live Zs first proves that it is back.", "zs")
    return None


def _incomplete(
    kind: str,
    volts: tuple[float, float, float] | None,
    found_well: bool | None,
    tester: str,
    detail: str,
) -> Refused | None:
    asks = _ASKS.get(kind, "nothing")
    if asks == "volts":
        if volts is None or any(value < 0 for value in volts):
            return Refused("Type the volts of all three: L-N, L-E, N-E.")
    elif asks == "well" and found_well is None:
        return Refused("Say whether all was well: yes or no.")
    elif asks == "tester" and not tester.strip():
        return Refused("Name the tester.")
    elif asks == "detail" and not detail.strip():
        return Refused("Say who, or which: it stands in the log.")
    return None


def _number(wanted: tuple[str, ...], kind: str) -> str:
    return f"Step {wanted.index(kind) + 1}"


def needs_taken(job: Job, circuit_id: str, test: str, place: str | None, now: datetime, probes: str = "front") -> bool:
    """True where a dead reading is entered while the log does not say that its circuit is proved dead.

    A reading through a closed front needs the circuit dead; one at terminals needs them proved dead themselves.
    """
    if TESTS[test].state != "dead":  # type: ignore[index]
        return False
    found = state(job, circuit_id, now)
    if not found.dead:
        return True
    return probes == "terminals" and place is not None and place not in found.places


def early_live(job: Job, circuit_id: str, test: str) -> str:
    """What to say of a live reading taken before the dead tests are complete; empty where they are."""
    if TESTS[test].state != "live" or test == "zdb":  # type: ignore[index]
        return ""
    taken = {reading.test for reading in job.standing() if reading.circuit == circuit_id and reading.counts}
    if taken & {"r2", "le_cross", "r1_r2"}:
        return ""
    return "The earth is not proved yet: a live test could make metal live. Dead tests first."
