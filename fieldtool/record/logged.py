"""The isolation log, and what was parted, joined and put back."""

from __future__ import annotations

from collections.abc import Iterator

from fieldtool.job.isolation import IsolationEntry
from fieldtool.job.job import Job
from fieldtool.job.kinds import words
from fieldtool.record.blocks import Block, Grid, Words
from fieldtool.record.say import moment, person

__all__ = ["isolation_log", "parted_and_back"]


def isolation_log(job: Job, circuit_id: str) -> Iterator[Block]:
    """Every entry of the log for one circuit, and those of no circuit, in order; a struck one says so."""
    mine = [entry for entry in job.isolation if entry.circuit in (circuit_id, None)]
    if not mine:
        yield Words("Nothing was logged: this record does not show that the circuit was proved dead.")
        return
    struck = {entry.strikes for entry in job.isolation if entry.strikes is not None}
    rows = tuple(
        (
            moment(entry.at),
            words(entry.kind) + (" – STRUCK THROUGH LATER" if entry.id in struck else ""),
            _place(job, entry),
            _said(entry),
            person(job, entry.by),
        )
        for entry in mine
    )
    yield Grid(("when", "step", "where", "what was found or used", "by"), rows, (2.2, 3.2, 2.0, 4.2, 1.8))
    yield Words("The log holds what was entered; it cannot see the circuit.", "small")


def _place(job: Job, entry: IsolationEntry) -> str:
    if entry.place is not None:
        return job.point_name(entry.place)
    return next((board.name for board in job.boards if board.id == entry.board), "–")


def _said(entry: IsolationEntry) -> str:
    said = []
    if entry.found_well is not None:
        said.append("all well" if entry.found_well else "NOT WELL")
    if entry.volts is not None:
        volts = zip(("L-N", "L-E", "N-E"), entry.volts, strict=True)
        said.append(", ".join(f"{name} {value:g} V" for name, value in volts))
    said += [f"tester {entry.tester}"] if entry.tester else []
    said += [f"proved on {entry.proving_unit}"] if entry.proving_unit else []
    said += [text for text in (entry.detail, entry.note) if text]
    said += ["entered faster than hands work"] if entry.too_fast else []
    return "; ".join(said) or "–"


def parted_and_back(job: Job, circuit_id: str) -> Iterator[Block]:
    """What was parted or joined on a circuit, and when it was put back; what is still out stands first, in words."""
    mine = [row for row in job.parted if row.circuit == circuit_id]
    if not mine:
        yield Words("Nothing was logged as parted or joined.")
        return
    out = [row for row in mine if row.back_at is None]
    if out:
        yield Words("STILL OUT: " + "; ".join(f"{row.what} ({row.sort})" for row in out), "caution")
    rows = tuple(
        (
            row.what + (f" – {row.note}" if row.note else ""),
            f"{row.sort}{f', {row.conductor}' if row.conductor else ''}",
            job.point_name(row.place),
            f"{moment(row.at)}, {person(job, row.by)}",
            f"{moment(row.back_at)}, {person(job, row.back_by)}" if row.back_at is not None else "NOT PUT BACK",
        )
        for row in mine
    )
    yield Grid(("what", "how", "where", "out", "back"), rows, (3.4, 1.8, 2.0, 3.0, 3.0))
