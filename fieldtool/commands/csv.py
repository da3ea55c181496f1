"""``fieldtool csv``: readings and findings out as CSV, readings in from CSV."""

from __future__ import annotations

from pathlib import Path
from typing import TextIO

from fieldtool.commands.arguments import Parser, Usage
from fieldtool.jobfile.opening import read_job
from fieldtool.jobfile.problems import JobFileProblem

__all__ = ["run"]

_EXAMPLE = """example: fieldtool csv out kitchen.json -o readings.csv
         fieldtool csv out kitchen.json --what findings -o findings.csv
         fieldtool csv in kitchen.json readings.csv

Out: a file that is there already is never overwritten. In: every row is taken or none; a bad row is named with its
line. Rows need test and value with unit (or answer, or why_not), and circuit, point or board; any other column may
be missing. A row with an id that the job has is passed over where it is the same, else refused.
A text that a spreadsheet could take for a formula has an apostrophe before it, and loses it again on the way in.
Exit code: 0 written or taken in; 2 not usable, and nothing was changed.

columns of readings:
{readings}

columns of findings:
{findings}"""


def _example() -> str:
    from fieldtool.record.csv_out import FINDING_COLUMNS, READING_COLUMNS

    def listed(columns: dict[str, str]) -> str:
        return "\n".join(f"  {name:<12} {words}" for name, words in columns.items())

    return _EXAMPLE.format(readings=listed(READING_COLUMNS), findings=listed(FINDING_COLUMNS))


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Write or take in CSV; returns the exit code: 0 done, 2 not usable, and then nothing was changed."""
    from fieldtool.record.csv_in import CsvProblem
    from fieldtool.record.paper import PaperProblem

    parser = Parser("csv", "Write readings or findings as CSV, or take readings in from CSV.", _example())
    parser.add_argument("direction", choices=("out", "in"), help="out of the job, or into it")
    parser.add_argument("file", help="the job file")
    parser.add_argument("rows", nargs="?", help="in: the CSV file with the readings")
    parser.add_argument("-o", "--output", help="out: where the CSV goes")
    parser.add_argument("--what", choices=("readings", "findings"), default="readings", help="out: which (readings)")
    parser.add_argument("--without-customer", action="store_true", help="out: leave out what names the customer")
    try:
        given = parser.parse_args(args)
        if given.direction == "out":
            if given.output is None or given.rows is not None:
                raise Usage("say where it goes with -o; see fieldtool csv --help")
            out.write(_out(Path(given.file), Path(given.output), given.what, customer=not given.without_customer))
        else:
            if given.rows is None or given.output is not None or given.without_customer or given.what != "readings":
                raise Usage("name the job file and the CSV file, nothing else; see fieldtool csv --help")
            out.write(_in(Path(given.file), Path(given.rows)))
    except Usage as problem:
        err.write(f"fieldtool csv: {problem}\n")
        return 2
    except JobFileProblem as problem:
        err.write(f"fieldtool csv: {problem.sentence}\n")
        return 2
    except PaperProblem as problem:
        err.write(f"fieldtool csv: {problem}.\n")
        return 2
    except CsvProblem as problem:
        err.write(f"fieldtool csv: {str(problem).removesuffix('.')}. Nothing was taken in.\n")
        return 2
    return 0


def _out(path: Path, target: Path, what: str, *, customer: bool) -> str:
    from fieldtool.record.csv_out import findings_csv, readings_csv
    from fieldtool.record.paper import PaperProblem, put_new
    from fieldtool.record.private import without_customer
    from fieldtool.reference.load import ReferenceProblem

    job = read_job(path)
    job = job if customer else without_customer(job)
    try:
        data = findings_csv(job) if what == "findings" else readings_csv(job)
    except ReferenceProblem as problem:
        raise PaperProblem(f"the job names what no table has: {problem}") from problem
    written = put_new(target, data)
    return f"{target.name}: {what} {'written' if written else 'there already, with the same content'}.\n"


def _in(path: Path, source: Path) -> str:
    from datetime import UTC, datetime

    from fieldtool.record.csv_in import MOST_BYTES, CsvProblem, rows_read
    from fieldtool.visit import Visit
    from fieldtool.visit.taking_in import changes_for, take_in

    try:
        with source.open("rb") as file:
            data = file.read(MOST_BYTES + 1)
    except OSError as problem:
        raise CsvProblem(f"{source.name[:40]} cannot be read") from problem
    rows = rows_read(data)
    # Tried on the job as it stands first, so that a bad row opens nothing and logs nothing.
    tried = changes_for(read_job(path), rows, datetime.now(UTC))
    if not tried.readings:
        return f"{path.name}: nothing new, {tried.there} readings were there already.\n"
    visit = Visit.open(path)
    try:
        if visit.read_only:
            raise CsvProblem(visit.file.holder or "this job is open elsewhere and can only be read")
        taken = take_in(visit, rows)
    finally:
        visit.close()
    waits = sum(not reading.counts for reading in taken.readings)
    more = f" {waits} of them do not count yet or any more: see the readings." if waits else ""
    return f"{path.name}: {len(taken.readings)} readings taken in, {taken.there} were there already.{more}\n"
