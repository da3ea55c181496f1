"""The circuit's map as a picture of lines, boxes and texts, from the places that the map on the screen gives."""

from __future__ import annotations

from collections.abc import Mapping

from fieldtool.job.job import Job
from fieldtool.job.kinds import words
from fieldtool.quantities.show import cells, shorten
from fieldtool.record.blocks import Box, Label, Picture, Stroke
from fieldtool.record.page_map import Spot, draw

__all__ = ["plan"]

_LETTER = {"twin": "2", "single": "1", "fcu": "F", "appliance": "A", "joint": "J", "blank": "–"}
_ROW = 2.4
_PITCH = 15
_BOARD_WIDE = 6.0
_TEXT = 1.7


class _Pen:
    def __init__(self) -> None:
        self.strokes: list[Stroke] = []
        self.boxes: list[Box] = []
        self.labels: list[Label] = []

    def stroke(self, x1: float, y1: float, x2: float, y2: float, *, dashed: bool = False) -> None:
        self.strokes.append(Stroke(x1, y1, x2, y2, dashed))

    def box(self, x: float, row_y: float, text: str, *, dashed: bool = False) -> None:
        self.boxes.append(Box(x, row_y - 1.0, 3.0, 2.0, text, dashed))

    def label(self, x: float, row_y: float, text: str) -> None:
        if text:
            self.labels.append(Label(x, row_y + 0.6, text))


def plan(job: Job, circuit_id: str, *, ring: bool, values: Mapping[str, str]) -> Picture | None:
    """The circuit drawn: trunk, spurs, what lies behind fused units, what is proposed dashed; None without points.

    ``values`` is a short text under each point's name. KeyError for an unknown circuit.
    """
    points = {point.id: point for point in job.points_of(circuit_id)}
    trunk = [point.id for point in points.values() if point.spur_from is None and point.behind is None]
    if not trunk:
        return None
    half = (len(trunk) + 1) // 2 if ring else len(trunk)
    drawing = draw(job, circuit_id, ring=ring, width=12 + max(half, 4) * _PITCH, values=values)
    spots = {spot.point: spot for spot in drawing.spots}
    base = spots[trunk[0]].row
    pen = _Pen()
    edge = _trunk(pen, spots, trunk, half, base, ring=ring)
    parents = {p.id: (p.behind or p.spur_from or "") for p in points.values()}
    kinds = {p.id: (p.kind, p.name or p.id, False) for p in points.values()}
    for request, outlet in job.new_outlets():
        if request.circuit == circuit_id:
            parents[outlet.id] = request.at or request.swap or ""
            kinds[outlet.id] = (outlet.kind, outlet.name, True)
    for point_id in trunk:
        spot = spots[point_id]
        kind, name, _ = kinds[point_id]
        pen.box(spot.left, spot.row * _ROW, _LETTER[kind])
        pen.label(spot.left + 2.2, (spot.row + 1) * _ROW - 0.5, shorten(name, _PITCH - 3))
        pen.label(spot.left + 2.2, (spot.row + 2) * _ROW - 1.1, values.get(point_id, ""))
    wide = edge + 2.0
    for point_id in spots:
        if point_id not in trunk:
            wide = max(wide, _hung(pen, point_id, spots, parents, kinds, trunk, values))
    return _trimmed(pen, wide, _says(job, circuit_id, ring=ring))


def _trunk(pen: _Pen, spots: Mapping[str, Spot], trunk: list[str], half: int, base: int, *, ring: bool) -> float:
    """The board and the cable between the points of the trunk; the right-hand edge of the drawing."""
    y = base * _ROW
    last = spots[trunk[half - 1]]
    edge = last.left + 3.0
    if not ring:
        pen.boxes.append(Box(0.0, y - 1.2, _BOARD_WIDE, 2.4, "board"))
        pen.stroke(_BOARD_WIDE, y, last.left, y)
        return float(last.right)
    low = (base + 4) * _ROW
    pen.boxes.append(Box(0.0, (base + 2) * _ROW - 1.2, _BOARD_WIDE, 2.4, "board"))
    edge = max(spot.left for spot in spots.values() if spot.point in trunk) + _PITCH - 1.0
    middle = _BOARD_WIDE / 2
    for at, name in ((y, "A"), (low, "B")):
        pen.stroke(middle, (base + 2) * _ROW, middle, at)
        pen.stroke(middle, at, edge, at)
        pen.label(middle - 2.2, at, name)
    pen.stroke(edge, y, edge, low)
    return edge


def _hung(
    pen: _Pen,
    point_id: str,
    spots: Mapping[str, Spot],
    parents: Mapping[str, str],
    kinds: Mapping[str, tuple[str, str, bool]],
    trunk: list[str],
    values: Mapping[str, str],
) -> float:
    """One point that hangs on another: a stem from its parent, a tee, a box; where its text ends."""
    depth, above = 1, parents.get(point_id, "")
    while above not in trunk and above in parents and depth < 40:
        depth, above = depth + 1, parents[above]
    spot, parent = spots[point_id], spots[parents[point_id]]
    kind, name, new = kinds[point_id]
    y = spot.row * _ROW
    left = spot.left + 3.0 * depth
    stem = left - 1.5
    away = 1.0 if spot.row > parent.row else -1.0
    pen.stroke(stem, parent.row * _ROW + away, stem, y, dashed=new)
    pen.stroke(stem, y, left, y, dashed=new)
    pen.box(left, y, _LETTER[kind], dashed=new)
    text = f"{shorten(name, 11)} {values.get(point_id, '')}".strip()
    pen.label(left + 3.4, y, text)
    return left + 3.4 + cells(text) * 0.95


def _trimmed(pen: _Pen, wide: float, says: str) -> Picture:
    top = min(min(box.y for box in pen.boxes), min((s.y1 for s in pen.strokes), default=0.0)) - 0.6
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
