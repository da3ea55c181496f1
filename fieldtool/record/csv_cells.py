"""Cells of a CSV file: texts that a spreadsheet must never take for a formula, and come back as they were."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence

__all__ = ["as_csv", "guarded", "unguarded"]

_STARTS = frozenset("=+-@'\t\r＝＋－＠")
"""What a spreadsheet may take for the start of a formula, in wide form too, and the guard itself."""


def guarded(text: str) -> str:
    """A text with an apostrophe before it where it would start a formula, or starts with an apostrophe of its own.

    >>> guarded("=1+1"), guarded("hob"), guarded("'hob")
    ("'=1+1", 'hob', "''hob")
    """
    return f"'{text}" if text.lstrip()[:1] in _STARTS and text.strip() else text


def unguarded(cell: str) -> str:
    """The text that a guarded cell stands for; any other cell is what it says.

    >>> unguarded("'=1+1"), unguarded("hob"), unguarded("''hob"), unguarded("'tis")
    ('=1+1', 'hob', "'hob", "'tis")
    """
    rest = cell[1:]
    return rest if cell[:1] == "'" and rest.strip() and rest.lstrip()[:1] in _STARTS else cell


def as_csv(head: Sequence[str], rows: Iterable[Sequence[str]]) -> bytes:
    """A CSV file: comma, quotes where needed, CR LF between rows, UTF-8 with its mark, as spreadsheets expect."""
    text = io.StringIO(newline="")
    writer = csv.writer(text, lineterminator="\r\n")
    writer.writerow(head)
    writer.writerows(rows)
    return text.getvalue().encode("utf-8-sig")
