"""The readings grid: readings at the board in rows of cells, then the points on their rail, a column for each test."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from rich.text import Text

from fieldtool.job.circuit import Point
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.reading import Cell
from fieldtool.quantities.show import plain, shorten
from fieldtool.visit import CellView
from screens.base import Line
from screens.theme import Palette
from screens.words import POINT_MARK

__all__ = ["CellAt", "grid_lines"]


@dataclass(frozen=True, slots=True)
class CellAt:
    """One cell with its place in the walk and what it shows."""

    index: int
    cell: Cell
    view: CellView
    short: str


def grid_lines(
    job: Job,
    circuit_id: str,
    cells: list[CellAt],
    cursor: int,
    palette: Palette,
    width: int,
    remarks: dict[str, str],
    ascii_only: bool,
) -> list[Line]:
    """Every line of the grid, cells placed so that columns line up on the right."""
    singles = [item for item in cells if item.cell[1] is None]
    points = [item for item in cells if item.cell[1] is not None]
    before = [item for item in singles if not points or item.index < points[0].index]
    after = [item for item in singles if points and item.index > points[0].index]
    out = _rows_of(before, cursor, palette, width)
    if points:
        out += _points(job, circuit_id, points, cursor, palette, width, remarks, ascii_only)
    out += _rows_of(after, cursor, palette, width)
    return out


def _value(item: CellAt, cursor: int, palette: Palette, room: int) -> Text:
    """One value in ``room`` cells: bracketed at the cursor, marked where it waits."""
    shown = item.view.text or ("·" if item.index != cursor else "")
    if item.view.mark == "??" and item.view.text:
        shown = f"??{item.view.text}"
    text = shorten(shown, room - 2)
    if item.index == cursor:
        return Text(f"[{text:>{room - 2}}]", style=f"bold {palette.cur[0]} on {palette.cur[1]}")
    style = f"bold {palette.unk}" if item.view.mark == "??" else palette.text
    return Text(f"{text:>{room - 1}} ", style=style if item.view.text else palette.muted)


def _rows_of(items: list[CellAt], cursor: int, palette: Palette, width: int) -> list[Line]:
    """Cells that belong to no point: a few beside each other, as many as fit."""
    each = 18
    per_row = max(1, (width - 2) // each)
    out = []
    for start in range(0, len(items), per_row):
        line, spans = Text("  ", no_wrap=True, overflow="crop"), []
        for item in items[start : start + per_row]:
            begin = line.cell_len
            line.append(f"{item.short:>8} ", style=palette.muted)
            line.append_text(_value(item, cursor, palette, 8))
            line.append(" ")
            spans.append((begin, line.cell_len, item.index))
        first = items[start].index
        out.append(Line(line, first, tuple(spans)))
    return out


def _points(
    job: Job,
    circuit_id: str,
    items: list[CellAt],
    cursor: int,
    palette: Palette,
    width: int,
    remarks: dict[str, str],
    ascii_only: bool,
) -> list[Line]:
    tests = list(dict.fromkeys(item.cell[2] for item in items))
    places = {point.id: point for point in job.points_of(circuit_id)}
    rows: dict[str, dict[str, CellAt]] = {}
    for item in items:
        rows.setdefault(item.cell[1] or "", {})[item.cell[2]] = item
    ring = "ln_cross" in tests
    head = Text(f"  {'where':<23}", style=palette.muted, no_wrap=True, overflow="crop")
    for test in tests:
        head.append(f"{TESTS[test].short:>8} ", style=palette.muted)  # type: ignore[index]
    head.append("  what it says", style=palette.muted)
    leg_a, leg_b, tee = ("+ A", "+ B", "|-") if ascii_only else ("┌ A", "└ B", "├─")
    out = [Line(head), Line(Text(f"  {leg_a if ring else '+'}  board", style=palette.muted))]
    for place in _ordered(rows, places):
        line, spans = Text(no_wrap=True, overflow="crop"), []
        mine = rows[place]
        here = any(item.index == cursor for item in mine.values())
        point = places.get(place)
        rail = tee if point is not None and (point.spur_from or point.behind) else ""
        mark = POINT_MARK.get(point.kind, "(2)") if point is not None else "<2>"
        name = shorten(plain(job.point_name(place)), 15)
        line.append(f"{'>' if here else ' '} {rail}{mark:<{5 - len(rail)}} {name:<16}", style=palette.text)
        for test in tests:
            found = mine.get(test)
            if found is None:
                line.append(" " * 9)
                continue
            begin = line.cell_len
            line.append_text(_value(found, cursor, palette, 9))
            spans.append((begin, line.cell_len, found.index))
        said = remarks.get(place, "")
        old = next((item.view.old for item in mine.values() if item.view.old), "")
        tail = shorten(f"{said}  {old}".strip(), max(0, width - line.cell_len - 6))
        doubtful = any(item.view.mark == "??" for item in mine.values())
        if doubtful:
            line.append("  ??", style=palette.mark("??"))
            line.append("  look again", style=palette.text)
        elif tail:
            line.append("  ok", style=palette.mark("ok"))
            line.append(f"  {tail}", style=palette.text)
        out.append(Line(line, min(item.index for item in mine.values()), tuple(spans)))
    if ring:
        out.append(Line(Text(f"  {leg_b}  board", style=palette.muted)))
    return out


def _ordered(rows: dict[str, dict[str, CellAt]], places: dict[str, Point]) -> Iterable[str]:
    """Places in walking order, each spur under the point it hangs on, new outlets last."""
    known = [point for point in places.values() if point.id in rows]
    hung = [point for point in known if point.spur_from or point.behind]
    for point in known:
        if point.spur_from or point.behind:
            continue
        yield point.id
        yield from _under(point.id, hung)
    yield from (place for place in rows if place not in places)


def _under(parent: str, hung: list[Point]) -> Iterable[str]:
    for point in hung:
        if parent in (point.spur_from, point.behind):
            yield point.id
            yield from _under(point.id, hung)
