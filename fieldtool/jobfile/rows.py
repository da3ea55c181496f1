"""A job and its document: the one place that knows both.

On disk every table is a TinyDB table, ``{"1": row, "2": row, ...}``, in the rows' order; ``about``, ``site`` and
``supply`` are tables of one row. A hand-written file may give plain lists and objects instead, in the job model's
own field names; both are read.
"""

from __future__ import annotations

import json
import operator
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from fieldtool.job.changes import sentence_of
from fieldtool.job.job import ROW_TABLES, SCHEMA, Job
from fieldtool.jobfile.problems import JobFileProblem
from fieldtool.jobfile.storage import PackedTable
from fieldtool.quantities.show import plain, shorten

__all__ = ["TABLES", "Serialiser", "job_from", "plain_rows"]

SINGLES = ("about", "site", "supply")
TABLES = (*SINGLES, *ROW_TABLES, "history")


def plain_rows(body: dict[str, Any]) -> dict[str, Any]:
    """A document with its tables as plain lists and objects, whichever of the two forms it came in."""
    out: dict[str, Any] = {}
    for name, value in body.items():
        if name == "_default" and not value:
            continue
        if isinstance(value, dict) and value and all(key.isdecimal() for key in value):
            rows = [value[key] for key in sorted(value, key=int)]
            out[name] = rows[0] if name in SINGLES and len(rows) == 1 else rows
        elif isinstance(value, dict) and not value and name not in SINGLES:
            out[name] = []
        else:
            out[name] = value
    return out


def job_from(body: dict[str, Any], path: Path, *, lenient: bool = False) -> Job:
    """The job in a document of plain rows. Raises JobFileProblem naming the field and the reason.

    ``lenient`` leaves out what a newer make of the tool added, for looking only.
    """
    try:
        text = json.dumps(body, allow_nan=False)
        return Job.model_validate_json(text, extra="ignore" if lenient else None)
    except ValidationError as problem:
        said = shorten(plain(sentence_of(problem)), 90)
        name = shorten(plain(path.name), 24)
        raise JobFileProblem("not-a-job", f"{name}: {said}") from problem
    except (ValueError, RecursionError) as problem:
        raise JobFileProblem("not-a-job", f"{shorten(plain(path.name), 24)} is not a job.") from problem


class Serialiser:
    """A job as text. Rows that did not change since the last save are not turned into JSON again.

    Most saves add a row at the end of a table or two: what stands before it is kept as the text it was.
    """

    def __init__(self) -> None:
        self._packed: dict[str, tuple[tuple[Any, ...], bytearray]] = {}
        self._rows: dict[int, tuple[Any, bytes]] = {}

    def _row(self, number: int, row: Any) -> bytes:
        kept = self._rows.get(id(row))
        if kept is None or kept[0] is not row:
            kept = self._rows[id(row)] = (row, row.model_dump_json(by_alias=True).encode())
        return b'  "%d": %b' % (number, kept[1])

    def _table(self, name: str, rows: tuple[Any, ...]) -> PackedTable:
        before, text = self._packed.get(name, ((), bytearray()))
        if before is not rows:
            # The same rows, not equal ones: two moments may be equal and read differently.
            if len(rows) < len(before) or not all(map(operator.is_, before, rows)):
                before, text = (), bytearray()
            fresh = [self._row(number, row) for number, row in enumerate(rows[len(before) :], start=len(before) + 1)]
            if fresh:
                text += (b",\n" if text else b"") + b",\n".join(fresh)
            self._packed[name] = (rows, text)
        return PackedTable(text)

    def tables(self, job: Job, generation: int) -> dict[str, Any]:
        """Every table as TinyDB keeps it, rows packed, ``about`` with its generation and without its check."""
        about = job.about.model_copy(update={"schema_version": SCHEMA, "generation": generation, "check": None})
        plain_about = about.model_dump(mode="json", by_alias=True)
        plain_about.pop("check")
        out: dict[str, Any] = {"about": {"1": plain_about}}
        for name in TABLES[1:]:
            value = getattr(job, name)
            out[name] = self._table(name, value if isinstance(value, tuple) else (value,))
        if len(self._rows) > 2 * sum(len(rows) for rows, _ in self._packed.values()):
            alive = {id(row) for rows, _ in self._packed.values() for row in rows}
            self._rows = {key: kept for key, kept in self._rows.items() if key in alive}
        return out
