"""Readings from CSV: every row read and checked, or a sentence that names the line and what is wrong with it."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass
from math import isfinite
from typing import Any

from pydantic import TypeAdapter, ValidationError

from fieldtool.job.changes import sentence_of
from fieldtool.job.kinds import TESTS
from fieldtool.job.reading import Reading
from fieldtool.job.rows import Moment
from fieldtool.quantities.entry import EntryProblem, parse
from fieldtool.quantities.fields import FIELDS
from fieldtool.quantities.show import plain, shorten
from fieldtool.record.csv_cells import unguarded
from fieldtool.record.csv_out import READING_COLUMNS, SIGN_WORDS, stored_unit

__all__ = ["MOST_BYTES", "CsvProblem", "RowRead", "reading_of", "rows_read"]

MOST_BYTES = 16_000_000
"""Largest CSV file that is read [bytes]."""

_SIGNS = {word: sign for sign, word in SIGN_WORDS.items()}
_MOMENT: TypeAdapter[Any] = TypeAdapter(Moment)
_YES_NO = {"yes": True, "no": False, "": False}
_PLAIN = (
    "id", "board", "circuit", "point", "answer", "mode", "probes", "instrument", "by", "taken", "replaces", "withdraws",
)  # fmt: skip
_TEXTS = ("raw", "why_not", "note", "doubt", "set_aside")


class CsvProblem(ValueError):
    """A file or a row that is not readings; names the line. Nothing of the file is taken."""


@dataclass(frozen=True, slots=True)
class RowRead:
    """One row: its line in the file, the reading's fields, and what is still to be worked out for it."""

    line: int
    values: dict[str, Any]
    ask_doubt: bool
    ask_taken: bool


def rows_read(data: bytes) -> tuple[RowRead, ...]:
    """The rows of a readings file. Raises CsvProblem at the first row that is not sound; nothing is guessed."""
    if len(data) > MOST_BYTES:
        raise CsvProblem(f"the file has more than {MOST_BYTES // 1_000_000} MB")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as problem:
        line = data[: problem.start].count(b"\n") + 1
        raise CsvProblem(f"line {line}: is not UTF-8 text") from problem
    reader = csv.reader(io.StringIO(text, newline=""), strict=True)
    out: list[RowRead] = []
    line = 1
    try:
        head = [name.strip() for name in next(reader, [])]
        _check_head(head)
        line = reader.line_num + 1
        for cells in reader:
            if any(cell.strip() for cell in cells):
                out.append(_row(line, head, cells))
            line = reader.line_num + 1
    except csv.Error as problem:
        raise CsvProblem(f"line {line}: is not CSV: {problem}") from problem
    return tuple(out)


def _check_head(head: list[str]) -> None:
    if not any(head):
        raise CsvProblem("line 1: the names of the columns are missing")
    for name in head:
        if name not in READING_COLUMNS:
            raise CsvProblem(f"line 1: {_quoted(name)} is not a column of readings; see fieldtool csv --help")
        if head.count(name) > 1:
            raise CsvProblem(f"line 1: the column {name} stands twice")
    if "test" not in head:
        raise CsvProblem("line 1: the column test is missing")


def _quoted(text: str) -> str:
    return f'"{shorten(plain(text), 40)}"'


def _row(line: int, head: list[str], cells: list[str]) -> RowRead:
    if len(cells) != len(head):
        raise CsvProblem(f"line {line}: has {len(cells)} cells, the first line names {len(head)}")
    given = dict(zip(head, cells, strict=True))
    try:
        values = _values(given)
    except ValueError as problem:
        raise CsvProblem(f"line {line}: {sentence_of(problem)}") from problem
    return RowRead(line, values, "doubt" not in given, not given.get("needs_taken", "").strip())


def _values(given: dict[str, str]) -> dict[str, Any]:
    """The fields of a reading from the cells of its row. ValueError with one sentence."""
    test = given["test"].strip()
    if test not in TESTS:
        raise ValueError(f"{_quoted(test)} is not a test")
    values: dict[str, Any] = {"test": test}
    for name in _PLAIN:
        if given.get(name, "").strip():
            values[name] = unguarded(given[name]).strip()
    for name in _TEXTS:
        if given.get(name):
            values[name] = unguarded(given[name])
    for name in ("confirmed", "needs_taken"):
        word = given.get(name, "").strip().lower()
        if word not in _YES_NO:
            raise ValueError(f"{name}: {_quoted(word)} is neither yes nor no")
        values[name] = _YES_NO[word]
    values["stage"] = given.get("stage", "").strip() or "as_found"
    values["origin"] = given.get("origin", "").strip() or "measured"
    if given.get("temp_c", "").strip():
        values["temp_c"] = _number("temp_c", given["temp_c"])
    if given.get("at", "").strip():
        try:
            values["at"] = _MOMENT.validate_python(given["at"].strip())
        except ValidationError as problem:
            raise ValueError(f"at: {sentence_of(problem)}") from problem
    sign = given.get("range", "").strip().lower()
    if sign not in _SIGNS:
        raise ValueError(f"range: {_quoted(sign)} is not over, under or open")
    values["sign"] = _SIGNS[sign]
    value = _value(test, given.get("value", "").strip(), given.get("unit", "").strip())
    if value is not None:
        values["value"] = value
    return values


def _number(name: str, cell: str) -> float:
    try:
        value = float(cell)
    except ValueError:
        raise ValueError(f"{name}: {_quoted(cell)} is not a number written with a point") from None
    if not isfinite(value):
        raise ValueError(f"{name}: {_quoted(cell)} is not a number")
    return value


def _value(test: str, cell: str, unit: str) -> float | None:
    """The stored value of a cell [the test's own unit]; a unit is never taken for granted."""
    stored, key = stored_unit(test), TESTS[test].field  # type: ignore[index]
    if not cell:
        return None
    if key is None:
        raise ValueError(f"value: {TESTS[test].words} is answered right or wrong")  # type: ignore[index]
    if not unit:
        raise ValueError(f"unit: is missing beside {_quoted(cell)}; the stored unit is {stored}")
    value = _number("value", cell)
    if unit == stored:
        return value
    entry = parse(FIELDS[key], f"{cell} {unit}")
    if isinstance(entry, EntryProblem):
        raise ValueError(f"value: {entry.sentence}")
    return entry.value


def reading_of(row: RowRead, **more: Any) -> Reading:
    """The reading of a row, with what was worked out for it. Raises CsvProblem where it is not one."""
    try:
        return Reading(**{**row.values, **more})
    except ValidationError as problem:
        raise CsvProblem(f"line {row.line}: {sentence_of(problem)}") from problem
