"""Strict reading of the published tables: a table without provenance, or with a hole in it, is refused.

One file for each table and edition; old editions stay beside new ones. Read from the installed package.
"""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from functools import cache
from importlib.resources import files
from importlib.resources.abc import Traversable
from math import isfinite
from typing import Any

__all__ = ["SURE", "UNITS", "ReferenceProblem", "Table", "names", "parse_table", "table"]

SURE = ("published", "derived", "memory", "memory+derived")
"""How sure a figure is: a published page with it was seen; it follows from a formula; it is known from memory."""

UNITS = frozenset(
    ("1", "text", "yes/no", "A", "kA", "mA", "A2s", "V", "mV/A/m", "W", "ohm", "ohm/km", "Mohm")
    + ("mm", "mm2", "m", "m2", "s", "ms", "degC", "1/degC")
)
"""Units that a column may have."""

_HEADER = (
    "title", "standard", "publisher", "edition", "table", "key", "sure", "source", "transcribed_by", "licence_note",
)  # fmt: skip


class ReferenceProblem(ValueError):
    """A table that may not be relied on; names the file and what is wrong."""


@dataclass(frozen=True, slots=True)
class Table:
    """One published table: its header, the unit of each column, and its rows by key, in order."""

    name: str
    title: str
    standard: str
    publisher: str
    edition: str
    number: str
    key: str
    sure: str
    source: str
    units: dict[str, str]
    rows: tuple[dict[str, Any], ...]

    def row(self, key: Any) -> dict[str, Any] | None:
        """The row with this key; None where there is none."""
        return next((row for row in self.rows if row[self.key] == key), None)

    def sure_of(self, row: dict[str, Any]) -> str:
        """How sure one row is: its own word, else the table's."""
        return str(row.get("sure", self.sure))


def parse_table(name: str, text: str) -> Table:
    """A table from TOML text. Raises ReferenceProblem for a missing header, unit, cell or key, or unsorted keys."""
    try:
        body = tomllib.loads(text)
    except tomllib.TOMLDecodeError as problem:
        raise ReferenceProblem(f"{name}: is not TOML: {problem}") from problem
    for field in _HEADER:
        if not isinstance(body.get(field), str) or not body[field].strip():
            raise ReferenceProblem(f"{name}: the header lacks {field}")
    if body["sure"] not in SURE:
        raise ReferenceProblem(f"{name}: sure is {body['sure']}; it is one of {', '.join(SURE)}")
    units, rows = body.get("units"), body.get("rows")
    if not isinstance(units, dict) or not units:
        raise ReferenceProblem(f"{name}: has no units")
    for column, unit in units.items():
        if unit not in UNITS:
            raise ReferenceProblem(f"{name}: column {column} has the unit {unit}, which is not one of ours")
    if not isinstance(rows, list) or not rows:
        raise ReferenceProblem(f"{name}: has no rows")
    key = body["key"]
    if key not in units:
        raise ReferenceProblem(f"{name}: the key column {key} has no unit")
    for number, row in enumerate(rows, start=1):
        _check_row(name, number, row, units)
    keys = [row[key] for row in rows]
    if len(set(keys)) != len(keys):
        raise ReferenceProblem(f"{name}: a key stands twice in {key}")
    if keys != sorted(keys):
        raise ReferenceProblem(f"{name}: the keys in {key} are not in order")
    return Table(
        name, body["title"], body["standard"], body["publisher"], body["edition"], body["table"], key, body["sure"],
        body["source"], dict(units), tuple(rows),
    )  # fmt: skip


def _check_row(name: str, number: int, row: dict[str, Any], units: dict[str, str]) -> None:
    for column, unit in units.items():
        value = row.get(column)
        if value is None or value in ("", []):
            raise ReferenceProblem(f"{name}: row {number} has nothing in {column}")
        wanted: tuple[type, ...] = (float, list)
        if unit == "text":
            wanted = (str,)
        elif unit == "yes/no":
            wanted = (bool,)
        if not isinstance(value, wanted):
            raise ReferenceProblem(f"{name}: row {number} has {value!r} in {column}, which is in {unit}")
        if isinstance(value, float) and not isfinite(value):
            raise ReferenceProblem(f"{name}: row {number} has {value} in {column}")
    if row.get("sure", SURE[0]) not in SURE:
        raise ReferenceProblem(f"{name}: row {number} is {row['sure']}; it is one of {', '.join(SURE)}")
    for column in row:
        if column not in units and column != "sure":
            raise ReferenceProblem(f"{name}: row {number} has {column}, which has no unit")


def _places() -> dict[str, Traversable]:
    from fieldtool.reference.edition import FOLDER

    root = files("fieldtool.reference")
    found: dict[str, Traversable] = {}
    for folder in (FOLDER, "standards", "catalogue"):
        for item in (root / folder).iterdir():
            if item.name.endswith(".toml"):
                found[item.name.removesuffix(".toml")] = item
    return found


@cache
def names() -> tuple[str, ...]:
    """The names of every table in force, sorted."""
    return tuple(sorted(_places()))


@cache
def table(name: str) -> Table:
    """One table by its name, read once. Raises ReferenceProblem where there is none or it is not sound."""
    place = _places().get(name)
    if place is None:
        raise ReferenceProblem(f"{name}: there is no such table; see fieldtool tables")
    return parse_table(name, place.read_text(encoding="utf-8"))
