"""``fieldtool rules``: the catalogue of rules, each with its regulation and what it needs."""

from __future__ import annotations

import json
from typing import TextIO

from fieldtool.commands.arguments import Parser, Usage
from fieldtool.reference.edition import EDITION, EDITION_SENTENCE, RULE_SET
from fieldtool.rules.engine import catalogue

__all__ = ["run"]

EXAMPLE = """example: fieldtool rules --json

Exit code: 0 printed; 2 the command is not usable."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Print the catalogue; returns the exit code: 0 printed, 2 the command is not usable."""
    parser = Parser("rules", "Print the catalogue of rules.", EXAMPLE)
    parser.add_argument("--json", action="store_true", help="print JSON")
    try:
        given = parser.parse_args(args)
    except Usage as problem:
        err.write(f"fieldtool rules: {problem}\n")
        return 2
    rows = [
        {
            "id": item.id,
            "family": item.family,
            "regulation": item.clause,
            "says": item.title,
            "needs": list(item.needs),
            "assumes": list(item.assumes),
            "advice": item.advice,
            "designer_may_decide": item.designer_may_decide,
        }
        for item in catalogue()
    ]
    if given.json:
        body = {"rule_set": RULE_SET, "edition": EDITION, "edition_note": EDITION_SENTENCE, "rules": rows}
        out.write(json.dumps(body, ensure_ascii=False, indent=1) + "\n")
        return 0
    out.write(f"{EDITION_SENTENCE}\nRule set {RULE_SET}, {len(rows)} rules.\n")
    for item in catalogue():
        advice = " (advice: never blocks)" if item.advice else ""
        out.write(f"\n{item.id}  {item.clause}{advice}\n  {item.title}\n")
        if item.needs:
            out.write(f"  needs: {', '.join(item.needs)}\n")
        if item.assumes:
            out.write(f"  assumes, where not known: {', '.join(item.assumes)}\n")
    return 0
