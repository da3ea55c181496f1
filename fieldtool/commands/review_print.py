"""A review's rows as text, JSON or CSV, each row let go as soon as it is written."""

from __future__ import annotations

import csv
import json
from collections import Counter
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from datetime import datetime
from typing import Any, TextIO

from fieldtool import __version__
from fieldtool.answers import AS_IT_STANDS, MARKS, VERDICT_WORDS, StateWord, VerdictWord
from fieldtool.quantities.show import cells, folded, plain
from fieldtool.record.csv_cells import guarded
from fieldtool.record.review import CONTRACT
from fieldtool.reference.edition import EDITION, EDITION_SENTENCE, RULE_SET

__all__ = ["CSV_COLUMNS", "FORMS", "Tally"]

Row = dict[str, Any]

CELLS = 80
"""Text fits a terminal this wide."""

NAME_CELLS = 20
"""A longer name stands on a line of its own."""

_STATES: dict[StateWord, str] = {
    "not_known": "NOT KNOWN",
    "live": "LIVE",
    "off_not_proved": "OFF, NOT PROVED",
    "proved_dead": "PROVED DEAD",
    "board_dead": "BOARD DEAD",
    "origin_test": "ORIGIN TEST",
}

_ORDER: tuple[VerdictWord, ...] = ("stop", "more", "conditions", "go")
"""Verdicts, worst first."""


_ENDS = {
    2: "not usable",
    3: "must stop",
    4: "wait for readings or a proposal",
    0: "may go ahead, on conditions or without",
}
"""Exit codes from heavy to light, and what each says of a file."""


@dataclass
class Tally:
    """What went by so far: how many files of each exit code, at which moment they were looked at."""

    at: datetime
    counts: Counter[int] = field(default_factory=Counter)

    @property
    def files(self) -> int:
        """How many files went by."""
        return sum(self.counts.values())

    @property
    def exit(self) -> int:
        """The heaviest exit code so far; 4, nothing is proposed, where there was no file."""
        return next((code for code in _ENDS if self.counts[code]), 4)


def _worst(row: Row) -> VerdictWord | None:
    words = {item["verdict"] for item in row["proposals"]}
    return next((word for word in _ORDER if word in words), None)


def _outstanding(row: Row) -> list[str]:
    return [f"{item['what']}: still {item['sort']}" for c in row["circuits"] for item in c["outstanding"]]


def _judged(row: Row) -> list[Row]:
    """What was judged: every proposal, and every circuit as it stands where nothing is proposed on it."""
    return [*row["proposals"], *(c["existing"] for c in row["circuits"] if c["existing"] is not None)]


def _missing(row: Row) -> list[str]:
    return [words for item in _judged(row) for words in item["missing"]]


def _broken(row: Row) -> list[Row]:
    return [finding for item in _judged(row) for finding in item["broken"]]


def _changes(row: Row) -> list[Row]:
    """Changes of an answer; a figure that moved and changed no answer is in the JSON alone."""
    kept = (item["kept"] for item in row["proposals"] if item["kept"] is not None)
    return [change for item in kept for change in item["changes"] if change["kind"] != "figures"]


def _asked(row: Row) -> list[str]:
    return [item["sentence"] for c in row["circuits"] for item in c["too_exact"]]


# text ---------------------------------------------------------------------------------------------------------
def _text(rows: Iterable[Row], tally: Tally, out: TextIO) -> None:
    for line in folded(EDITION_SENTENCE, CELLS):
        out.write(line + "\n")
    out.write(f"Rules {RULE_SET}. NOT KNOWN is treated as live. Asks: figures that look worked out.\n\n")
    out.write(_columns("JOB", "ISOLATION", "VERDICT", "MISSING", "BROKEN", "CHANGED", "ASKS") + "\n")
    for row in rows:
        out.write("\n".join(_lines(row)) + "\n\n")
    said = [f"{tally.counts[code]} {words}" for code, words in _ENDS.items() if tally.counts[code]]
    for line in folded(f"{tally.files} files: {', '.join(said) or 'none'}.", CELLS):
        out.write(line + "\n")


def _columns(name: str, state: str, verdict: str, *counts: str) -> str:
    missing, broken, changed, asks = counts
    gap = " " * max(0, NAME_CELLS - cells(name))
    return f"{name}{gap} {state:<15} {verdict:<14} {missing:>7} {broken:>6} {changed:>7} {asks:>4}"


def _lines(row: Row) -> list[str]:
    name = row["file"]
    if row["problem"] is not None:
        return [*folded(name, CELLS), *_told("??", row["problem"]["sentence"])]
    word = _worst(row)
    figures = [len(items) for items in (_missing(row), _broken(row), _changes(row), _asked(row))]
    fits = cells(name) <= NAME_CELLS
    head = _columns(
        name if fits else "",
        _STATES[row["state"]],
        VERDICT_WORDS[word] if word is not None else "NO PROPOSAL",
        *(str(number) if number else "-" for number in figures),
    )
    return [*([] if fits else folded(name, CELLS)), head, *_details(row)]


def _told(mark: str, sentence: str) -> list[str]:
    """A mark and a sentence, whole, on as many lines as it takes."""
    first, *more = folded(plain(sentence), CELLS, " " * (len(mark) + 3))
    return [f"  {mark} {first.lstrip()}", *more]


