"""``fieldtool record``: write the record of a job as PDF or as one HTML page, for re-working by hand."""

from __future__ import annotations

from datetime import UTC, datetime
from pathlib import Path
from typing import TextIO

from fieldtool.commands.arguments import Parser, Usage
from fieldtool.jobfile.opening import read_job
from fieldtool.jobfile.problems import JobFileProblem

__all__ = ["run"]

EXAMPLE = """example: fieldtool record kitchen.json -o kitchen-record.pdf

A file that is there already is never overwritten: with other content in it the command ends with 2.
The job file is only read. Exit code: 0 written, or there already with the same content; 2 not usable."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Write a record; returns the exit code: 0 written, 2 the job, the words or the place to write are not usable."""
    parser = Parser("record", "Write the record of a job as PDF (A4) or as one HTML page.", EXAMPLE)
    parser.add_argument("file", help="the job file")
    parser.add_argument("-o", "--output", required=True, help="where the record goes: a name ending in .pdf or .html")
    parser.add_argument(
        "--without-customer",
        action="store_true",
        help="leave out the job's name, customer, contact and address, occupiers' names and what they said",
    )
    try:
        given = parser.parse_args(args)
        target = Path(given.output)
        job = read_job(Path(given.file))
    except Usage as problem:
        err.write(f"fieldtool record: {problem}\n")
        return 2
    except JobFileProblem as problem:
        err.write(f"fieldtool record: {problem.sentence}\n")
        return 2
    from fieldtool.record.paper import PaperProblem, put_new, record_bytes

    try:
        data = record_bytes(job, target.suffix.lower(), datetime.now(UTC), customer=not given.without_customer)
        written = put_new(target, data)
    except PaperProblem as problem:
        err.write(f"fieldtool record: {problem}.\n")
        return 2
    out.write(f"{target.name}: {'written' if written else 'there already, with the same content'}.\n")
    return 0
