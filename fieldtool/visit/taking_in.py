"""Readings taken in from CSV: all of them or none, checked and kept as if each had been typed."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any

from fieldtool.diagnosis.entry_check import remark
from fieldtool.job.changes import Change, ChangeProblem, Put, apply, new_ids
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.reading import Cell, Reading
from fieldtool.quantities.entry import EntryProblem, parse
from fieldtool.quantities.fields import FIELDS
from fieldtool.record.csv_in import CsvProblem, RowRead, reading_of
from fieldtool.safety.log import needs_taken
from fieldtool.visit.entering import likely_span
from fieldtool.visit.open_job import OpenJob

__all__ = ["TakenIn", "changes_for", "take_in"]

_OURS = {"id", "replaces", "doubt", "confirmed", "needs_taken", "taken"}
"""Fields of a reading that say nothing of what was read."""

WHY = "readings from CSV"


@dataclass(frozen=True, slots=True)
class TakenIn:
    """What a file of readings makes of a job: the job after it, the new readings, and how many were there already."""

    job: Job
    readings: tuple[Reading, ...]
    there: int

    @property
    def changes(self) -> tuple[Change, ...]:
        """The readings as changes to a job."""
        return tuple(Put("readings", reading) for reading in self.readings)


def changes_for(job: Job, rows: Sequence[RowRead], now: datetime) -> TakenIn:
    """The changes that a file's rows make to a job; nothing is changed here.

    A row whose reading is in the job already is passed over. A row without an id is taken as typed: it corrects
    the reading that stands in its cell, it may be doubted, and a dead reading may have to be told when it was
    taken. Raises CsvProblem with the first row that cannot be taken.
    """
    known = {reading.id: reading for reading in job.readings}
    alike = {_said(reading) for reading in job.readings}
    stands: dict[Cell, Reading] = {reading.cell: reading for reading in job.standing()}
    new: list[Reading] = []
    lines: dict[str, int] = {}
    there = 0
    for row in rows:
        row_id = row.values.get("id")
        before = known.get(row_id) if row_id is not None else None
        if before is not None:
            if reading_of(row, at=row.values.get("at", before.at)) != before:
                raise CsvProblem(
                    f"line {row.line}: {row_id} is in the job with another content; a reading is never overwritten. "
                    f"Leave the id out, or name it under replaces."
                )
            there += 1
            continue
        more: dict[str, Any] = {"at": row.values.get("at", now)}
        if row_id is None:
            if "at" in row.values and _said(reading_of(row, id="m", **more)) in alike:
                there += 1
                continue
            job, (more["id"],) = new_ids(job, ["m"])
        reading = _worked_out(job, row, reading_of(row, **more), stands, now, typed=row_id is None)
        if reading.id in lines:
            raise CsvProblem(f"line {row.line}: the id {reading.id} stands in line {lines[reading.id]} already")
        lines[reading.id] = row.line
        stands[reading.cell] = reading
        new.append(reading)
    try:
        after = apply(job, [Put("readings", reading) for reading in new], at=now, why=WHY)
    except ChangeProblem as problem:
        raise CsvProblem(_with_line(str(problem), lines)) from problem
    return TakenIn(after, tuple(new), there)


def _said(reading: Reading) -> str:
    return reading.model_dump_json(exclude=_OURS)


def _worked_out(
    job: Job, row: RowRead, reading: Reading, stands: dict[Cell, Reading], now: datetime, *, typed: bool
) -> Reading:
    """The reading with what the screen would have worked out for it, where the file does not say."""
    more: dict[str, Any] = {}
    if reading.withdraws is not None or reading.origin == "limitation":
        return reading
    if row.ask_doubt and reading.circuit in (None, *(circuit.id for circuit in job.circuits)):
        more["doubt"] = _doubt(job, reading)
    if row.ask_taken and TESTS[reading.test].state == "dead" and reading.circuit is not None:
        known = any(circuit.id == reading.circuit for circuit in job.circuits)
        more["needs_taken"] = known and needs_taken(job, reading.circuit, reading.test, reading.point, now)
    before = stands.get(reading.cell)
    same_place = before is not None and (reading.probes is None or before.probes in (None, reading.probes))
    if typed and reading.replaces is None and before is not None and same_place:
        more["replaces"] = before.id
    return reading.model_copy(update=more)


def _doubt(job: Job, reading: Reading) -> str:
    """What the screen would ask about this value; empty where it would ask nothing."""
    said = remark(job, reading.circuit, reading.point, reading.test, reading.stage, reading.value, reading.sign)
    if said is not None and said.doubt:
        return said.sentence
    key = TESTS[reading.test].field
    if key is None or reading.value is None:
        return ""
    quantity = FIELDS[key]
    number = f"{reading.value / quantity.scale:.9f}".rstrip("0").rstrip(".")
    sign = reading.sign if reading.sign in ("<", ">") else ""
    entry = parse(quantity, f"{sign}{number} {quantity.unit}", likely=likely_span(job, reading.test))
    return entry.sentence if isinstance(entry, EntryProblem) else entry.unlikely or ""


def _with_line(sentence: str, lines: dict[str, int]) -> str:
    """A sentence about a row of the job as one about the line it came from."""
    where, _, rest = sentence.partition(": ")
    row_id = where.removeprefix("readings/")
    if row_id in lines:
        return f"line {lines[row_id]}: {rest}"
    for word in sentence.split():
        if word in lines:
            return f"line {lines[word]}: {sentence}"
    return sentence


def take_in(visit: OpenJob, rows: Sequence[RowRead]) -> TakenIn:
    """Take a file's rows into an open job as one entry of its history. Raises CsvProblem; then nothing was taken."""
    plan = changes_for(visit.job, rows, visit.clock())
    if plan.readings:
        problem = visit.put_all(plan.changes, WHY)
        if problem or visit.save_problem:
            raise CsvProblem(problem or visit.save_problem)
    return plan
