"""The headroom table: from every point, by every way that takes cable from there, how many metres are left.

Each cell is the one checker's answer for a request of no length from that point, so a cell and a verdict cannot
disagree. Only limits that grow with length have metres; a way that is stopped or not known there says so instead.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from fieldtool.answers import CircuitReading, VerdictWord, WayAnswer
from fieldtool.job.job import Job
from fieldtool.job.request import NewOutlet, Request, Route
from fieldtool.network.as_found import as_found
from fieldtool.network.layout import BOARD
from fieldtool.verdict.compare import judge
from fieldtool.ways.way import every_way

__all__ = ["FROM_BOARD", "FROM_POINT", "Reach", "headroom_rows", "reach_of"]

FROM_POINT = (
    "spur_at_point", "fused_spur", "fixed_appliance", "beyond_fcu", "ring_at_point", "ring_between",
    "spur_at_joint_box", "heavy_branch", "radial_end", "radial_branch", "ring_to_radial", "ring_to_two",
)  # fmt: skip
"""Ways that take their cable from an existing point, in the order of the columns."""

FROM_BOARD = ("spur_at_board", "second_leg", "new_circuit")
"""Ways that take their cable from the board."""


@dataclass(frozen=True, slots=True)
class Reach:
    """One cell: what the way is at this point; metres left as the readings stand and clear of tolerance [m].

    ``metres`` is None where the way is stopped or waits, or where no limit bites; ``held_by`` names the limit, or
    says what stops it.
    """

    place: str
    way: str
    words: str
    outcome: VerdictWord
    metres: float | None
    clear: float | None
    held_by: str


def reach_of(place: str, answer: WayAnswer) -> Reach | None:
    """The cell that one way's answer makes; None where the way is not about this place."""
    if not answer.applies:
        return None
    rooms = answer.verdict.headroom if answer.verdict is not None else ()
    known = [room for room in rooms if room.metres is not None]
    stopped = answer.outcome == "stop"
    tight = None if stopped else min(known, key=lambda room: room.metres or 0.0, default=None)
    return Reach(
        place=place,
        way=answer.way,
        words=answer.words,
        outcome=answer.outcome,
        metres=tight.metres if tight is not None else None,
        clear=min((room.metres_clear for room in known if room.metres_clear is not None), default=None)
        if tight is not None
        else None,
        held_by=answer.stopped_by or (tight.limit_key if tight is not None else ""),
    )


def headroom_rows(job: Job, circuit_id: str, reading: CircuitReading | None = None) -> Iterator[tuple[Reach, ...]]:
    """One row for each point in walking order, then one for the board; worked out as they are asked for.

    What is laid is what the circuit's newest request asks for, or one twin outlet, with no cable of its own yet.
    """
    ways = {way.key: way for way in every_way()}
    asked = next((item for item in reversed(job.requests) if item.circuit == circuit_id and item.outlets), None)
    outlets = asked.outlets if asked is not None else (NewOutlet(id="reach_w", where="indoors"),)
    base = Request(
        id="reach_q",
        circuit=circuit_id,
        outlets=tuple(item.model_copy(update={"metres": 0.0}) for item in outlets),
        route=asked.route if asked is not None else Route(method="c", hidden="in_zone", metal_partition="no"),
        cures=asked.cures if asked is not None else (),
        fuse_a=asked.fuse_a if asked is not None else None,
        choices=asked.choices if asked is not None else (),
    )
    for point in job.points_of(circuit_id):
        row: list[Reach] = []
        beside = _neighbour(job, circuit_id, point.id)
        for key in FROM_POINT:
            between = key in ("ring_between", "spur_at_joint_box", "heavy_branch")
            if between and beside is None:
                continue
            more = {"attach": "between", "other": beside} if between else {"attach": _attach(job, circuit_id, key)}
            request = base.model_copy(update={"at": point.id, **more})
            cell = reach_of(point.id, judge(job, request, ways[key], reading))  # type: ignore[index]
            if cell is not None:
                row.append(cell)
        yield tuple(row)
    board = base.model_copy(update={"attach": "board", "at": None})
    cells = (reach_of(BOARD, judge(job, board, ways[key], reading)) for key in FROM_BOARD)  # type: ignore[index]
    yield tuple(cell for cell in cells if cell is not None)


def _attach(job: Job, circuit_id: str, key: str) -> str:
    radial = job.circuit(circuit_id).label_claims == "radial"
    return "end" if radial and key == "radial_end" else "point"


def _neighbour(job: Job, circuit_id: str, point_id: str) -> str | None:
    """The next point on the ring after this one, as the layout has it; None at its end or off the ring."""
    runs = [run for run in as_found(job, circuit_id).layout.runs if run.on_ring and point_id in (run.a, run.b)]
    others = [run.b if run.a == point_id else run.a for run in runs]
    return next((other for other in reversed(others) if other != BOARD), None)
