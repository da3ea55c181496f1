"""What a meter shows: how the leg ends are joined for a test, and what is probed.

An arrangement is a list of joins between conductor ends at the board; the reading is the resistance between two
conductors at a point in the whole network so joined. "Divide by four" is never written down: it comes out.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, isinf

import numpy as np

from fieldtool.network.grid import CONDUCTORS, Edge, checked, invert
from fieldtool.network.layout import BOARD, Conductor, Layout, Ohms
from fieldtool.network.problems import NetworkProblem, NoSuchNode

__all__ = [
    "Arrangement",
    "all_readings",
    "crossed_right",
    "crossed_wrong",
    "end_to_end",
    "in_service",
    "leg_ends",
    "one_join_left_off",
    "reading",
]

End = tuple[Conductor, int]
"""One conductor of one leg at the board: which conductor, and the leg's number in the layout's order."""


@dataclass(frozen=True, slots=True)
class Arrangement:
    """Joins between conductor ends at the board, and the two conductors that are probed at a point."""

    name: str
    joins: tuple[tuple[End, End], ...]
    probe: tuple[Conductor, Conductor]
    legs_joined: bool = False


def in_service(other: Conductor = "cpc") -> Arrangement:
    """Legs joined at the board and line linked to the other conductor there: R1+R2, or R1+Rn."""
    return Arrangement("in_service", ((("line", 0), (other, 0)),), ("line", other), legs_joined=True)


def crossed_right(other: Conductor = "neutral") -> Arrangement:
    """Line of each leg joined to the other conductor of the other leg (ring test steps 2 and 3; 643.2.1)."""
    return Arrangement("crossed_right", ((("line", 0), (other, 1)), (("line", 1), (other, 0))), ("line", other))


def crossed_wrong(other: Conductor = "neutral") -> Arrangement:
    """The slip: line of each leg joined to the other conductor of the same leg."""
    return Arrangement("crossed_wrong", ((("line", 0), (other, 0)), (("line", 1), (other, 1))), ("line", other))


def one_join_left_off(other: Conductor = "neutral") -> Arrangement:
    """Only one of the two cross joins made."""
    return Arrangement("one_join_left_off", ((("line", 0), (other, 1)),), ("line", other))


def leg_ends(layout: Layout) -> tuple[str, ...]:
    """Ids of the runs that end at the board, in the layout's order."""
    return tuple(run.id for run in layout.runs if BOARD in (run.a, run.b))


def _nodes(layout: Layout) -> tuple[dict[tuple[str, str], int], list[Edge]]:
    """Every (conductor, place) as a number, each leg having an end of its own at the board; and all conductors."""
    number: dict[tuple[str, str], int] = {}
    for conductor in CONDUCTORS:
        for node in layout.nodes:
            number[(conductor, node)] = len(number)
        for leg in range(len(leg_ends(layout))):
            number[(conductor, f"{BOARD}:{leg}")] = len(number)
    legs = {run_id: leg for leg, run_id in enumerate(leg_ends(layout))}
    edges: list[Edge] = []
    for run in layout.runs:
        for conductor, ohm in zip(CONDUCTORS, checked(run.ohms, run.id), strict=True):
            if isinf(ohm):
                continue
            ends = [f"{BOARD}:{legs[run.id]}" if end == BOARD else end for end in (run.a, run.b)]
            edges.append((number[(conductor, ends[0])], number[(conductor, ends[1])], ohm))
    return number, edges


def _joined(layout: Layout, arrangement: Arrangement) -> tuple[dict[tuple[str, str], int], list[Edge]]:
    number, edges = _nodes(layout)
    legs = len(leg_ends(layout))
    if arrangement.legs_joined:
        for conductor in CONDUCTORS:
            for leg in range(1, legs):
                edges.append((number[(conductor, f"{BOARD}:0")], number[(conductor, f"{BOARD}:{leg}")], 0.0))
    for (one, leg_a), (two, leg_b) in arrangement.joins:
        if leg_a >= legs or leg_b >= legs:
            raise NetworkProblem(f"{arrangement.name} needs two legs at the board; this circuit has {legs}")
        edges.append((number[(one, f"{BOARD}:{leg_a}")], number[(two, f"{BOARD}:{leg_b}")], 0.0))
    return number, edges


def all_readings(layout: Layout, arrangement: Arrangement) -> dict[str, float]:
    """What a meter shows between the probed conductors at every node [ohm]; infinite where it reads open.

    One factorisation for all of them. Raises NetworkProblem when the circuit lacks the legs the joins need.
    """
    number, edges = _joined(layout, arrangement)
    one, two = arrangement.probe
    out: dict[str, float] = {}
    left = list(layout.nodes)
    while left:
        # Each island of the joined network has its own ground: the first node that is still to be read.
        ground = number[(one, left[0])]
        shifted = [(_swap(a, ground), _swap(b, ground), ohm) for a, b, ohm in edges]
        z, reached = invert(len(number), shifted)
        rest = []
        for node in left:
            a, b = _swap(number[(one, node)], ground), _swap(number[(two, node)], ground)
            if reached[a] and reached[b]:
                out[node] = float(z[a, a] + z[b, b] - 2 * z[a, b])
            elif reached[a] or node == left[0]:
                out[node] = inf
            else:
                rest.append(node)
        left = rest
    return {node: max(0.0, out[node]) for node in layout.nodes}


def _swap(place: int, ground: int) -> int:
    return {ground: 0, 0: ground}.get(place, place)


def reading(layout: Layout, arrangement: Arrangement, node: str) -> float:
    """What a meter shows at one node [ohm]; infinite when it reads open. Raises NoSuchNode."""
    if node not in layout.nodes:
        raise NoSuchNode(f"{node} is not a point of this circuit")
    return all_readings(layout, arrangement)[node]


def end_to_end(layout: Layout) -> Ohms:
    """r1, rn and r2: each conductor between its two ends at the board, legs parted [ohm]; infinite where open.

    Raises NetworkProblem when the circuit does not have two legs at the board.
    """
    if len(leg_ends(layout)) != 2:
        raise NetworkProblem(f"end to end needs two legs at the board; this circuit has {len(leg_ends(layout))}")
    number, edges = _nodes(layout)
    values: list[float] = []
    for conductor in CONDUCTORS:
        ground, far = number[(conductor, f"{BOARD}:0")], number[(conductor, f"{BOARD}:1")]
        z, reached = invert(len(number), [(_swap(a, ground), _swap(b, ground), ohm) for a, b, ohm in edges])
        place = _swap(far, ground)
        values.append(float(np.float64(z[place, place])) if reached[place] else inf)
    return Ohms(*values)
