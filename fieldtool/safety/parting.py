"""What is parted or joined, what may be, and what must be back before anything is energised."""

from __future__ import annotations

from datetime import datetime

from fieldtool.job.isolation import Parted
from fieldtool.job.job import Job
from fieldtool.job.kinds import PartedSort
from fieldtool.safety.states import CircuitState, state

__all__ = ["earth_unproved", "holds_back", "may_part", "may_restore", "outstanding"]

_ORDER = {"joined": 0, "parted": 1}


def outstanding(job: Job, circuit_id: str | None = None) -> tuple[Parted, ...]:
    """What is parted or joined now, worst first: a join before a parting, an earth before the rest, oldest first."""
    rows = [row for row in job.parted if row.back_at is None and circuit_id in (None, row.circuit)]
    return tuple(sorted(rows, key=lambda row: (_ORDER[row.sort], row.conductor != "cpc", row.at)))


def holds_back(job: Job, circuit_id: str | None) -> tuple[Parted, ...]:
    """What keeps the supply of a circuit from coming back: all that is parted or joined on its board.

    Its board's other circuits count too, because a board that was off comes back whole; not one that was given up
    on the record, with its dead ends closed off.
    """
    if circuit_id is None:
        return outstanding(job)
    board = job.circuit(circuit_id).board
    given_up = {entry.circuit for entry in job.isolation if entry.kind == "abandoned"}
    return tuple(
        row
        for row in outstanding(job)
        if row.circuit == circuit_id or (job.circuit(row.circuit).board == board and row.circuit not in given_up)
    )


def may_part(job: Job, circuit_id: str, what: str, sort: PartedSort, now: datetime, place: str = "board") -> str:
    """Why something may not be parted or joined now; empty where it may.

    At the board the main switch is off and locked, or the neutral clamped and proved since the circuit went off,
    because a borrowed neutral rises to mains when it is lifted.
    """
    found = state(job, circuit_id, now)
    if not found.dead:
        return "Not proved dead: nothing is parted or joined. Log it dead first."
    if place != "board":
        return "" if place in found.places else f"{job.point_name(place)} is not proved dead: prove it there first."
    if found.word != "board_dead" and not _clamped(job, circuit_id, found):
        return "At the board: main switch off and locked first, or the neutral clamped and proved."
    if any(row.what == what and row.sort == sort for row in outstanding(job, circuit_id)):
        return f"{what}: already {sort}."
    return ""


def _clamped(job: Job, circuit_id: str, found: CircuitState) -> bool:
    """Whether no current was found in the circuit's neutral since it was switched off for the proof that holds."""
    off = dict(found.done).get("off")
    struck = {entry.strikes for entry in job.isolation}
    return off is not None and any(
        entry.kind == "neutral_clamped"
        and entry.circuit == circuit_id
        and entry.id not in struck
        and entry.at >= off
        and entry.found_well is not False
        for entry in job.isolation
    )


def may_restore(job: Job, circuit_id: str | None) -> str:
    """Why the supply may not come back yet; empty where it may."""
    rows = holds_back(job, circuit_id)
    if not rows:
        return ""
    first = rows[0]
    said = "take the join off" if first.sort == "joined" else "put back"
    return f"Still {first.sort}: {first.what}. {said[:1].upper()}{said[1:]} and say so before it goes on."


def earth_unproved(job: Job, circuit_id: str) -> bool:
    """True from the moment a circuit's earth is said to be back on its bar until a reading proves that it is.

    Both its ends joined to each other but off the bar pass every dead ring test; one live Zs, or the earth read to
    the main earthing terminal, does not.
    """
    back = max(
        (row.back_at for row in job.parted if row.circuit == circuit_id and row.conductor == "cpc" and row.back_at),
        default=None,
    )
    if back is None:
        return False
    return not any(
        reading.circuit == circuit_id and reading.test in _PROVES_EARTH and reading.counts and reading.at >= back
        and reading.sign == "="
        for reading in job.standing()
    )  # fmt: skip


_PROVES_EARTH = ("zs", "cpc_to_met")
