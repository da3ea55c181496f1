"""``fieldtool history``: who entered what when, and what it replaced."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any, TextIO

from fieldtool.commands.arguments import Parser, Usage
from fieldtool.job.job import HistoryEntry, Job
from fieldtool.jobfile.opening import read_job
from fieldtool.jobfile.problems import JobFileProblem
from fieldtool.quantities.show import plain, shorten
from fieldtool.record.private import LEFT_OUT, their_words

__all__ = ["run"]

EXAMPLE = """example: fieldtool history kitchen.json

Exit code: 0 printed; 2 the file or the command is not usable."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Print a job's history, oldest first; returns the exit code: 0 printed, 2 the file is not usable."""
    parser = Parser("history", "Print who entered what when, and what it replaced.", EXAMPLE)
    parser.add_argument("file", help="the job file")
    parser.add_argument("--json", action="store_true", help="print JSON")
    parser.add_argument("--without-customer", action="store_true", help="leave out what was entered of the customer")
    try:
        given = parser.parse_args(args)
        job = read_job(Path(given.file))
        if given.without_customer:
            found = their_words(job)
            job = job.model_copy(update={"history": tuple(_left_out(entry, found) for entry in job.history)})
    except Usage as problem:
        err.write(f"fieldtool history: {problem}\n")
        return 2
    except JobFileProblem as problem:
        err.write(f"fieldtool history: {problem.sentence}\n")
        return 2
    if given.json:
        out.write(
            json.dumps([entry.model_dump(mode="json") for entry in job.history], ensure_ascii=False, indent=1) + "\n"
        )
        return 0
    if not job.history:
        out.write("Nothing was entered through the tool yet: the file was written by hand.\n")
    for entry in job.history:
        out.write(_line(job, entry) + "\n")
    return 0


_THEIRS = ("site", "people/", "isolation/")
"""What entries of the history can name the customer or say where they live."""


def _left_out(entry: HistoryEntry, found: re.Pattern[str] | None) -> HistoryEntry:
    """An entry without its content, where that can tell of the customer; that it was made stays."""
    if entry.what.startswith(_THEIRS):
        return entry.model_copy(update={"was": entry.was and _BARE, "now": entry.now and _BARE})
    if found is None:
        return entry
    was, now = (text and found.sub(LEFT_OUT, text) for text in (entry.was, entry.now))
    return entry.model_copy(update={"was": was, "now": now})


_BARE = json.dumps({"content": LEFT_OUT})


def _line(job: Job, entry: HistoryEntry) -> str:
    when = f"{entry.at.astimezone():%Y-%m-%d %H:%M:%S}"
    who = next((person.name for person in job.people if person.id == entry.by), entry.by or "-")
    why = f" ({entry.why})" if entry.why else ""
    return plain(f"{entry.n:>4}  {when}  {who}  {entry.what}{why}: {_said(entry)}")


def _said(entry: HistoryEntry) -> str:
    was: dict[str, Any] = json.loads(entry.was) if entry.was else {}
    now: dict[str, Any] = json.loads(entry.now) if entry.now else {}
    if not now:
        return "taken out"
    if not was:
        kept = {
            key: value for key, value in now.items() if value not in (None, "", [], False) and key not in ("id", "at")
        }
        return shorten(", ".join(f"{key} {_value(value)}" for key, value in kept.items()), 160)
    changed = [key for key in now if was.get(key) != now[key]]
    return shorten(", ".join(f"{key} was {_value(was.get(key))}, now {_value(now[key])}" for key in changed), 160)


def _value(value: Any) -> str:
    if isinstance(value, dict | list):
        return json.dumps(value, ensure_ascii=False)
    return "not known" if value is None or value == "" else str(value)
