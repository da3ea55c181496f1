"""The one door: no arguments or a job file open the app; anything else is a headless command."""

from __future__ import annotations

import importlib
import sys
from pathlib import Path

__all__ = ["main"]

COMMANDS = {
    "verdict": "judge a job file: exit 0 go, 3 stop, 4 more needed, 2 not usable",
    "new": "build a job file from a plain facts file",
    "tables": "print the published tables and where each figure comes from",
    "rules": "print the catalogue of rules",
    "history": "print who entered what when, and what it replaced",
    "mend": "examine a damaged job file and restore a copy of it",
    "record": "write the record of a job as PDF or HTML",
    "csv": "write readings or findings as CSV, or take readings in from CSV",
    "review": "review every job in a folder: what each waits for, what stops it, what changed",
    "schema": "print the JSON Schema of the job file, of the verdict or of the review",
    "completion": "print what makes bash, zsh or fish complete commands and options",
}
"""Headless commands, each a module of ``fieldtool.commands`` with a ``run(args, out, err)``."""

_HELP = """fieldtool: check an addition to an existing socket circuit, where you stand.

  fieldtool                open the app on the shelf of jobs
  fieldtool JOB.json       open the app on one job (samples open as a copy)
{commands}
Every command takes --help. For competent persons; no live work. Figures follow
BS 7671:2018+A2:2022; A4:2026 is in force since 15 October 2026: check against it.
"""


def _help() -> str:
    lines = "".join(f"  fieldtool {name:<14} {words}\n" for name, words in COMMANDS.items())
    return _HELP.format(commands=lines)


def main(argv: list[str] | None = None) -> int:
    """Run the tool; returns the exit code. No traceback ever reaches a user."""
    args = list(sys.argv[1:] if argv is None else argv)
    try:
        return _run(args)
    except KeyboardInterrupt:
        return 130
    except BrokenPipeError:
        # The reader of a pipe went away: nothing is left to say to it.
        sys.stderr.close()
        return 0


def _run(args: list[str]) -> int:
    if args and args[0] in ("-h", "--help", "help"):
        sys.stdout.write(_help())
        return 0
    if args and args[0] == "--version":
        from fieldtool import __version__

        sys.stdout.write(f"fieldtool {__version__}\n")
        return 0
    if args and args[0] in COMMANDS:
        return _command(args[0], args[1:])
    if args and (args[0].startswith("-") or len(args) > 1 or not _is_file_name(args[0])):
        sys.stderr.write(f"fieldtool: {args[0]} is neither a command nor a job file; see fieldtool --help.\n")
        return 2
    if not (sys.stdin.isatty() and sys.stderr.isatty()):
        sys.stderr.write("fieldtool: the app needs a terminal; see fieldtool --help for what runs without one.\n")
        return 2
    app = importlib.import_module("screens.app")
    return int(app.run(Path(args[0]) if args else None))


def _command(name: str, args: list[str]) -> int:
    """Run a headless command; what nobody foresaw ends with 2 and one sentence, and is kept for whoever mends it."""
    try:
        module = importlib.import_module(f"fieldtool.commands.{name}")
        return int(module.run(args, sys.stdout, sys.stderr))
    except BrokenPipeError:
        raise
    except Exception as problem:
        from fieldtool.mishap import keep

        kept = keep(problem)
        where = f"what happened is kept in {kept}" if kept is not None else "its log file could not be written"
        sys.stderr.write(f"fieldtool {name}: stopped by a fault of this tool ({type(problem).__name__}); {where}\n")
        return 2


def _is_file_name(text: str) -> bool:
    return Path(text).suffix == ".json" or Path(text).exists()


if __name__ == "__main__":
    raise SystemExit(main())
