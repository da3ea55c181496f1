"""The circuit drawn as a map: an ordered trunk, folded when it is a ring, branches hanging outwards.

Pure text in cells, for the screen; each point's place is given with it, so that a touch can find it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from fieldtool.job.circuit import Point
from fieldtool.job.job import Job
from fieldtool.quantities.show import cells, plain, shorten

__all__ = ["Drawing", "Spot", "draw"]

_MARKS = {"twin": "(2)", "single": "(1)", "fcu": "(F)", "appliance": "(A)", "joint": "(J)", "blank": "( )"}
_NEW = {"twin": "<2>", "single": "<1>", "fcu": "<F>", "appliance": "<A>", "joint": "<J>", "blank": "< >"}

_BOX = {"-": "─", "|": "│", "7": "╮", "J": "╯", ".": "┆", "#": "║"}


@dataclass(frozen=True, slots=True)
class Spot:
    """Where a point stands on the drawing: its row and the cells from ``left`` to ``right``."""

    point: str
    row: int
    left: int
    right: int


@dataclass(frozen=True, slots=True)
class Drawing:
    """Lines of text, and where each point stands."""

    lines: tuple[str, ...]
    spots: tuple[Spot, ...]


class _Paper:
    def __init__(self, width: int) -> None:
        self.width = width
        self.rows: dict[int, list[str]] = {}
        self.spots: list[Spot] = []

    def put(self, row: int, column: int, text: str) -> None:
        line = self.rows.setdefault(row, [])
        column = max(0, column)
        while len(line) < min(self.width, column + cells(text)):
            line.append(" ")
        for offset, char in enumerate(text):
            if column + offset < self.width:
                line[column + offset] = char

    def free(self, row: int, left: int, right: int) -> bool:
        line = self.rows.get(row, [])
        return all(char == " " for char in line[max(0, left) : right])

    def lines(self, ascii_only: bool) -> tuple[str, ...]:
        if not self.rows:
            return ()
        low, high = min(self.rows), max(self.rows)
        out = ["".join(self.rows.get(row, [])).rstrip() for row in range(low, high + 1)]
        if not ascii_only:
            return tuple(
                "".join(_BOX.get(char, char) if _is_line(line, n) else char for n, char in enumerate(line))
                for line in out
            )
        return tuple(line.replace("7", "+") if line.endswith("7") else line for line in out)


def _is_line(line: str, place: int) -> bool:
    """True for a drawing character, not one that belongs to a name or a number."""
    char = line[place]
    if char in "-|.#":
        before = line[place - 1] if place else " "
        after = line[place + 1] if place + 1 < len(line) else " "
        if char == ".":
            return not (before.isdigit() or after.isdigit())
        if char == "-":
            return before in "-)>AB" or after in "-(<7J"
        return True
    return char in "7J" and place == len(line) - 1 and place > 0 and line[place - 1] in "- "


def draw(
    job: Job,
    circuit_id: str,
    *,
    ring: bool,
    width: int = 78,
    values: Mapping[str, str] | None = None,
    ascii_only: bool = False,
) -> Drawing:
    """The circuit's map in ``width`` cells, a value under each point. KeyError for an unknown circuit.

    A ring of up to 20 points fits in 78 cells without scrolling; beyond that names give way to their ids.
    """
    values = values or {}
    points = job.points_of(circuit_id)
    trunk = [point for point in points if point.spur_from is None and point.behind is None]
    paper = _Paper(width)
    if not trunk:
        return Drawing((" no points yet",), ())
    half = (len(trunk) + 1) // 2 if ring else len(trunk)
    top, bottom = trunk[:half], list(reversed(trunk[half:]))
    pitch = max(6, min(15, (width - 12) // max(half, 1)))
    start = 8
    _row(paper, top, 0, start, pitch, values)
    end = start + (half - 1) * pitch + 3
    paper.put(0, 0, "A------" if ring else "-------")
    if ring:
        edge = min(width - 1, start + (half - 1) * pitch + max(pitch - 1, 5))
        paper.put(0, end, "-" * (edge - end) + "7")
        for row in (1, 2, 3):
            paper.put(row, edge, "|")
        _row(paper, bottom, 4, start, pitch, values)
        last = start + (len(bottom) - 1) * pitch + 3 if bottom else start
        paper.put(4, last, "-" * (edge - last) + "J")
        paper.put(4, 0, "B------")
        paper.put(2, 0, "BOARD")
    else:
        paper.put(1, 0, "BOARD")
    _hang(paper, job, circuit_id, points, {p.id for p in top}, values)
    low = min(paper.rows)
    spots = tuple(Spot(s.point, s.row - low, s.left, s.right) for s in paper.spots)
    return Drawing(paper.lines(ascii_only), spots)


def _row(paper: _Paper, points: list[Point], row: int, start: int, pitch: int, values: Mapping[str, str]) -> None:
    for number, point in enumerate(points):
        column = start + number * pitch
        paper.put(row, column, _MARKS[point.kind])
        if number + 1 < len(points):
            paper.put(row, column + 3, "-" * (pitch - 3))
        _words(paper, point.id, plain(point.name or point.id), row, column, pitch, values)


def _words(
    paper: _Paper, point_id: str, name: str, row: int, column: int, pitch: int, values: Mapping[str, str]
) -> None:
    room = pitch - 1
    paper.put(row + 1, column, shorten(name, room) if room >= 7 or cells(name) <= room else shorten(point_id, room))
    paper.put(row + 2, column, shorten(values.get(point_id, ""), room))
    paper.spots.append(Spot(point_id, row, column, column + room))


def _hang(
    paper: _Paper,
    job: Job,
    circuit_id: str,
    points: tuple[Point, ...],
    above: set[str],
    values: Mapping[str, str],
) -> None:
    """Spurs, what lies behind fused units, and what is proposed, each hung outwards from its parent."""
    places = {spot.point: spot for spot in paper.spots}
    waiting = [point for point in points if point.id not in places]
    for point in waiting:
        parent = point.behind or point.spur_from or ""
        upward = _root(point, {p.id: p for p in points}) in above
        mark = "#" if point.behind is not None else "|"
        spot = places.get(parent)
        if spot is None:
            continue
        _leaf(paper, places, spot, point.id, _MARKS[point.kind], plain(point.name or point.id), upward, mark, values)
    for request, outlet in job.new_outlets():
        start = request.at or request.swap or ""
        spot = places.get(start)
        if request.circuit != circuit_id or spot is None:
            continue
        known = next((p for p in points if p.id == start), None)
        upward = known is not None and _root(known, {p.id: p for p in points}) in above
        _leaf(paper, places, spot, outlet.id, _NEW[outlet.kind], plain(outlet.name), upward, ".", values)


def _root(point: Point, known: Mapping[str, Point]) -> str:
    while point.behind is not None or point.spur_from is not None:
        parent = known.get(point.behind or point.spur_from or "")
        if parent is None:
            break
        point = parent
    return point.id


def _leaf(
    paper: _Paper,
    places: dict[str, Spot],
    parent: Spot,
    point_id: str,
    mark: str,
    name: str,
    upward: bool,
    line: str,
    values: Mapping[str, str],
) -> None:
    step = -1 if upward else 1
    row = parent.row + (-1 if upward else 3)
    column = parent.left + 1
    text = f"{mark}{shorten(name, 9)} {values.get(point_id, '')}".rstrip()
    while not paper.free(row + step, column - 1, column + cells(text)) and abs(row) < 40:
        row += step
    for between in range(parent.row + (-1 if upward else 3), row + step, step):
        if paper.free(between, column, column + 1):
            paper.put(between, column, line)
    paper.put(row + step, column - 1, text)
    spot = Spot(point_id, row + step, column - 1, column - 1 + cells(text))
    paper.spots.append(spot)
    places[point_id] = spot