def _details(row: Row) -> Iterator[str]:
    for circuit in row["circuits"]:
        if circuit["alarm"]:
            yield from _told("NO", f"{circuit['name']}: {circuit['alarm']}")
        if circuit["existing"] is not None:
            standing = AS_IT_STANDS[circuit["existing"]["verdict"]]
            yield from _told("--", f"{circuit['name']}: nothing is proposed; as it stands {standing}.")
            yield from _findings(circuit["existing"])
    for words in _outstanding(row):
        yield from _told("NO", f"{words}.")
    for item in row["proposals"]:
        chosen = "" if item["way_chosen"] else ", not chosen yet"
        word = VERDICT_WORDS[item["verdict"]]
        yield from _told(MARKS[item["verdict"]], f"{item['request']}: {word}, by {item['way_words']}{chosen}.")
        yield from _findings(item)
        for words in item["to_finish"]:
            yield from _told("to finish:", f"{words}.")
        if item["kept"] is not None:
            yield from _since(item["kept"])
    for sentence in _asked(row):
        yield from _told("asks:", sentence)


def _findings(item: Row) -> Iterator[str]:
    if item.get("refused"):
        yield from _told("NO", item["refused"])
    for finding in item["broken"]:
        yield from _told("NO", f"{finding['says']} ({finding['regulation']})")
    for condition in item["conditions"]:
        yield from _told("if", condition)
    for words in item["missing"]:
        yield from _told("to take:", f"{words}.")


def _since(kept: Row) -> Iterator[str]:
    changed = [change for change in kept["changes"] if change["kind"] != "figures"]
    other = kept["verdict_then"] != kept["verdict_now"]
    if not changed and not other and kept["rule_set_then"] == kept["rule_set_now"]:
        return
    rules = f"rules {kept['rule_set_then']} then, {kept['rule_set_now']} now; {kept['entries_since']} entries since"
    then, now = (_verdict_words(kept[key]) for key in ("verdict_then", "verdict_now"))
    yield from _told("kept:", f"{kept['at'][:10]}: {then} then, {now} now ({rules}).")
    for change in changed:
        was, is_now = (_outcome_words(change[key]) for key in ("was", "now"))
        name = change["rule"].replace("_", " ")
        yield from _told("changed:", f"{name} at {change['place']}: {was} then, {is_now} now.")


def _verdict_words(word: VerdictWord | None) -> str:
    return "no such way" if word is None else VERDICT_WORDS[word]


def _outcome_words(outcome: str | None) -> str:
    return "not asked" if outcome is None else outcome.replace("_", " ")


# JSON ---------------------------------------------------------------------------------------------------------
def _json(rows: Iterable[Row], tally: Tally, out: TextIO) -> None:
    head = {
        "contract": CONTRACT,
        "tool": __version__,
        "rule_set": RULE_SET,
        "edition": EDITION,
        "edition_note": EDITION_SENTENCE,
        "at": tally.at.isoformat(timespec="seconds").replace("+00:00", "Z"),
    }
    out.write(json.dumps(head, ensure_ascii=False)[:-1] + ', "jobs": [')
    for number, row in enumerate(rows):
        out.write((",\n" if number else "\n") + json.dumps(row, ensure_ascii=False, allow_nan=False))
    tail = {"files": tally.files, "exits": {str(code): tally.counts[code] for code in _ENDS}, "exit": tally.exit}
    out.write("\n], " + json.dumps(tail)[1:] + "\n")


# CSV ----------------------------------------------------------------------------------------------------------
CSV_COLUMNS = (
    "file",
    "exit",
    "problem",
    "job",
    "state",
    "parted_or_joined",
    "verdict",
    "proposals",
    "missing",
    "broken",
    "to_finish",
    "kept_at",
    "kept_verdict",
    "kept_rule_set",
    "changed",
    "asks",
)


def _csv(rows: Iterable[Row], _tally: Tally, out: TextIO) -> None:
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(CSV_COLUMNS)
    for row in rows:
        writer.writerow([guarded(plain(text)) for text in _cells_of(row)])


def _cells_of(row: Row) -> list[str]:
    if row["problem"] is not None:
        return [row["file"], str(row["exit"]), row["problem"]["sentence"], *[""] * (len(CSV_COLUMNS) - 3)]
    kept = [item["kept"] for item in row["proposals"] if item["kept"] is not None]

    def together(texts: Iterable[str]) -> str:
        return "; ".join(texts)

    return [
        row["file"],
        str(row["exit"]),
        "",
        row["job"],
        row["state"],
        together(_outstanding(row)),
        _worst(row) or "",
        together(f"{item['request']} {item['way']} {item['verdict']}" for item in row["proposals"]),
        together(_missing(row)),
        together(f"{finding['rule']} {finding['place']}" for finding in _broken(row)),
        together(words for item in row["proposals"] for words in item["to_finish"]),
        together(item["at"] for item in kept),
        together(item["verdict_then"] for item in kept),
        together(item["rule_set_then"] for item in kept),
        together(f"{item['rule']} {item['place']} {item['was']}>{item['now']}" for item in _changes(row)),
        together(_asked(row)),
    ]


FORMS = {"text": _text, "json": _json, "csv": _csv}
"""How each form is printed: the rows, the tally of what went by, and where to."""
