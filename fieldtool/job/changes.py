"""Changes to a job: each validated, written into the history, and undone by a change of its own.

A job is only ever altered here. State rows are put or removed; readings, isolation entries and kept verdicts
are only appended. ``apply`` checks the changed row and the cross-checks; ``inverse`` makes the undoing change.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from datetime import datetime
from typing import Any, cast

from pydantic import ValidationError

from fieldtool.job.history import FOUND, SINGLES
from fieldtool.job.job import ROW_TABLES, HistoryEntry, Job, TableName
from fieldtool.job.rows import Row

__all__ = [
    "APPEND_ONLY",
    "Change",
    "ChangeProblem",
    "Put",
    "Remove",
    "apply",
    "new_ids",
    "redo_changes",
    "redoable",
    "sentence_of",
    "undo_changes",
    "undoable",
]

APPEND_ONLY: frozenset[str] = frozenset({"readings", "isolation", "verdicts"})
"""Tables whose rows are never edited or taken out."""


class ChangeProblem(ValueError):
    """A change that would leave the job unsound; says in one sentence what and where."""


@dataclass(frozen=True, slots=True)
class Put:
    """Put one row: added where its id is new, else in the place of the row with the same id."""

    table: TableName | str
    row: Row


@dataclass(frozen=True, slots=True)
class Remove:
    """Take one row out of a state table."""

    table: TableName
    row_id: str


Change = Put | Remove


def sentence_of(problem: ValidationError | ValueError) -> str:
    """One clear sentence from a validation problem: the field's name and what is wrong with it."""
    if not isinstance(problem, ValidationError):
        return str(problem)
    first = problem.errors()[0]
    path = "/".join(str(part) for part in first["loc"])
    said = str(first["msg"]).removeprefix("Value error, ")
    said = said[:1].lower() + said[1:] if said[1:2].islower() else said
    return f"{path}: {said}" if path else said


def new_ids(job: Job, prefixes: Sequence[str]) -> tuple[Job, tuple[str, ...]]:
    """Fresh ids, one for each prefix, and the job whose counter has moved past them."""
    number = job.about.next_id
    taken = {row.id for table in ROW_TABLES for row in getattr(job, table)}
    taken |= {outlet.id for _, outlet in job.new_outlets()}
    ids = []
    for prefix in prefixes:
        while f"{prefix}{number}" in taken:
            number += 1
        ids.append(f"{prefix}{number}")
        number += 1
    about = job.about.model_copy(update={"next_id": number})
    return job.model_copy(update={"about": about}), tuple(ids)


def apply(job: Job, changes: Iterable[Change], *, at: datetime, by: str = "", why: str = "") -> Job:
    """The job after these changes, as one entry of the history.

    All of them are accepted or none. Raises ChangeProblem when a row is not valid, a row of an append-only table
    would be edited, or the job would no longer hang together.
    """
    return _commit(job, tuple(changes), at=at, by=by, why=why, undoes=None)


def _commit(job: Job, changes: tuple[Change, ...], *, at: datetime, by: str, why: str, undoes: int | None) -> Job:
    if not changes:
        return job
    history = list(job.history)
    first = len(history) + 1
    values: dict[str, Any] = {}
    for change in changes:
        was, now, what = _edit(job, values, change)
        if was == now:
            continue
        history.append(
            HistoryEntry(
                n=len(history) + 1,
                at=at,
                by=by,
                what=what,
                was=was,
                now=now,
                why=why,
                undoes=undoes if len(history) + 1 == first else None,
                group=first,
            )
        )
    if len(history) + 1 == first:
        return job
    values["history"] = tuple(history)
    try:
        # Fields are passed as validated models, so only the cross-checks run again on what did not change.
        return Job(**{name: values.get(name, getattr(job, name)) for name in Job.model_fields})
    except ValidationError as problem:
        raise ChangeProblem(sentence_of(problem)) from problem


def _edit(job: Job, values: dict[str, Any], change: Change) -> tuple[str | None, str | None, str]:
    if isinstance(change, Put):
        try:
            row = type(change.row).model_validate_json(change.row.model_dump_json())
        except ValidationError as problem:
            raise ChangeProblem(f"{change.table}/{change.row.id}: {sentence_of(problem)}") from problem
        if change.table in SINGLES:
            if not isinstance(row, SINGLES[change.table]):
                raise ChangeProblem(f"{change.table}: takes a {SINGLES[change.table].__name__}")
            old: Row = values.get(change.table, getattr(job, change.table))
            values[change.table] = row
            return old.model_dump_json(), row.model_dump_json(), change.table
        table = cast(TableName, change.table)
        if not isinstance(row, ROW_TABLES[table]):
            raise ChangeProblem(f"{table}: takes rows of {ROW_TABLES[table].__name__}")
        rows: tuple[Row, ...] = values.get(table, getattr(job, table))
        before = next((old for old in rows if old.id == row.id), None)
        if before is None:
            values[table] = (*rows, row)
            return None, row.model_dump_json(), f"{table}/{row.id}"
        if table in APPEND_ONLY:
            raise ChangeProblem(f"{table}/{row.id}: is never overwritten; add a row that corrects it")
        values[table] = tuple(row if old.id == row.id else old for old in rows)
        return before.model_dump_json(), row.model_dump_json(), f"{table}/{row.id}"
    if change.table in APPEND_ONLY:
        raise ChangeProblem(f"{change.table}/{change.row_id}: is never taken out; add a row that corrects it")
    rows = values.get(change.table, getattr(job, change.table))
    gone = next((old for old in rows if old.id == change.row_id), None)
    if gone is None:
        raise ChangeProblem(f"{change.table}/{change.row_id}: is not in the job")
    values[change.table] = tuple(old for old in rows if old.id != change.row_id)
    return gone.model_dump_json(), None, f"{change.table}/{change.row_id}"


