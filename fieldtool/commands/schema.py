"""``fieldtool schema``: what a job file and the JSON of the verdict and the review look like, as JSON Schema."""

from __future__ import annotations

import json
from importlib.resources import files
from typing import Any, TextIO

from fieldtool.commands.arguments import Parser, Usage

__all__ = ["run"]

EXAMPLE = """example: fieldtool schema job > job.schema.json

The schema says which names and values there may be; the tool checks more than a schema can say.
Exit code: 0 printed; 2 the command is not usable."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Print a schema; returns the exit code: 0 printed, 2 the command is not usable."""
    parser = Parser("schema", "Print the JSON Schema of the job file, of the verdict or of the review.", EXAMPLE)
    parser.add_argument(
        "what",
        nargs="?",
        choices=("job", "verdict", "review"),
        default="job",
        help="the job file (without a word), or what verdict --json or review --json prints",
    )
    try:
        given = parser.parse_args(args)
    except Usage as problem:
        err.write(f"fieldtool schema: {problem}\n")
        return 2
    out.write(json.dumps(_schema(given.what), ensure_ascii=False, indent=1) + "\n")
    return 0


def _schema(what: str) -> dict[str, Any]:
    if what == "job":
        from fieldtool.jobfile.schema import job_schema

        return job_schema()
    package, name = {
        "verdict": ("fieldtool.verdict", "contract.schema.json"),
        "review": ("fieldtool.record", "review.schema.json"),
    }[what]
    found: dict[str, Any] = json.loads((files(package) / name).read_text(encoding="utf-8"))
    return found
