"""The isolation log and what is parted or joined: data only, nothing is ever edited out."""

from __future__ import annotations

from fieldtool.job.kinds import IsolationKind, PartedSort
from fieldtool.job.rows import Id, LongText, Moment, Row, Text

__all__ = ["IsolationEntry", "Parted"]


class IsolationEntry(Row):
    """One step of the isolation log, as it was done.

    ``place`` is a point id or ``board``; ``volts`` are the three dead measurements L-N, L-E, N-E [V];
    ``detail`` holds the lock, key and label, the person who allowed it, or what was found. ``tick_s`` is the
    process's monotonic clock [s] where it was known. ``strikes`` names the entry that this one takes back.
    """

    kind: IsolationKind
    board: Id | None = None
    circuit: Id | None = None
    place: Id | None = None
    at: Moment
    tick_s: float | None = None
    by: Id | None = None
    tester: Text = ""
    proving_unit: Text = ""
    detail: LongText = ""
    found_well: bool | None = None
    volts: tuple[float, float, float] | None = None
    strikes: Id | None = None
    too_fast: bool = False


class Parted(Row):
    """Something parted from its terminals, or joined for a test, until it is put back and proved."""

    circuit: Id
    what: Text
    sort: PartedSort
    conductor: Text = ""
    place: Id = "board"
    at: Moment
    by: Id | None = None
    back_at: Moment | None = None
    back_by: Id | None = None
