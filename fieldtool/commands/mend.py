"""``fieldtool mend``: look into a job file and its earlier generations, and put a good one beside it as a copy."""

from __future__ import annotations

from datetime import UTC, datetime
from pathlib import Path
from typing import TextIO

from fieldtool.commands.arguments import Parser, Usage
from fieldtool.jobfile.bytes_in import read_bytes
from fieldtool.jobfile.opening import JobFile, Loaded, load
from fieldtool.jobfile.problems import JobFileProblem, SaveProblem
from fieldtool.jobfile.salvage import Rows, differences, rows_of, salvage
from fieldtool.jobfile.swap import generations

__all__ = ["run"]

_MOST_LINES = 20
EXAMPLE = """example: fieldtool mend kitchen.json --restore 1 -o kitchen-mended.json

Without --restore the file and its kept generations are only looked at.
Exit code: 0 the file is good or a copy was made; 2 it is damaged, or nothing could be done."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Examine, report, and restore to a copy; returns the exit code: 0 the file is good or a copy was made, 2 not."""
    parser = Parser("mend", "Look into a damaged job file and restore a copy of it.", EXAMPLE)
    parser.add_argument("file", help="the job file")
    parser.add_argument("--restore", type=int, metavar="N", help="restore generation N (1 is the newest) to a copy")
    parser.add_argument("-o", "--output", help="where the copy goes; never over a file that is there")
    try:
        given = parser.parse_args(args)
        path = Path(given.file)
        if given.restore is not None:
            return _restore(path, given.restore, given.output, out)
        return _examine(path, out)
    except (Usage, SaveProblem) as problem:
        err.write(f"fieldtool mend: {problem}\n")
        return 2
    except JobFileProblem as problem:
        err.write(f"fieldtool mend: {problem.sentence}\n")
        return 2


def _examine(path: Path, out: TextIO) -> int:
    kept = generations(path)
    if not path.exists() and not kept:
        raise JobFileProblem("not-found", f"There is no file {path.name[:40]} here.")
    main = _try(path)
    if isinstance(main, Loaded):
        out.write(f"{path.name}: good, generation {main.generation}, {len(main.job.readings)} readings.\n")
    else:
        out.write(f"{main}\n")
    there = _rows(path, main)
    for number, item in enumerate(kept, start=1):
        found = _try(item)
        if isinstance(found, str):
            out.write(f"  generation {number}: {found}\n")
            continue
        out.write(f"  generation {number}: good, number {found.generation}, {len(found.job.readings)} readings\n")
        lines = differences(found.job, there) if there is not None else ()
        for line in lines[:_MOST_LINES]:
            out.write(f"    only in {path.name}: {line}\n")
        if len(lines) > _MOST_LINES:
            out.write(f"    and {len(lines) - _MOST_LINES} more\n")
    if isinstance(main, Loaded):
        return 0
    if any(isinstance(_try(item), Loaded) for item in kept):
        out.write("Restore one to a copy: --restore N -o NEW.json\n")
    return 2


def _rows(path: Path, main: Loaded | str) -> Rows | None:
    """What the file itself holds, as far as it can be read; None where it is not there."""
    if isinstance(main, Loaded):
        return rows_of(main.job)
    try:
        return salvage(read_bytes(path))
    except JobFileProblem:
        return None


def _try(path: Path) -> Loaded | str:
    try:
        return load(path)
    except JobFileProblem as problem:
        return problem.sentence


def _restore(path: Path, number: int, output: str | None, out: TextIO) -> int:
    kept = generations(path)
    if not 1 <= number <= len(kept):
        raise Usage(f"there are {len(kept)} earlier generations; {number} is not one of them")
    if output is None:
        raise Usage("say where the copy goes: -o NEW.json; nothing is mended in place")
    target = Path(output)
    if target.exists():
        raise Usage(f"{target.name} is there already; nothing was overwritten")
    job = load(kept[number - 1]).job
    JobFile.create(target, job, datetime.now(UTC)).close()
    out.write(f"{target.name}: {len(job.readings)} readings, from generation {number}. {path.name} was not touched.\n")
    return 0
