"""The circuit's map as a picture of lines, boxes and texts, from the places that the map on the screen gives."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from fieldtool.job.job import Job
from fieldtool.job.kinds import words
from fieldtool.quantities.show import cells, shorten
from fieldtool.record.blocks import Box, Label, Picture, Stroke
from fieldtool.record.page_map import Spot, draw

__all__ = ["plan"]

_LETTER = {"twin": "2", "single": "1", "fcu": "F", "appliance": "A", "joint": "J", "blank": "–"}
_COLUMN, _ROW, _TEXT = 1.2, 3.7, 1.7
"""Picture units for one cell and one row of the screen's map, and the height of type."""
_BOX_WIDE, _BOX_HIGH, _BOARD_WIDE = 3.2, 2.1, 6.2
_CELL_WIDE = 0.85
"""About how wide one character is set [picture units]."""


@dataclass(frozen=True, slots=True)
class _Hung:
    """A point as it is drawn: its letter, its name, what it hangs on, whether it is only proposed."""

    letter: str
    name: str
    parent: str
    new: bool


class _Pen:
    def __init__(self) -> None:
        self.strokes: list[Stroke] = []
        self.boxes: list[Box] = []
        self.labels: list[Label] = []

    def stroke(self, x1: float, y1: float, x2: float, y2: float, *, dashed: bool = False) -> None:
        self.strokes.append(Stroke(x1, y1, x2, y2, dashed))

    def box(self, x: float, y: float, text: str, *, wide: float = _BOX_WIDE, dashed: bool = False) -> None:
        self.boxes.append(Box(x, y - _BOX_HIGH / 2, wide, _BOX_HIGH, text, dashed))

    def label(self, x: float, y: float, text: str) -> None:
        if text:
            self.labels.append(Label(x, y, text))


def plan(job: Job, circuit_id: str, *, ring: bool, values: Mapping[str, str]) -> Picture | None:
    """The circuit drawn: trunk, spurs, what lies behind fused units, what is proposed dashed; None without points.

    ``values`` is a short text under each point's name. KeyError for an unknown circuit.
    """
    every = _every(job, circuit_id)
    trunk = [point_id for point_id, item in every.items() if not item.parent and not item.new]
    if not trunk:
        return None
    half = (len(trunk) + 1) // 2 if ring else len(trunk)
    pitch = max(6, min(15, 165 // half))
    drawing = draw(job, circuit_id, ring=ring, width=12 + half * pitch, values=values)
    spots = {spot.point: spot for spot in drawing.spots}
    pen = _Pen()
    wide = _trunk(pen, spots, trunk, half, pitch, ring=ring)
    for point_id in trunk:
        x, y = _at(spots[point_id])
        pen.box(x, y, every[point_id].letter)
        room = int((pitch * _COLUMN - 2.5) / _CELL_WIDE)
        pen.label(x + 2.3, y + 2.6, shorten(every[point_id].name, room))
        pen.label(x + 2.3, y + 4.4, shorten(values.get(point_id, ""), room))
    for point_id in spots:
        if point_id not in trunk:
            wide = max(wide, _hung(pen, point_id, spots, every, values))
    return _trimmed(pen, wide + 1.0, _says(job, circuit_id, ring=ring))


def _every(job: Job, circuit_id: str) -> dict[str, _Hung]:
    points = job.points_of(circuit_id)
    out = {p.id: _Hung(_LETTER[p.kind], p.name or p.id, p.behind or p.spur_from or "", False) for p in points}
    for request in job.requests:
        # The first new outlet hangs on the place of attachment, each further one on the outlet before it.
        before = request.at or request.swap or ""
        for outlet in request.outlets if request.circuit == circuit_id else ():
            out[outlet.id] = _Hung(_LETTER[outlet.kind], outlet.name or outlet.id, before, True)
            before = outlet.id
    return out


def _at(spot: Spot) -> tuple[float, float]:
    return spot.left * _COLUMN, spot.row * _ROW


def _trunk(pen: _Pen, spots: Mapping[str, Spot], trunk: list[str], half: int, pitch: int, *, ring: bool) -> float:
    """The board and the cable between the points of the trunk; the right-hand edge of the drawing."""
    y = spots[trunk[0]].row * _ROW
    last, _ = _at(spots[trunk[half - 1]])
    edge = last + pitch * _COLUMN - 1.5
    if not ring:
        pen.box(0.0, y, "board", wide=_BOARD_WIDE)
        pen.stroke(_BOARD_WIDE, y, last, y)
        return edge
    middle, low, x = y + 2 * _ROW, y + 4 * _ROW, _BOARD_WIDE / 2
    for at, name in ((y, "A"), (low, "B")):
        pen.stroke(x, middle, x, at)
        pen.stroke(x, at, edge, at)
        pen.label(x - 2.2, at + 0.6, name)
    pen.stroke(edge, y, edge, low)
    pen.box(0.0, middle, "board", wide=_BOARD_WIDE)
    return edge


def _hung(
    pen: _Pen, point_id: str, spots: Mapping[str, Spot], every: Mapping[str, _Hung], values: Mapping[str, str]
) -> float:
    """One point that hangs on another: a stem from its parent, a tee, a box; where its text ends."""
    item, depth, above = every[point_id], 1, every[every[point_id].parent]
    while above.parent and depth < 40:
        depth, above = depth + 1, every[above.parent]
    x, y = _at(spots[point_id])
    _, start = _at(spots[item.parent])
    left = x + 3.2 * depth
    stem = left - _BOX_WIDE / 2
    pen.stroke(stem, start + (_BOX_HIGH if y > start else -_BOX_HIGH) / 2, stem, y, dashed=item.new)
    pen.stroke(stem, y, left, y, dashed=item.new)
    pen.box(left, y, item.letter, dashed=item.new)
    name, value = shorten(item.name, 12), values.get(point_id, "")
    pen.label(left + _BOX_WIDE + 0.5, y + (-0.1 if value else 0.6), name)
    pen.label(left + _BOX_WIDE + 0.5, y + 1.6, value)
    return left + _BOX_WIDE + 0.5 + max(cells(name), cells(value)) * _CELL_WIDE


def _trimmed(pen: _Pen, wide: float, says: str) -> Picture:
    top = min(box.y for box in pen.boxes) - 0.8
    low = max(max(box.y + box.high for box in pen.boxes), max((label.y for label in pen.labels), default=0.0)) + 0.8
    return Picture(
        wide,
        low - top,
        tuple(Stroke(s.x1, s.y1 - top, s.x2, s.y2 - top, s.dashed) for s in pen.strokes),
        tuple(Box(b.x, b.y - top, b.wide, b.high, b.text, b.dashed) for b in pen.boxes),
        tuple(Label(item.x, item.y - top, item.text) for item in pen.labels),
        says,
        _TEXT,
    )


def _says(job: Job, circuit_id: str, *, ring: bool) -> str:
    """The picture in words, for whoever cannot see it."""
    names = [f"{point.name or point.id} ({words(point.kind)})" for point in job.points_of(circuit_id)]
    shape = "ring" if ring else "radial"
    return f"Map of {job.circuit(circuit_id).name or circuit_id}, drawn as a {shape}: {', '.join(names)}."
