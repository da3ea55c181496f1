"""How far from each point: every way of adding beside the others, metres left as read and clear of tolerance."""

from __future__ import annotations

from itertools import zip_longest

from rich.text import Text
from textual import work

from fieldtool.answers import MARKS
from fieldtool.job.job import Job
from fieldtool.quantities.show import plain, shorten
from fieldtool.verdict.table import Reach, headroom_rows
from screens.base import Line, Sheet, Target
from screens.workbench import Workbench

__all__ = ["ReachSheet"]

_NAME, _CELL = 13, 8


class ReachSheet(Sheet):
    """A row for each point, a numbered column for each way; worked out row by row while one looks."""

    key = "reach"
    title = "How far from each point"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.rows: list[tuple[Reach, ...]] = []
        self.done = False
        self.begun = False
        self.page = 0

    def shown(self) -> None:
        """Begin with the first row."""
        if not self.begun and self.bench.warm and self.bench.visit is not None and self.bench.circuit is not None:
            self.begun = True
            self._fill(self.bench.visit.job, self.bench.circuit)

    @work(thread=True, exit_on_error=False, group="reach")
    def _fill(self, job: Job, circuit: str) -> None:
        from fieldtool.diagnosis.explain import explain

        for row in headroom_rows(job, circuit, explain(job, circuit)):
            if not self.is_attached:
                return
            self.app.call_from_thread(self._take, row, False)
        self.app.call_from_thread(self._take, (), True)

    def _take(self, row: tuple[Reach, ...], done: bool) -> None:
        self.done = done
        if not done:
            self.rows.append(row)
        if self.bench.front is self:
            self.bench.refresh_all()

    def columns(self) -> list[str]:
        """The ways that serve somewhere, in the order of the columns: key by key."""
        return list(dict.fromkeys(cell.way for row in self.rows for cell in row if cell.place != "board"))

    def count(self) -> int:
        """As many places as rows."""
        return len(self.rows)

    def lines(self) -> list[Line]:
        """The table, then what the columns are."""
        palette = self.palette
        if self.bench.circuit is None:
            return [Line(Text("  No circuit yet: F2 adds one.", style=palette.text))]
        columns = self.columns()
        words = {cell.way: cell.words for row in self.rows for cell in row}
        room = max(1, (self.size.width - _NAME - 2) // _CELL)
        first = self.page * room if self.page * room < len(columns) else 0
        shown = columns[first : first + room]
        head = "".join(f"{columns.index(way) + 1:>{_CELL}}" for way in shown)
        out = [Line(Text(f"  {'metres from':<{_NAME}}{head}", style=f"bold {palette.muted}"))]
        for number, row in enumerate(self.rows):
            out.append(self._row(number, row, shown))
        if not self.done:
            out.append(Line(Text("  Working it out ...", style=palette.muted)))
        out.append(Line(Text("  left as the readings stand / clear of tolerance", style=palette.muted)))
        legend = [f"{number:>2} {words[way]}" for number, way in enumerate(columns, start=1)]
        half, wide = (len(legend) + 1) // 2, max(20, (self.size.width - 2) // 2)
        for left, right in zip_longest(legend[:half], legend[half:], fillvalue=""):
            out.append(Line(Text(f"  {shorten(left, wide - 1):<{wide}}{right}", style=palette.text)))
        return out

    def _row(self, number: int, row: tuple[Reach, ...], columns: list[str]) -> Line:
        here = number == self.cursor
        palette = self.palette
        place = row[0].place if row else ""
        style = f"bold {palette.cur[0]} on {palette.cur[1]}" if here else palette.text
        line = Text(no_wrap=True, overflow="crop")
        line.append(f"{'>' if here else ' '} ", style=f"bold {palette.text}")
        name = shorten(plain(self.bench.job.point_name(place)), _NAME - 1)
        line.append(f"{name:<{_NAME}}", style=style)
        if place == "board":
            said = "  ".join(f"{cell.words} {_shown(cell)}" for cell in row)
            line.append(f"  {said}", style=palette.text)
            return Line(line, number)
        cells = {cell.way: cell for cell in row}
        for way in columns:
            cell = cells.get(way)
            if cell is None:
                line.append(f"{'·':>{_CELL}}", style=palette.muted)
            elif cell.metres is None:
                mark = MARKS[cell.outcome]
                line.append(" " * (_CELL - len(mark)))
                line.append(mark, style=palette.mark(mark))
            else:
                line.append(f"{_shown(cell):>{_CELL}}", style=palette.text)
        return Line(line, number)

    def target(self) -> Target:
        """Enter proposes from the point at the cursor."""
        if not self.rows or not self.rows[self.cursor]:
            return Target("")
        place = self.rows[self.cursor][0].place
        if place == "board":
            return Target("from the board", "none")
        return Target(f"{self.bench.job.point_name(place)}: Enter proposes from it", "none", lambda _: self._go(place))

    def _go(self, place: str) -> tuple[bool, str]:
        said: str = self.bench.propose_from(place)
        return True, said

    def do_f6(self) -> None:
        """F6: the columns that did not fit."""
        room = max(1, (self.size.width - _NAME - 2) // _CELL)
        self.page = self.page + 1 if (self.page + 1) * room < len(self.columns()) else 0
        self.bench.refresh_all()

    def back(self) -> None:
        """``-``: back."""
        self.bench.close_sheet()

    def notes(self) -> tuple[str, str]:
        """What holds each way at the point under the cursor."""
        if not self.rows or not self.rows[self.cursor]:
            return ("", "")
        order = {way: number for number, way in enumerate(self.columns(), start=1)}
        held = [
            f"{order.get(cell.way, '')} {cell.held_by.replace('_', ' ')}"
            for cell in self.rows[self.cursor]
            if cell.held_by
        ]
        half = (len(held) + 1) // 2
        return (shorten("  ".join(held[:half]), 76), shorten("  ".join(held[half:]), 76))

    def hints(self) -> str:
        """The keys that matter here."""
        return "up down choose a point   Enter proposes from it   - back   Esc close"

    def help(self) -> tuple[str, ...]:
        """What to do here."""
        return (
            "Metres of new cable left before a limit is met, by every way, from every point.",
            "The second figure is clear of what the meter can be wrong by.",
            "A mark instead of metres: stopped, or a reading is missing; the rows below say which.",
        )


def _shown(cell: Reach) -> str:
    if cell.metres is None:
        return MARKS[cell.outcome]
    left, clear = _short(cell.metres), _short(cell.clear or 0.0)
    return left if left == clear else f"{left}/{clear}"


def _short(metres: float) -> str:
    """Metres rounded down: half metres below ten, whole ones above."""
    return f"{metres:g}" if metres < 10 else f"{int(metres)}"
