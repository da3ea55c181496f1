"""Circuit readings: the grid with its rail, walked as the tests are walked. A number and Enter goes to the next cell."""

from __future__ import annotations

from rich.text import Text

from fieldtool.job.kinds import TESTS, Mode, Probes
from fieldtool.job.reading import Cell
from fieldtool.quantities.show import plain, shorten
from screens.base import Action, Line, Pane, Target
from screens.widgets.grid import CellAt, grid_lines
from screens.workbench import Workbench

__all__ = ["Readings"]


class Readings(Pane):
    """Readings at the board, of the circuit, and at each point. The cursor never stops for a question."""

    key = "readings"
    title = "Circuit readings"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(bench)
        self.by = "test"
        self.stage = "as_found"
        self.mode: Mode = "high_current"
        self.probes: Probes = "front"
        self.come_back: Cell | None = None

    def cells(self) -> tuple[Cell, ...]:
        """Every cell in the order of the walk."""
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None:
            return ()
        board = visit.board_cells(self.stage) if self.stage == "as_found" else ()  # type: ignore[arg-type]
        return (*board, *(visit.walk(circuit, self.by, self.stage) if circuit is not None else ()))  # type: ignore[arg-type]

    def count(self) -> int:
        """As many places as cells."""
        return len(self.cells())

    def cell(self) -> Cell | None:
        """The cell at the cursor."""
        cells = self.cells()
        return cells[self.cursor] if 0 <= self.cursor < len(cells) else None

    def shown(self) -> None:
        """Begin at the first empty cell."""
        visit = self.bench.visit
        cells = self.cells()
        if visit is not None and (not cells or not 0 < self.cursor < len(cells)):
            self.cursor = next((n for n, cell in enumerate(cells) if visit.standing(cell) is None), 0)

    def lines(self) -> list[Line]:
        """The grid."""
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None:
            return [
                Line(Text("")),
                Line(Text("  No circuit yet. F2 adds one: its name, its device, its points.", style=self.palette.text)),
            ]
        cells = [
            CellAt(index, cell, visit.cell(cell), TESTS[cell[2]].short)  # type: ignore[index]
            for index, cell in enumerate(self.cells())
        ]
        remarks = dict(visit.circuit_reading(circuit).remarks) if self.bench.warm and self.stage == "as_found" else {}
        return grid_lines(
            visit.job, circuit, cells, self.cursor, self.palette, self.size.width, remarks, self.bench.field.ascii
        )

    def target(self) -> Target:
        """The entry line takes the reading of the cell at the cursor."""
        cell, visit = self.cell(), self.bench.visit
        if cell is None or visit is None:
            return Target("no cell yet")
        spec = TESTS[cell[2]]  # type: ignore[index]
        place = plain(visit.job.point_name(cell[1])) if cell[1] is not None else ""
        label = f"{place}  {spec.words}" if place else spec.words
        after = " after work" if self.stage == "after_work" else ""
        if spec.field is None:
            return Target(label + after, "choice", self._commit, choices=(("1", "right"), ("2", "wrong")))
        return Target(
            label + after,
            "number",
            self._commit,
            lambda typed: _echo(visit.preview(cell[2], typed)),
            expect=visit.expect(cell) if self.stage == "as_found" else self._foretold(cell),
            value=visit.cell(cell).text,
        )

    def _foretold(self, cell: Cell) -> str:
        verdict = self.bench.verdict()
        place = cell[1] or cell[0]
        for item in verdict.predicted if verdict is not None else ():
            if item.test == cell[2] and item.place == place:
                return f"foretold {item.value:.2f} ({item.low:.2f} to {item.high:.2f})"
        return ""

    def _commit(self, typed: str) -> tuple[bool, str]:
        visit, cell = self.bench.visit, self.cell()
        if visit is None or cell is None:
            return False, "Add the circuit and its points first: F2."
        if not typed.strip():
            return self._enter_alone(cell)
        live = cell[2] in ("zs", "zdb", "ze", "zln")
        at_point = cell[2] == "zs"
        board = visit.job.circuit(self.bench.circuit).board if self.bench.circuit and cell[0] is None else None
        entered = visit.enter(
            cell,
            typed,
            mode=self.mode if live else None,
            probes=self.probes if at_point else None,
            board=board,
        )
        if not entered.accepted:
            return False, shorten(entered.sentence, 74)
        if entered.reading is not None and (entered.reading.doubt or entered.reading.needs_taken):
            self._bell()
        self._on()
        # What was understood of an unusual unit is said even though the cursor has moved on.
        told = entered.remark is None or entered.sentence != entered.remark.sentence
        return True, shorten(entered.sentence, 74) if told else ""

    def _enter_alone(self, cell: Cell) -> tuple[bool, str]:
        """Enter without typing: confirm a doubtful value, else go on."""
        visit = self.bench.visit
        assert visit is not None
        view = visit.cell(cell)
        if view.doubt and view.mark == "??":
            reading = visit.standing(cell)
            if reading is not None and reading.doubt and not reading.confirmed:
                said = visit.confirm(cell)
                self._on()
                return True, said or f"{view.text} is kept as it is."
            self.bench.open_named("question")
            return True, ""
        self._on()
        return True, ""

    def _bell(self) -> None:
        if self.bench.field.bell_on:
            self.bench.app.bell()

    def _on(self) -> None:
        """Go to the next empty cell of the walk; after a fix, back to where one was."""
        visit, cells = self.bench.visit, self.cells()
        if visit is None or not cells:
            return
        if self.come_back in cells:
            self.cursor, self.come_back = cells.index(self.come_back), None
            if visit.standing(cells[self.cursor]) is None:
                return
        for step in range(1, len(cells) + 1):
            place = (self.cursor + step) % len(cells)
            if visit.standing(cells[place]) is None:
                self.cursor = place
                return
        self.cursor = min(self.cursor + 1, len(cells) - 1)

    def back(self) -> None:
        """``-``: back to the cell before; Enter then returns to where one was."""
        here = self.cell()
        if self.come_back is None:
            self.come_back = here
        self.move(-1)

    def skip(self) -> None:
        """``+``: leave this cell without a reading, with a reason."""
        cell, visit = self.cell(), self.bench.visit
        if cell is None or visit is None:
            return
        if visit.standing(cell) is None:
            sheet = self.bench.field.sheet("more", self.bench)
            sheet.begin("skip")  # type: ignore[attr-defined]
            self.bench.open_sheet(sheet)
            return
        self._on()

    def next_missing(self) -> None:
        """``/``: the question that waits, else the next missing entry in the order it should be taken."""
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None:
            return
        if visit.waiting_taken(circuit):
            self.bench.open_named("question")
            return
        cells = self.cells()
        doubtful = next((n for n, cell in enumerate(cells) if visit.cell(cell).mark == "??"), None)
        if doubtful is not None and doubtful != self.cursor:
            self.come_back = self.cell()
            self.choose(doubtful)
            return
        if self.stage == "after_work":
            empty = next((n for n, cell in enumerate(cells) if visit.standing(cell) is None), None)
            if empty is not None:
                self.choose(empty)
            return
        verdict = self.bench.verdict()
        for gap in verdict.missing if verdict is not None else ():
            if gap.test == "survey":
                self.bench.show_pane("survey" if not gap.field.startswith(("route", "outlets")) else "proposal")
                return
            for index, cell in enumerate(cells):
                if cell[2] == gap.test and gap.place in (cell[1], cell[0], "board"):
                    self.choose(index)
                    return
        self._on()

    def do_f6(self) -> None:
        """F6: what is offered here: set wrong pairs aside, or more for this cell."""
        visit, circuit = self.bench.visit, self.bench.circuit
        if visit is None or circuit is None:
            return
        leading = visit.circuit_reading(circuit).leading
        if leading is not None and leading.id == "ends_joined_wrongly":
            test = leading.test or "ln_cross"
            count = visit.set_aside(circuit, test, "taken with the ends wrongly joined")
            self.bench.say(f"{count} readings set aside; none is deleted. Swap the pairs, start again.")
            self.shown()
            cells = self.cells()
            self.cursor = next((n for n, cell in enumerate(cells) if cell[2] == test), 0)
            return
        self.bench.open_named("more")

    def actions(self) -> tuple[Action, ...]:
        """Nothing by a digit alone: digits are readings here."""
        return ()

    def notes(self) -> tuple[str, str]:
        """What is said of the cell at the cursor, and what the readings say so far."""
        visit, circuit, cell = self.bench.visit, self.bench.circuit, self.cell()
        if visit is None or circuit is None or cell is None:
            return ("", "")
        reading = visit.circuit_reading(circuit) if self.bench.warm else None
        view = visit.cell(cell)
        waits = visit.waiting_taken(circuit)
        second = ""
        if waits:
            second = f"??  {len(waits)} not counted until you say when they were taken: / answers."
        elif reading is not None and reading.sentence:
            leading = reading.leading
            mark = "ok" if reading.shown_ring else "NO" if leading is not None and leading.stops_ring else "??"
            second = f"{mark}  {reading.sentence}"
            if leading is not None and leading.id == "ends_joined_wrongly":
                second = "??  F6 sets these aside and starts again. None is deleted."
                return (f"??  {leading.sentence}", second)
        if view.doubt:
            return (f"{view.mark or '??'}  {shorten(plain(view.doubt), 74)}", second)
        said = self._said(cell)
        return (said, second)

    def _said(self, cell: Cell) -> str:
        """What is said of the cell just entered, or of this one."""
        visit = self.bench.visit
        assert visit is not None
        cells = self.cells()
        from fieldtool.safety.log import early_live

        if self.bench.circuit is not None:
            early = early_live(visit.job, self.bench.circuit, cell[2])
            if early and visit.standing(cell) is None:
                return f"??  {early}"
        before = cells[self.cursor - 1] if self.cursor else None
        for place in (cell, before):
            standing = visit.standing(place) if place is not None else None
            if place is None or standing is None:
                continue
            remark = visit.remark(place, standing.value, standing.sign)
            if remark is not None and remark.sentence and not remark.doubt:
                return f"ok  {remark.sentence}"
        return ""

    def hints(self) -> str:
        """The keys that matter here."""
        return "Enter next  + skip  - back  / missing  F6 more  F7 map  F8 pad  F9 log  Esc menu"

    def help(self) -> tuple[str, ...]:
        """What to do at this test."""
        cell = self.cell()
        test = cell[2] if cell is not None else ""
        return _HELP.get(
            test,
            ("Type the number and press Enter: the next empty cell is there.",
             "A doubtful value is kept and marked ??; nothing stops you.",
             "+ skips with a reason, - goes back, / goes to what is missing."),
        )  # fmt: skip


_HELP: dict[str, tuple[str, str, str]] = {
    "r1": ("Board dead, legs parted: the two ends of the line, leads nulled.", "About 0.15 Ω for 20 m of 2.5.",
           "Open? Look for the other leg in another way before you look for a break."),
    "rn": ("The two ends of the neutral, the same leads.", "As r1, within 0.05 Ω.", "Higher: a joint, or another size."),
    "r2": ("The two ends of the earth.", "1.63 times r1 for 2.5/1.5 cable.", "Under r1: look at the clips."),
    "ln_cross": ("Join L of each leg to N of the other. Read L to N at every point.", "The same everywhere: (r1+rn)/4.",
                 "Climbing from the board? The pairs are wrong: swap them."),
    "le_cross": ("Join L of each leg to E of the other. Read L to E at every point.",
                 "Rises a little to the middle: the earth is smaller.", "The highest is R1+R2 of the ring."),
    "zs": ("Covers on, supply on. High-current test where it does not trip.", "Never above what the dead readings give.",
           "No-trip readings can be 0.3 Ω off; F6 says how it was taken."),
}  # fmt: skip


def _echo(understood: str) -> str:
    return understood if understood[:1].isupper() or understood.startswith("'") else f"= {understood.lstrip('= ')}"
