"""Where each published figure comes from that the answers stand on: one row each, by what was looked up."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping

from fieldtool.record.blocks import Block, Grid, Words
from fieldtool.record.say import amount, device_words
from fieldtool.reference.look import Figure
from fieldtool.reference.used import Asked

__all__ = ["provenance"]

_CODES = re.compile(r"\s*\(?\bS\d+(?:(?:, | to )S\d+)*\)?")
"""Short codes of the sources' own list, which the record does not carry."""

_UNITS = ("a", "ma", "v", "w", "c", "m", "m2", "mm", "mm2", "ohm", "mohm", "s", "ms")

_NAMES = {
    "r_ohm_per_m": "copper conductor {0:g} mm², per metre",
    "it_a": "{0} {1:g} mm², method {2}: tabulated current",
    "mv_per_a_m": "{0} {1:g} mm²: volt drop",
    "ca": "factor for air of {0:g} °C",
    "cg": "factor for {0} circuits, {1}",
    "ci": "factor for {0:g} mm inside insulation",
    "k_factor": "factor k, {0}",
    "let_through_a2s": "let-through of class 3, type {0}, {1:g} A, at {2:g} A",
    "bond_mm2": "main bonding, supply neutral {0:g} mm²",
    "least_insulation_mohm": "least insulation resistance at {0:g} V",
    "rcd_most_ms": "longest RCD trip time, {0}",
    "terminals_take": "conductors of {0:g} mm² in a terminal",
    "disconnection_s": "disconnection time, {0}",
    "usual_ze": "Ze usual, and above which it is questioned, {0}",
}


def provenance(used: Mapping[Asked, object]) -> Iterator[Block]:
    """Every figure that was looked up: what it is, its value, where it stands, how sure it is."""
    rows: dict[tuple[str, ...], None] = {}
    for (name, given), found in used.items():
        for figure in found if isinstance(found, tuple) else (found,):
            if isinstance(figure, Figure):
                rows.setdefault(_row(_said(name, given, figure), figure))
    if not rows:
        yield Words("No published figure was needed yet.")
        return
    yield Words(
        "How sure: published = material with the figure was seen; derived = it follows from a formula; "
        "memory = written from memory and to be checked.",
        "small",
    )
    yield Grid(
        ("figure", "value", "where it stands", "how sure", "from"), tuple(sorted(rows)), (3.6, 1.6, 3.4, 1.8, 4.0)
    )


def _row(said: str, figure: Figure) -> tuple[str, ...]:
    made = figure.provenance
    note = _CODES.sub("", made.note).strip(" ;,.") or "–"
    return (
        said,
        amount(figure.value, figure.unit),
        f"{made.table}, {made.standard}",
        made.sure.replace("+", ", "),
        note,
    )


def _said(name: str, given: tuple[object, ...], figure: Figure) -> str:
    if name == "constant":
        group, _, name = str(given[0]).partition(".")
        parts = name.split("_")
        return f"{group}: {' '.join(parts[:-1] if len(parts) > 1 and parts[-1] in _UNITS else parts)}"
    if name == "zs_max_ohm":
        return f"largest loop for {device_words(str(given[0]), float(str(given[1])))}"
    if name == "disconnection_s":
        return "disconnection time of a final circuit, " + ("TT" if given[0] else "TN")
    words = _NAMES.get(name)
    if words is None:
        return f"{name.replace('_', ' ')} {figure.unit}"
    shown = [_plain(item) for item in given]
    return words.format(*shown) if given else words.split(",", maxsplit=1)[0]


def _plain(item: object) -> object:
    return item.replace("_", " ") if isinstance(item, str) else item