def _row_from(what: str, text: str) -> tuple[str, Row]:
    table = what.split("/", 1)[0]
    model = SINGLES.get(table) or ROW_TABLES[cast(TableName, table)]
    return table, model.model_validate_json(text)


def _groups(job: Job) -> list[list[HistoryEntry]]:
    groups: dict[int, list[HistoryEntry]] = {}
    for entry in job.history:
        groups.setdefault(entry.group or entry.n, []).append(entry)
    return list(groups.values())


def _can_be_undone(group: Sequence[HistoryEntry]) -> bool:
    return all(
        entry.what.split("/", 1)[0] not in ("isolation", "parted", "verdicts") and entry.why != FOUND for entry in group
    )


def undoable(job: Job) -> tuple[int, ...]:
    """Group numbers that an undo would take back, newest last.

    Computed from the history alone, so it survives quitting. Isolation entries, things parted and kept verdicts
    are not undone: the log is only struck through, and what is parted is put back, not forgotten.
    """
    done: list[int] = []
    undone: list[int] = []
    for group in _groups(job):
        number = group[0].group or group[0].n
        undoes = group[0].undoes
        if undoes is None:
            if _can_be_undone(group):
                done.append(number)
                undone.clear()
        elif undoes in done:
            done.remove(undoes)
            undone.append(number)
        elif undoes in undone:
            undone.remove(undoes)
            done.append(number)
    return tuple(done)


def redoable(job: Job) -> tuple[int, ...]:
    """Group numbers of undoings that a redo would take back, newest last; a new entry clears them."""
    undone: list[int] = []
    done: set[int] = set()
    for group in _groups(job):
        number = group[0].group or group[0].n
        undoes = group[0].undoes
        if undoes is None:
            if _can_be_undone(group):
                done.add(number)
                undone.clear()
        elif undoes in undone:
            undone.remove(undoes)
            done.add(number)
        elif undoes in done:
            done.discard(undoes)
            undone.append(number)
    return tuple(undone)


def undo_changes(job: Job, *, at: datetime, by: str = "") -> Job | None:
    """The job with its newest undoable entry taken back by a new entry; None when nothing can be undone."""
    done = undoable(job)
    return _take_back(job, done[-1], at=at, by=by, why="undo") if done else None


def redo_changes(job: Job, *, at: datetime, by: str = "") -> Job | None:
    """The job with its newest undoing taken back by a new entry; None when nothing can be redone."""
    undone = redoable(job)
    return _take_back(job, undone[-1], at=at, by=by, why="redo") if undone else None


def _take_back(job: Job, number: int, *, at: datetime, by: str, why: str) -> Job | None:
    """The job with one group of changes taken back; None where later entries still stand on what it made."""
    group = next(group for group in _groups(job) if (group[0].group or group[0].n) == number)
    changes: list[Change] = []
    for entry in reversed(group):
        table, _, row_id = entry.what.partition("/")
        if table == "readings":
            job, change = _withdrawal(job, entry, at)
            changes.append(change)
        elif entry.was is None:
            changes.append(Remove(cast(TableName, table), row_id))
        else:
            changes.append(Put(*_row_from(entry.what, entry.was)))
    try:
        return _commit(job, tuple(changes), at=at, by=by, why=why, undoes=number)
    except ChangeProblem:
        return None


def _withdrawal(job: Job, entry: HistoryEntry, at: datetime) -> tuple[Job, Change]:
    """A reading is never erased: a new row withdraws it, and brings back the one it had corrected or withdrawn."""
    from fieldtool.job.reading import Reading

    reading = Reading.model_validate_json(entry.now or "")
    job, (row_id,) = new_ids(job, ["m"])
    back = next((row for row in job.readings if row.id in (reading.replaces, reading.withdraws)), None)
    if back is None or back.withdraws is not None:
        row = reading.model_copy(
            update={"id": row_id, "withdraws": reading.id, "replaces": None, "at": at, "set_aside": "undone"}
        )
    else:
        row = back.model_copy(update={"id": row_id, "replaces": reading.id, "withdraws": None})
    return job, Put("readings", row)
