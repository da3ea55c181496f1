"""A job and its document: the one place that knows both.

On disk every table is a TinyDB table, ``{"1": row, "2": row, ...}``, in the rows' order; ``about``, ``site`` and
``supply`` are tables of one row. A hand-written file may give plain lists and objects instead, in the job model's
own field names; both are read.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import orjson
from pydantic import ValidationError

from fieldtool.job.changes import sentence_of
from fieldtool.job.job import ROW_TABLES, SCHEMA, Job
from fieldtool.jobfile.problems import JobFileProblem
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
    """A job as bytes. Rows that did not change since the last save are not turned into JSON again."""

    def __init__(self) -> None:
        self._known: dict[int, tuple[Any, Any]] = {}

    def _row(self, row: Any, fresh: dict[int, tuple[Any, Any]]) -> Any:
        kept = self._known.get(id(row))
        if kept is not None and kept[0] is row:
            packed = kept[1]
        else:
            packed = orjson.Fragment(row.model_dump_json(by_alias=True).encode())
        fresh[id(row)] = (row, packed)
        return packed

    def tables(self, job: Job, generation: int) -> dict[str, Any]:
        """Every table as TinyDB keeps it, rows packed, ``about`` with its generation and without its check."""
        fresh: dict[int, tuple[Any, Any]] = {}
        about = job.about.model_copy(update={"schema_version": SCHEMA, "generation": generation, "check": None})
        plain_about = about.model_dump(mode="json", by_alias=True)
        plain_about.pop("check")
        out: dict[str, Any] = {"about": {"1": plain_about}}
        for name in TABLES[1:]:
            value = getattr(job, name)
            rows = value if isinstance(value, tuple) else (value,)
            out[name] = {str(number): self._row(row, fresh) for number, row in enumerate(rows, start=1)}
        self._known = fresh
        return out
