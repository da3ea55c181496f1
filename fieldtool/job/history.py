"""The history of a job: what its entries add up to, and entries for what a file held before the tool wrote in it."""

from __future__ import annotations

from collections.abc import Iterable
from datetime import datetime
from typing import Any

from pydantic import ValidationError

from fieldtool.job.job import ROW_TABLES, HistoryEntry, Job
from fieldtool.job.place import Site, Supply
from fieldtool.job.rows import Row

__all__ = ["FOUND", "SINGLES", "accounted", "fold"]

FOUND = "as found in the file"
"""Why of entries that stand for what a file held before the tool wrote in it."""

SINGLES: dict[str, type[Site] | type[Supply]] = {"site": Site, "supply": Supply}
"""The rows that stand alone, with their models."""


def fold(history: Iterable[HistoryEntry]) -> dict[str, Any]:
    """What the history says stands now: table -> rows (or the single row), from an empty job.

    Equals the stored state of any job that is open: see ``accounted``.
    """
    state: dict[str, Any] = {name: {} for name in ROW_TABLES}
    for entry in history:
        table, _, row_id = entry.what.partition("/")
        if table in SINGLES:
            state[table] = entry.now
        elif entry.now is None:
            state[table].pop(row_id, None)
        else:
            state[table][row_id] = entry.now
    return state


def accounted(job: Job, *, at: datetime) -> Job:
    """The job with its history completed, so that folding it gives what is stored.

    A file written or edited by hand holds rows that no entry made: each gets one, in one group that is not undone.
    """
    state = fold(job.history)
    first = len(job.history) + 1
    found: list[tuple[str, str | None, str | None]] = []
    for name, model in SINGLES.items():
        row = getattr(job, name)
        told = state.get(name)
        if not _same(model, told, row) and not (told is None and row == model()):
            found.append((name, told, row.model_dump_json()))
    for table, row_model in ROW_TABLES.items():
        known: dict[str, str] = state[table]
        rows = {row.id: row for row in getattr(job, table)}
        found += [(f"{table}/{row_id}", text, None) for row_id, text in known.items() if row_id not in rows]
        found += [
            (f"{table}/{row.id}", known.get(row.id), row.model_dump_json())
            for row in rows.values()
            if not _same(row_model, known.get(row.id), row)
        ]
    if not found:
        return job
    entries = tuple(
        HistoryEntry(n=number, at=at, what=what, was=was, now=now, why=FOUND, group=first)
        for number, (what, was, now) in enumerate(found, start=first)
    )
    return job.model_copy(update={"history": (*job.history, *entries)})


def _same(model: type[Row], text: str | None, row: Row) -> bool:
    if text is None:
        return False
    if text == row.model_dump_json():
        return True
    try:
        return model.model_validate_json(text) == row
    except ValidationError:
        # An entry of an older make: what it became is told by an entry of its own.
        return False
