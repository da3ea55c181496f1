"""The tasks of a visit as data: the state each needs, what it parts or joins, what must be back, what follows."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

__all__ = ["AFTER", "RADIAL", "RING", "Task"]

Needs = Literal["any", "live", "board_dead", "dead"]


@dataclass(frozen=True, slots=True)
class Task:
    """One task. ``test`` is what it reads, ``parts`` and ``joins`` what it changes, ``back`` what it undoes."""

    key: str
    words: str
    needs: Needs
    test: str = ""
    parts: tuple[tuple[str, str], ...] = ()
    joins: tuple[tuple[str, str], ...] = ()
    back: tuple[str, ...] = ()
    why: str = ""


_LEGS = (("line legs A and B", "line"), ("neutral legs A and B", "neutral"), ("earth legs A and B", "cpc"))
_STEP_2 = (("L of A to N of B, L of B to N of A", "cross"),)
_STEP_3 = (("L of A to E of B, L of B to E of A", "cross"),)

RING: tuple[Task, ...] = (
    Task("part", "At the board: part and mark legs A, B of L N E; log it: F9 +.", "board_dead", parts=_LEGS),
    Task("step_1", "At the board, end to end, leads nulled: read {test}.", "board_dead", "r1"),
    Task("join_2", "At the board: join L to N of the other leg, twice; log it: F9 +.", "board_dead", joins=_STEP_2),
    Task("step_2", "Front on, read L-N crossed at {place}. Nothing plugged in?", "dead", "ln_cross"),
    Task("unjoin_2", "At the board: take the L-N joins off, check them open: F9 +.", "board_dead", back=("cross",)),
    Task("join_3", "At the board: join L to E of the other leg, twice; log it: F9 +.", "board_dead", joins=_STEP_3),
    Task("step_3", "Front on, read L-E crossed at {place}. Nothing plugged in?", "dead", "le_cross"),
    Task("unjoin_3", "At the board: take the L-E joins off, check them open: F9 +.", "board_dead", back=("cross",)),
    Task("insulation", "Read {test} at the board; discharge before you touch.", "dead", "ir_ln"),
    Task("put_back", "At the board: put legs L N E back in the way, then say so: F9 +.", "board_dead", back=("legs",)),
)
"""A ring's dead tests (643.2.1), in order; each join is off and proved open before the next."""

RADIAL: tuple[Task, ...] = (
    Task(
        "part",
        "At the board: part line and neutral of the circuit; log it: F9 +.",
        "board_dead",
        parts=(("line at the way", "line"), ("neutral at the bar", "neutral")),
    ),
    Task("legs", "Prove the legs at the way: no second end. Then say right.", "board_dead", "legs"),
    Task("join", "At the board: link line to earth; log it: F9 +.", "board_dead", joins=(("line to earth", "link"),)),
    Task("r1_r2", "Front on, read R1+R2 at {place}.", "dead", "r1_r2"),
    Task("unjoin", "At the board: take the link off, check it open: F9 +.", "board_dead", back=("link",)),
    Task("insulation", "Read {test} at the board; discharge before you touch.", "dead", "ir_ln"),
    Task("put_back", "At the board: put line and neutral back, then say so: F9 +.", "board_dead", back=("ends",)),
)
"""A radial's dead tests, in order."""

AFTER: tuple[Task, ...] = (
    Task("prove_there", "Prove {place} dead before you open or cut anything there.", "dead"),
    Task("work", "Do the work at {place}; then log it done: F5, then 2.", "dead"),
    Task("dead_again", "After the work: {what}", "dead"),
    Task("restore", "All back, covers on: restore the supply and log it: F9 +.", "any"),
    Task("live_again", "After the work, live: {what}", "live"),
    Task("hand_over", "Hand over: document, labels, defects told; log it: F9 +.", "live"),
)
"""The work and what follows it, in order."""
