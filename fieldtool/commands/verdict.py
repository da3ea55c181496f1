"""``fieldtool verdict``: judge every proposal of a job file, for people or, with --json, for programs.

Exit code: 2 the file or the command is not usable; else 3 some proposal must stop; else 4 readings are missing or
nothing is proposed; else 0.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any, TextIO

from fieldtool.commands.arguments import Parser, Usage
from fieldtool.jobfile.opening import read_job
from fieldtool.jobfile.problems import JobFileProblem
from fieldtool.reference.load import ReferenceProblem

__all__ = ["run"]

EXAMPLE = """example: fieldtool verdict sample_jobs/larch_row.json --json

Exit code: 2 the file or the command is not usable; else 3 some proposal must stop; else 4 readings are missing or
nothing is proposed; else 0. fieldtool schema verdict says what the JSON looks like."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Judge a job file; returns the exit code."""
    parser = Parser("verdict", "Judge every proposal of a job file.", EXAMPLE)
    parser.add_argument("file", help="the job file")
    parser.add_argument("--circuit", help="only this circuit (its id)")
    parser.add_argument("--json", action="store_true", help="print JSON (fieldtool-verdict/1)")
    as_json = "--json" in args
    try:
        given = parser.parse_args(args)
        job = read_job(Path(given.file))
        from fieldtool.verdict.contract import contract

        body = contract(job, given.circuit)
    except Usage as problem:
        return _problem("usage", str(problem), as_json, out, err)
    except JobFileProblem as problem:
        return _problem(problem.code, problem.sentence, as_json, out, err)
    except ReferenceProblem as problem:
        return _problem("not-in-the-tables", f"The job names what no table has: {problem}.", as_json, out, err)
    except KeyError:
        return _problem("no-such-circuit", f"There is no circuit {given.circuit} in this job.", as_json, out, err)
    if given.json:
        out.write(json.dumps(body, ensure_ascii=False, indent=1, allow_nan=False) + "\n")
    else:
        _print(body, out)
    return int(body["exit"])


def _problem(code: str, sentence: str, as_json: bool, out: TextIO, err: TextIO) -> int:
    if as_json:
        said = {"contract": "fieldtool-verdict/1", "error": {"code": code, "sentence": sentence}}
        out.write(json.dumps(said, ensure_ascii=False) + "\n")
    err.write(f"fieldtool verdict: {sentence}\n")
    return 2


def _print(body: dict[str, Any], out: TextIO) -> None:
    from fieldtool.answers import AS_IT_STANDS, MARKS, VERDICT_WORDS
    from fieldtool.quantities.show import plain

    out.write(f"{body['edition_note']}\n")
    for circuit in body["circuits"]:
        reading = circuit["circuit_reading"]
        name = plain(circuit["name"])
        out.write(f"\n{name}: labelled {circuit['label_claims']}. {reading['sentence'] if reading else ''}\n".rstrip())
        out.write(f"\n  as it stands: {AS_IT_STANDS[circuit['existing']['verdict']]}\n")
        for proposal in circuit["proposals"]:
            word = VERDICT_WORDS[proposal["verdict"]]
            out.write(f"  {proposal['request']} by {proposal['way_words']}: {word}\n")
            for finding in proposal["findings"]:
                if finding["outcome"] in ("broken", "condition", "cannot_tell"):
                    mark = MARKS[finding["outcome"]]
                    out.write(f"    {mark}  {plain(finding['says'])}  ({finding['regulation']})\n")
            for gap in proposal["missing"]:
                out.write(f"    to take: {plain(gap)}\n")
            for room in proposal["headroom"]:
                if room["metres"] is not None:
                    clear = room["metres_clear_of_tolerance"]
                    limit = room["limit"].replace("_", " ")
                    out.write(f"    {limit}: {room['metres']} m more, {clear} m clear of the meter\n")
        if not circuit["proposals"]:
            out.write("  nothing is proposed on this circuit\n")
    if not body["circuits"]:
        out.write("nothing is proposed: the job has no circuit\n")
