"""The checks between rows of a job: every reference resolves, nothing loops, no id stands twice."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from typing import TYPE_CHECKING

from fieldtool.reference.look import cables, devices

if TYPE_CHECKING:
    from fieldtool.job.job import Job

__all__ = ["cross_problems"]


def cross_problems(job: Job) -> Iterator[str]:
    """One sentence for each thing that does not hang together, worst first; empty for a sound job."""
    yield from _ids(job)
    yield from _keys(job)
    yield from _places(job)
    yield from _requests(job)
    yield from _readings(job)
    yield from _log(job)


def _ids(job: Job) -> Iterator[str]:
    tables = (
        job.people, job.instruments, job.boards, job.circuits, job.points, job.runs, job.loads, job.requests,
        job.readings, job.isolation, job.parted, job.overrides, job.verdicts,
    )  # fmt: skip
    seen: Counter[str] = Counter(row.id for rows in tables for row in rows)
    seen.update(outlet.id for _, outlet in job.new_outlets())
    for row_id, count in seen.items():
        if count > 1:
            yield f"the id {row_id} stands {count} times; every row needs its own"
    if "board" in seen or "site" in seen or "supply" in seen:
        yield "board, site and supply are kept words; give the row another id"
    for place, entry in enumerate(job.history, start=1):
        if entry.n != place:
            yield f"history entry {place} is numbered {entry.n}; they run 1, 2, 3 without a gap"
            return


def _keys(job: Job) -> Iterator[str]:
    """Keys of the catalogues that no catalogue has: nothing could be worked out with them."""
    known = {item.key for item in cables()}
    named: list[tuple[str, str | None]] = [(f"circuits/{row.id}", row.cable) for row in job.circuits]
    named += [(f"runs/{row.id}", row.cable) for row in job.runs]
    named += [(f"requests/{row.id}", row.route.cable) for row in job.requests]
    for where, key in named:
        if key is not None and key not in known:
            yield f"{where}: cable {key} is not in the catalogue; see fieldtool tables"
    types = {item.key for item in devices()}
    for circuit in job.circuits:
        if circuit.device is not None and circuit.device.type not in types:
            yield f"circuits/{circuit.id}: device {circuit.device.type} is not in the catalogue; see fieldtool tables"


def _places(job: Job) -> Iterator[str]:
    boards = {board.id for board in job.boards}
    circuits = {circuit.id for circuit in job.circuits}
    points = {point.id: point for point in job.points}
    for circuit in job.circuits:
        if circuit.board not in boards:
            yield f"circuits/{circuit.id}: board {circuit.board} is not in the job"
    for point in job.points:
        if point.circuit not in circuits:
            yield f"points/{point.id}: circuit {point.circuit} is not in the job"
        for label, other in (("spur_from", point.spur_from), ("behind", point.behind)):
            if other is None:
                continue
            if other not in points or points[other].circuit != point.circuit:
                yield f"points/{point.id}: {label} {other} is not a point of its circuit"
            elif other == point.id:
                yield f"points/{point.id}: {label} names the point itself"
        if point.fuse_a is not None and point.kind != "fcu":
            yield f"points/{point.id}: only a fused connection unit has a fuse"
    yield from _loops(job)
    for run in job.runs:
        if run.circuit not in circuits:
            yield f"runs/{run.id}: circuit {run.circuit} is not in the job"
        for end in (run.a, run.b):
            if end != "board" and (end not in points or points[end].circuit != run.circuit):
                yield f"runs/{run.id}: {end} is not a point of its circuit"
        if run.a == run.b:
            yield f"runs/{run.id}: both ends are {run.a}"
    for load in job.loads:
        if load.point not in points or points[load.point].circuit != load.circuit:
            yield f"loads/{load.id}: {load.point} is not a point of its circuit"


def _loops(job: Job) -> Iterator[str]:
    for label in ("spur_from", "behind"):
        parents = {point.id: getattr(point, label) for point in job.points}
        for start in parents:
            node, steps = parents[start], 0
            while node is not None and steps <= len(parents):
                node, steps = parents.get(node), steps + 1
            if node is not None:
                yield f"points/{start}: {label} leads back to itself"
                break


def _requests(job: Job) -> Iterator[str]:
    circuits = {circuit.id for circuit in job.circuits}
    points = {point.id: point for point in job.points}
    requests = {request.id for request in job.requests}
    for request in job.requests:
        if request.circuit not in circuits:
            yield f"requests/{request.id}: circuit {request.circuit} is not in the job"
        for label, place in (("at", request.at), ("other", request.other), ("swap", request.swap)):
            if place is not None and (place not in points or points[place].circuit != request.circuit):
                yield f"requests/{request.id}: {label} {place} is not a point of its circuit"
    people = {person.id for person in job.people}
    for override in job.overrides:
        if override.request not in requests:
            yield f"overrides/{override.id}: request {override.request} is not in the job"
        if override.by not in people:
            yield f"overrides/{override.id}: {override.by} is not one of the people of the job"
    for kept in job.verdicts:
        if kept.request not in requests:
            yield f"verdicts/{kept.id}: request {kept.request} is not in the job"


def _readings(job: Job) -> Iterator[str]:
    circuits = {circuit.id for circuit in job.circuits}
    boards = {board.id for board in job.boards}
    owner = {point.id: point.circuit for point in job.points}
    owner |= {outlet.id: request.circuit for request, outlet in job.new_outlets()}
    instruments = {instrument.id for instrument in job.instruments}
    earlier: dict[str, object] = {}
    for reading in job.readings:
        where = f"readings/{reading.id}"
        if reading.circuit is not None and reading.circuit not in circuits:
            yield f"{where}: circuit {reading.circuit} is not in the job"
        if reading.board is not None and reading.board not in boards:
            yield f"{where}: board {reading.board} is not in the job"
        if reading.point is not None and owner.get(reading.point) != reading.circuit:
            yield f"{where}: {reading.point} is not a point of its circuit"
        if reading.instrument is not None and reading.instrument not in instruments:
            yield f"{where}: instrument {reading.instrument} is not in the job"
        for label, other in (("replaces", reading.replaces), ("withdraws", reading.withdraws)):
            if other is None:
                continue
            if other not in earlier:
                yield f"{where}: {label} {other}, which is not an earlier reading"
            elif earlier[other] != reading.cell:
                yield f"{where}: {label} {other}, which is a reading of another cell"
        earlier[reading.id] = reading.cell


def _log(job: Job) -> Iterator[str]:
    circuits = {circuit.id for circuit in job.circuits}
    boards = {board.id for board in job.boards}
    earlier: set[str] = set()
    for entry in job.isolation:
        where = f"isolation/{entry.id}"
        if entry.circuit is not None and entry.circuit not in circuits:
            yield f"{where}: circuit {entry.circuit} is not in the job"
        if entry.board is not None and entry.board not in boards:
            yield f"{where}: board {entry.board} is not in the job"
        if entry.strikes is not None and entry.strikes not in earlier:
            yield f"{where}: strikes {entry.strikes}, which is not an earlier entry"
        if (entry.strikes is not None) != (entry.kind == "struck"):
            yield f"{where}: only a struck entry names what it strikes"
        earlier.add(entry.id)
    for row in job.parted:
        if row.circuit not in circuits:
            yield f"parted/{row.id}: circuit {row.circuit} is not in the job"
        if row.back_at is not None and row.back_at < row.at:
            yield f"parted/{row.id}: put back before it was parted"
