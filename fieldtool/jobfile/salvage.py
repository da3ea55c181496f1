"""What can still be read in a damaged job file, row by row, and how it differs from the copy that was opened.

Nothing salvaged is taken over: its seal does not hold, so a flipped digit would look like a reading. It is told,
so that the person can look at it and enter it again.
"""

from __future__ import annotations

import re

from pydantic import ValidationError

from fieldtool.job.job import ROW_TABLES, Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.reading import Reading
from fieldtool.job.rows import Row
from fieldtool.quantities.show import plain, shorten

__all__ = ["UNREADABLE", "Rows", "differences", "rows_of", "salvage"]

Rows = dict[str, dict[str, Row]]
"""Table name -> row id -> row."""

UNREADABLE = "What the damaged file held beyond this cannot be read."

_TABLE = re.compile(rb'^ "(\w{1,20})": \{$')
_ROW = re.compile(rb'^  "\d{1,9}": (\{.*\}),?$')


def rows_of(job: Job) -> Rows:
    """Every row of a job by table and id."""
    return {table: {row.id: row for row in getattr(job, table)} for table in ROW_TABLES}


def salvage(data: bytes) -> Rows:
    """The rows that still read as rows in the bytes of a job file, whatever happened to the rest of it."""
    found: Rows = {table: {} for table in ROW_TABLES}
    table = ""
    for line in data.splitlines():
        if header := _TABLE.match(line):
            table = header.group(1).decode()
        elif table in ROW_TABLES and (body := _ROW.match(line)):
            try:
                row = ROW_TABLES[table].model_validate_json(body.group(1))
            except ValidationError:
                continue
            found[table][row.id] = row
    return found


def differences(opened: Job, damaged: Rows) -> tuple[str, ...]:
    """One line for each row that stands otherwise in the damaged file than in the job that was opened.

    Rows that the damaged file lacks are not told: the opened copy holds them. Where nothing at all could be read
    of the damaged file, that is the one line.
    """
    if not any(damaged.values()):
        return (UNREADABLE,)
    known = rows_of(opened)
    return tuple(
        _said(opened, table, row, known[table].get(row_id))
        for table, rows in damaged.items()
        for row_id, row in rows.items()
        if known[table].get(row_id) != row
    )


def _said(job: Job, table: str, row: Row, here: Row | None) -> str:
    """One difference in words: what, where, as it stood there, as it stands here."""
    if isinstance(row, Reading):
        where = f" at {shorten(plain(job.point_name(row.point)), 20)}" if row.point else ""
        what = f"{TESTS[row.test].words}{where}"
        there, now = _shown(row), _shown(here) if isinstance(here, Reading) else "not here"
    else:
        name = getattr(row, "name", "") or row.id
        what = f"{table.replace('_', ' ')}: {shorten(plain(name), 30)}"
        there, now = "there otherwise", "as it was before" if here is not None else "not here"
    when = f" ({row.at.astimezone().strftime('%H:%M')})" if isinstance(row, Reading) else ""
    return f"{what}: {there}{when}; {now}"


def _shown(row: Reading) -> str:
    return plain(row.raw or row.answer or row.why_not or "taken back")
