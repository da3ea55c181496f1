"""What is parted or joined, what may be, and what must be back before anything is energised."""

from __future__ import annotations

from datetime import datetime

from fieldtool.job.isolation import Parted
from fieldtool.job.job import Job
from fieldtool.job.kinds import PartedSort
from fieldtool.safety.states import state

__all__ = ["may_part", "may_restore", "outstanding"]

_ORDER = {"joined": 0, "parted": 1}


def outstanding(job: Job, circuit_id: str | None = None) -> tuple[Parted, ...]:
    """What is parted or joined now, worst first: a join before a parting, an earth before the rest, oldest first."""
    rows = [row for row in job.parted if row.back_at is None and circuit_id in (None, row.circuit)]
    return tuple(sorted(rows, key=lambda row: (_ORDER[row.sort], row.conductor != "cpc", row.at)))


def may_part(job: Job, circuit_id: str, what: str, sort: PartedSort, now: datetime, place: str = "board") -> str:
    """Why something may not be parted or joined now; empty where it may.

    At the board the main switch is off and locked, or the neutral clamped and proved, because a borrowed neutral
    rises to mains when it is lifted.
    """
    found = state(job, circuit_id, now)
    if not found.dead:
        return "Not proved dead: nothing is parted or joined. Log it dead first."
    if place != "board":
        return "" if place in found.places else f"{job.point_name(place)} is not proved dead: prove it there first."
    clamped = any(
        entry.kind == "neutral_clamped" and entry.circuit == circuit_id and found.proved_at is not None
        for entry in job.isolation
    )
    if found.word != "board_dead" and not clamped:
        return "At the board: main switch off and locked first, or the neutral clamped and proved."
    if any(row.what == what and row.sort == sort for row in outstanding(job, circuit_id)):
        return f"{what}: already {sort}."
    return ""


def may_restore(job: Job, circuit_id: str | None) -> str:
    """Why the supply may not come back yet; empty where it may."""
    rows = outstanding(job, circuit_id)
    if not rows:
        return ""
    first = rows[0]
    said = "take the join off" if first.sort == "joined" else "put back"
    return f"Still {first.sort}: {first.what}. {said[:1].upper()}{said[1:]} and say so before it goes on."
