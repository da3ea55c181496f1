"""Bytes that claim to be a job: read strictly, in bounded time and memory, refused in one sentence.

A job file is data. Duplicate keys, numbers that are not finite, deep nesting and huge files are refused here,
before any model sees them.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any, NoReturn

from fieldtool.jobfile.problems import JobFileProblem
from fieldtool.quantities.show import plain, shorten

__all__ = ["MOST_BYTES", "document", "read_bytes"]

MOST_BYTES = 16 * 1024 * 1024
"""A job file larger than this is not opened [bytes]."""


def _name(path: Path) -> str:
    return shorten(plain(path.name), 30)


def read_bytes(path: Path) -> bytes:
    """The bytes of a file, or why it cannot be read."""
    try:
        if path.is_dir():
            raise JobFileProblem("a-directory", f"{_name(path)} is a folder; name a job file in it.")
        if path.exists() and not path.is_file():
            raise JobFileProblem("unreadable", f"{_name(path)} is not a plain file.")
        if path.stat().st_size > MOST_BYTES:
            raise JobFileProblem("too-large", f"{_name(path)} is larger than any job: not opened.")
        data = path.read_bytes()
    except FileNotFoundError:
        raise JobFileProblem("not-found", f"There is no file {_name(path)} here.") from None
    except (OSError, ValueError) as problem:
        raise JobFileProblem("unreadable", f"{_name(path)} cannot be read: see who may read it.") from problem
    if not data.strip():
        raise JobFileProblem("empty", f"{_name(path)} is empty; there is no job in it.")
    return data


def _pairs(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    made = dict(pairs)
    if len(made) != len(pairs):
        raise ValueError("a name stands twice in one place")
    return made


def _constant(name: str) -> NoReturn:
    raise ValueError(f"{name} is not a number that a meter shows")


def _finite(text: str) -> float:
    value = float(text)
    if value in (float("inf"), float("-inf")):
        raise ValueError("a number is larger than any")
    return value


def document(data: bytes, path: Path) -> dict[str, Any]:
    """The JSON object in these bytes. Raises JobFileProblem: not JSON, not a job, nested too deep."""
    try:
        text = data.decode("utf-8-sig")
        body = json.loads(text, object_pairs_hook=_pairs, parse_constant=_constant, parse_float=_finite)
    except RecursionError:
        raise JobFileProblem("not-a-job", f"{_name(path)} is nested too deep to be a job.") from None
    except json.JSONDecodeError as problem:
        where = f"line {problem.lineno}"
        raise JobFileProblem("not-json", f"{_name(path)} is not JSON: look at {where}.") from problem
    except UnicodeDecodeError:
        raise JobFileProblem("not-json", f"{_name(path)} is not text in UTF-8.") from None
    except ValueError as problem:
        raise JobFileProblem("not-json", f"{_name(path)}: {shorten(plain(str(problem)), 40)}.") from problem
    if not isinstance(body, dict):
        raise JobFileProblem("not-a-job", f"{_name(path)} is JSON, but not a job.")
    return body
