"""``fieldtool review``: every job in a folder and below, a row each; files are only ever read.

Exit code: the worst of the jobs', in the order in which ``fieldtool verdict`` weighs them: 2, 3, 4, 0.
"""

from __future__ import annotations

import json
from argparse import Namespace
from collections.abc import Iterable, Iterator
from datetime import UTC, datetime
from functools import partial
from itertools import chain, islice
from pathlib import Path
from typing import TYPE_CHECKING, Any, TextIO

from fieldtool.commands.arguments import Parser, Usage
from fieldtool.jobfile.opening import read_job
from fieldtool.jobfile.problems import JobFileProblem
from fieldtool.jobfile.tree import Found, job_files

if TYPE_CHECKING:
    from fieldtool.commands.review_print import Tally

__all__ = ["review_one", "run"]

EXAMPLE = """example: fieldtool review ~/jobs --csv > jobs.csv

Every job is judged afresh by today's rules: the way that was chosen, else the best one. A verdict that was kept is
held against the same way judged now, rule by rule and place by place. Files are read, never written, locked or set
aside; hidden ones are left alone, and no link is followed out of the folder. A file that cannot be read is a row.
The isolation state is the log's at this moment; NOT KNOWN is treated as live.

Exit code: 2 some file or the command is not usable; else 3 some proposal must stop; else 4 readings are missing,
nothing is proposed or there is no job; else 0. This review does not replace looking at the job."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Review a tree of jobs; returns the exit code."""
    parser = Parser("review", "Review every job in a folder and below.", EXAMPLE)
    parser.add_argument("folder", help="the folder of job files")
    shape = parser.add_mutually_exclusive_group()
    shape.add_argument("--json", action="store_true", help="print JSON (fieldtool-review/1)")
    shape.add_argument("--csv", action="store_true", help="print CSV, one row a job")
    where = parser.add_mutually_exclusive_group()
    where.add_argument("--cores", type=int, metavar="N", help="work on so many cores (all of them)")
    where.add_argument(
        "--scheduler", metavar="ADDRESS", help="work on a Dask cluster whose workers see the folder under the same path"
    )
    try:
        given = parser.parse_args(args)
        if given.cores is not None and given.cores < 1:
            raise Usage("--cores takes a number from 1 up")
        return _review(given, out, err)
    except Usage as problem:
        return _problem("usage", str(problem), "--json" in args, out, err)
    except JobFileProblem as problem:
        return _problem(problem.code, problem.sentence, "--json" in args, out, err)


def _problem(code: str, sentence: str, as_json: bool, out: TextIO, err: TextIO) -> int:
    if as_json:
        said = {"contract": "fieldtool-review/1", "error": {"code": code, "sentence": sentence}}
        out.write(json.dumps(said, ensure_ascii=False) + "\n")
    err.write(f"fieldtool review: {sentence}\n")
    return 2


def _review(given: Namespace, out: TextIO, err: TextIO) -> int:
    from fieldtool.commands.review_print import FORMS, Tally

    folder, now = Path(given.folder), datetime.now(UTC)
    total = sum(1 for _ in job_files(folder)) if err.isatty() else None
    tally = Tally(now)
    rows = _rows(folder, now, given.cores, given.scheduler)
    # The first row before the first byte: a folder or a cluster that is not there is said, not half printed.
    rows = chain(list(islice(rows, 1)), rows)
    form = "json" if given.json else "csv" if given.csv else "text"
    FORMS[form](_watched(_tallied(rows, tally), total, out, err), tally, out)
    if not tally.files:
        err.write("fieldtool review: there is no job file in this folder.\n")
    return tally.exit


def review_one(folder: Path, now: datetime, found: Found) -> dict[str, Any]:
    """The row of one file; whatever is wrong with it is in the row, and nothing is raised."""
    from fieldtool.mishap import keep
    from fieldtool.quantities.show import plain
    from fieldtool.record.review import job_row, problem_row
    from fieldtool.reference.load import ReferenceProblem

    name = plain(found.name)
    if found.problem is not None:
        return problem_row(name, found.problem.code, found.problem.sentence)
    try:
        return job_row(name, read_job(folder / found.name), now)
    except JobFileProblem as problem:
        return problem_row(name, problem.code, problem.sentence)
    except ReferenceProblem as problem:
        return problem_row(name, "not-in-the-tables", f"The job names what no table has: {problem}.")
    except Exception as problem:
        kept = keep(problem)
        where = f" What happened is kept in {kept.name} in the log folder." if kept is not None else ""
        return problem_row(name, "not-judged", f"It could not be judged, by a fault of this tool.{where}")


def _lost(found: Found) -> dict[str, Any]:
    from fieldtool.quantities.show import plain
    from fieldtool.record.review import problem_row

    return problem_row(plain(found.name), "not-judged", "It could not be judged: the process that read it ended.")


def _rows(folder: Path, now: datetime, helpers: int | None, scheduler: str | None) -> Iterator[dict[str, Any]]:
    from fieldtool.commands import spread

    each = partial(review_one, folder.resolve(), now)
    if scheduler is not None:
        return spread.on_cluster(each, job_files(folder), _lost, scheduler)
    return spread.over_cores(each, job_files(folder), _lost, helpers=helpers)


def _tallied(rows: Iterable[dict[str, Any]], tally: Tally) -> Iterator[dict[str, Any]]:
    for row in rows:
        tally.counts[row["exit"]] += 1
        yield row


def _watched(rows: Iterable[dict[str, Any]], total: int | None, out: TextIO, err: TextIO) -> Iterator[dict[str, Any]]:
    """The rows, with a bar of progress beside them where a person looks on."""
    if total is None:
        yield from rows
        return
    from tqdm import tqdm

    # No watching thread: the bar moves when a row comes, and at no other time.
    tqdm.monitor_interval = 0
    with tqdm(total=total, unit="job", file=err, leave=False, dynamic_ncols=True) as bar:
        for row in rows:
            with bar.external_write_mode(file=out):
                yield row
            bar.update()
