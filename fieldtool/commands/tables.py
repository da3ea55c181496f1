"""``fieldtool tables``: every published table with its provenance."""

from __future__ import annotations

import json
from typing import TextIO

from fieldtool.commands.arguments import Parser, Usage
from fieldtool.reference.edition import EDITION, EDITION_SENTENCE
from fieldtool.reference.load import ReferenceProblem, Table, names, table

__all__ = ["run"]

EXAMPLE = """example: fieldtool tables flat_twin

Exit code: 0 printed; 2 there is no such table, or the command is not usable."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Print one table or all; returns the exit code: 0 printed, 2 no such table."""
    parser = Parser("tables", "Print the published tables and where each figure comes from.", EXAMPLE)
    parser.add_argument("name", nargs="?", help="one table; without it, all")
    parser.add_argument("--json", action="store_true", help="print JSON")
    try:
        given = parser.parse_args(args)
        wanted = [table(name) for name in ([given.name] if given.name else names())]
    except (Usage, ReferenceProblem) as problem:
        err.write(f"fieldtool tables: {problem}\n")
        return 2
    if given.json:
        body = {"edition": EDITION, "edition_note": EDITION_SENTENCE, "tables": [_plain(item) for item in wanted]}
        out.write(json.dumps(body, ensure_ascii=False, indent=1) + "\n")
        return 0
    out.write(EDITION_SENTENCE + "\n")
    for item in wanted:
        _print(item, out)
    return 0


def _plain(item: Table) -> dict[str, object]:
    return {
        "name": item.name,
        "title": item.title,
        "standard": item.standard,
        "edition": item.edition,
        "table": item.number,
        "source": item.source,
        "units": item.units,
        "rows": [{**row, "sure": item.sure_of(row)} for row in item.rows],
    }


def _print(item: Table, out: TextIO) -> None:
    out.write(f"\n{item.name}: {item.title}\n  {item.number}, {item.standard} ({item.edition})\n  {item.source}\n")
    columns = list(item.units)
    head = [f"{name} [{item.units[name]}]" if item.units[name] not in ("text", "1") else name for name in columns]
    lines = [[_cell(row[name]) for name in columns] + [item.sure_of(row)] for row in item.rows]
    head.append("how sure")
    widths = [max(len(head[n]), *(len(line[n]) for line in lines)) for n in range(len(head))]
    for line in (head, *lines):
        out.write("  " + "  ".join(text.ljust(width) for text, width in zip(line, widths, strict=True)).rstrip() + "\n")


def _cell(value: object) -> str:
    if isinstance(value, list):
        return " ".join(f"{item:g}" for item in value)
    return f"{value:g}" if isinstance(value, float) else str(value)
