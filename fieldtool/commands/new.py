"""``fieldtool new``: build a job file from a plain facts file, written with the job model's own field names."""

from __future__ import annotations

from datetime import UTC, datetime
from pathlib import Path
from typing import TextIO

from fieldtool.commands.arguments import Parser, Usage
from fieldtool.job.history import accounted
from fieldtool.jobfile.opening import JobFile, read_job
from fieldtool.jobfile.problems import JobFileProblem, SaveProblem

__all__ = ["run"]

EXAMPLE = """example: fieldtool new kitchen.json --from facts.json

fieldtool schema job says which names and values facts may have.
Exit code: 0 made; 2 not made, and why."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Build a job file; returns the exit code: 0 made, 2 not, with one sentence."""
    parser = Parser("new", "Build a job file from a plain facts file.", EXAMPLE)
    parser.add_argument("file", help="the job file to make; it must not exist yet")
    parser.add_argument("--from", dest="facts", required=True, help="facts in JSON, in the job model's field names")
    try:
        given = parser.parse_args(args)
        target = Path(given.file)
        if target.exists():
            raise Usage(f"{target.name} exists already; choose another name, nothing was overwritten")
        job = read_job(Path(given.facts))
        now = datetime.now(UTC)
        JobFile.create(target, accounted(job, at=now), now).close()
    except (Usage, SaveProblem) as problem:
        err.write(f"fieldtool new: {problem}\n")
        return 2
    except JobFileProblem as problem:
        err.write(f"fieldtool new: {problem.sentence}\n")
        return 2
    out.write(f"{target.name}: {len(job.circuits)} circuits, {len(job.readings)} readings\n")
    return 0
