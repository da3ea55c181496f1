"""More for the cell one is in: skip with a reason, a note, how it was taken, second place, take back, insert a point."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import Any

from rich.text import Text

from fieldtool.job.circuit import Point
from fieldtool.job.reading import Cell
from screens.base import Action, Line, Sheet, Target
from screens.workbench import Workbench

__all__ = ["More"]

_RECORD = "write the record beside the job, as PDF"


class More(Sheet):
    """A list of what can be done with this cell; some ask for a text."""

    key = "more"
    title = "More here"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.asking = ""

    def begin(self, what: str) -> None:
        """Ask at once for the text of one of the things."""
        self.asking = what

    def _pane(self) -> Any:
        """The readings pane; its own attributes are what this sheet turns."""
        return self.bench.panes.get("readings")

    def cell(self) -> Cell | None:
        """The cell under the sheet."""
        pane = self._pane()
        cell: Cell | None = pane.cell() if pane is not None else None
        return cell

    def offers(self) -> list[tuple[str, Callable[[], str]]]:
        """What can be done."""
        pane = self._pane()
        if pane is None:
            return [("what the readings say", self._explanations), (_RECORD, self._record)]
        walk = "by point" if pane.by == "test" else "by test"
        mode = "no-trip" if pane.mode == "high_current" else "high current"
        probes = {"front": "terminals", "terminals": "adaptor", "adaptor": "front"}[pane.probes]
        stage = "as found" if pane.stage == "after_work" else "after work"
        return [
            ("skip this cell, with a reason", lambda: self._ask("skip")),
            ("note on this cell", lambda: self._ask("note")),
            ("what the readings say, all of it", self._explanations),
            (f"walk {walk}", self._walk),
            (f"loop tests from now on: {mode}", self._mode),
            (f"probes from now on: {probes}", self._probes),
            ("take the reading in this cell back", self._withdraw),
            ("a missed point before this one: its name", lambda: self._ask("insert")),
            (f"readings {stage}", self._stage),
            (_RECORD, self._record),
        ]

    def _ask(self, what: str) -> str:
        self.asking = what
        return ""

    def _explanations(self) -> str:
        self.bench.close_sheet()
        self.bench.open_named("explanations")
        return ""

    def _record(self) -> str:
        self.bench.close_sheet()
        self.bench.write_record()
        return self.bench.entry.said

    def _walk(self) -> str:
        pane = self._pane()
        cell = pane.cell()
        pane.by = "point" if pane.by == "test" else "test"
        cells = pane.cells()
        pane.cursor = cells.index(cell) if cell in cells else 0
        return self._end(f"Walking by {pane.by}.")

    def _mode(self) -> str:
        pane, visit = self._pane(), self.bench.visit
        pane.mode = "no_trip" if pane.mode == "high_current" else "high_current"
        cell = pane.cell()
        if (
            visit is not None
            and cell is not None
            and cell[2] in ("zs", "ze", "zdb")
            and visit.standing(cell) is not None
        ):
            visit.set_details(cell, mode=pane.mode)
        return self._end(f"Loop tests: {pane.mode.replace('_', ' ')}.")

    def _probes(self) -> str:
        pane = self._pane()
        pane.probes = {"front": "terminals", "terminals": "adaptor", "adaptor": "front"}[pane.probes]
        return self._end(f"Probes at the {pane.probes}: a reading there stands beside the other.")

    def _withdraw(self) -> str:
        visit, cell = self.bench.visit, self.cell()
        if visit is None or cell is None:
            return ""
        return self._end(visit.withdraw(cell) or "Taken back; it stays in the history.")

    def _stage(self) -> str:
        pane = self._pane()
        pane.stage = "as_found" if pane.stage == "after_work" else "after_work"
        pane.cursor = 0
        pane.shown()
        return self._end(f"Readings {pane.stage.replace('_', ' ')}.")

    def _end(self, said: str) -> str:
        self.bench.close_sheet()
        return said

    def count(self) -> int:
        """As many places as offers."""
        return len(self.offers())

    def lines(self) -> list[Line]:
        """The offers."""
        out = [Line(Text(" For this cell", style=f"bold {self.palette.muted}"))]
        for number, (words, _) in enumerate(self.offers()):
            here = number == self.cursor
            style = f"bold {self.palette.cur[0]} on {self.palette.cur[1]}" if here else self.palette.text
            out.append(Line(Text(f"{'>' if here else ' '} {(number + 1) % 10}  {words}", style=style), number))
        return out

    def target(self) -> Target:
        """The text that was asked for; else a digit acts."""
        labels = {"skip": "why is it not taken?", "note": "note", "insert": "name of the missed point"}
        if self.asking:
            return Target(labels[self.asking], "text", self._text)
        return Target("a digit or Enter", "none", lambda _: self._do(self.cursor))

    def _do(self, number: int) -> tuple[bool, str]:
        said = self.offers()[number][1]()
        self.bench.say(said)
        self.bench.refresh_all()
        return True, said

    def actions(self) -> tuple[Action, ...]:
        """Digits of the offers; 0 is the tenth."""
        return tuple(
            Action(str((number + 1) % 10), words, partial(self._act, number))
            for number, (words, _) in enumerate(self.offers())
        )

    def _act(self, number: int) -> None:
        self._do(number)

    def tap(self, index: int) -> None:
        """A touch does it."""
        self.choose(index)
        self._do(index)

    def _text(self, typed: str) -> tuple[bool, str]:
        visit, cell, pane = self.bench.visit, self.cell(), self._pane()
        text = typed.strip()
        if visit is None or cell is None or pane is None:
            return False, "There is no cell here."
        if not text:
            return False, "Say it in a few words, or Esc goes back."
        what, self.asking = self.asking, ""
        if what == "skip":
            said = visit.skip(cell, text[:300])
            self.bench.close_sheet()
            pane._on()
        elif what == "note":
            said = visit.note(cell, text[:300])
            self.bench.close_sheet()
        else:
            said = self._insert(cell, text)
            self.bench.close_sheet()
        self.bench.say(said)
        return True, said

    def _insert(self, cell: Cell, name: str) -> str:
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None or cell[1] is None:
            return "Go to the point that comes after the missed one."
        point = Point(id=visit.new_id("p"), circuit=circuit, name=name[:60], cables=2)
        return (
            visit.move_down(circuit, cell[2], cell[1], point) or f"{name[:20]} put in; later readings moved down one."
        )

    def back(self) -> None:
        """``-``: back to the cell."""
        self.bench.close_sheet()
