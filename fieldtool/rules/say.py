"""Short ways of making findings, so that a rule reads as its condition and its sentence."""

from __future__ import annotations

from typing import Any

from fieldtool.answers import Finding, Outcome
from fieldtool.quantities.show import shorten

__all__ = ["MOST_CELLS", "advise", "breaks", "holds", "on_condition"]

MOST_CELLS = 74
"""Cells that a finding's sentence has on the screen."""


def _finding(outcome: Outcome, place: str, says: str, **more: Any) -> Finding:
    clause = more.pop("clause", "")
    return Finding("", outcome, clause, place, shorten(says, MOST_CELLS), **more)


def holds(place: str, says: str, **more: Any) -> Finding:
    """The rule holds."""
    return _finding("holds", place, says, **more)


def breaks(place: str, says: str, do: str, **more: Any) -> Finding:
    """The rule is broken; ``do`` says what to do about it."""
    return _finding("broken", place, says, do=do, **more)


def on_condition(place: str, says: str, do: str, **more: Any) -> Finding:
    """The rule holds on a condition, which ``do`` states."""
    return _finding("condition", place, says, do=do, **more)


def advise(place: str, says: str, do: str, **more: Any) -> Finding:
    """Advice: it never blocks."""
    return _finding("holds", place, says, do=do, advice=True, **more)
