"""Readings as they are entered: parsed, questioned, kept, corrected, set aside; and their cells as shown."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, cast

from fieldtool.answers import (
    EntryRemark,
    Mark,
)
from fieldtool.job.changes import (
    Change,
    Put,
    new_ids,
)
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS, Mode, Probes, Stage, TestKey
from fieldtool.job.reading import Cell, Reading
from fieldtool.job.rows import Row
from fieldtool.quantities.entry import EntryProblem, parse
from fieldtool.quantities.fields import field
from fieldtool.quantities.show import show
from fieldtool.visit.open_job import OpenJob

__all__ = ["CellView", "Entered", "Entering", "likely_span"]

_TT_LOOP = (1.0, 500.0)
"""Loop readings that are no surprise through an earth electrode [ohm]; common practice."""


@dataclass(frozen=True, slots=True)
class Entered:
    """What became of one entry: kept or not, what to say beside it, and the row it made."""

    accepted: bool
    sentence: str = ""
    remark: EntryRemark | None = None
    reading: Reading | None = None


@dataclass(frozen=True, slots=True)
class CellView:
    """One cell of the readings grid as it is shown."""

    text: str = ""
    mark: Mark | None = None
    doubt: str = ""
    old: str = ""
    note: str = ""
    origin: str = ""
    at: str = ""
    second: str = ""


def likely_span(job: Job, test: str) -> tuple[float, float] | None:
    """The span in which a loop reading is no surprise, where the system is TT [ohm]; None for the usual one."""
    return _TT_LOOP if job.supply.system == "tt" and test in ("ze", "zdb", "zs") else None


class Entering(OpenJob):
    """An open job that takes readings."""

    # entering readings --------------------------------------------------------------------------------------
    def preview(self, test: str, raw: str) -> str:
        """What a half-typed entry is understood as, or what is wrong with it."""
        spec = TESTS[cast(TestKey, test)]
        if not raw:
            return ""
        if spec.field is None:
            return {"1": "right", "2": "wrong"}.get(raw.strip(), "1 right, 2 wrong")
        entry = parse(field(spec.field), raw, likely=likely_span(self.job, test))
        return entry.sentence if isinstance(entry, EntryProblem) else entry.echo

    def standing(self, cell: Cell, probes: Probes | None = None) -> Reading | None:
        """The newest reading that stands in a cell, whether it counts yet or not."""
        found = None
        for reading in self.job.standing():
            if reading.cell == cell and (probes is None or reading.probes in (None, probes)):
                found = reading
        return found

    def enter(
        self,
        cell: Cell,
        raw: str,
        *,
        mode: Mode | None = None,
        probes: Probes | None = None,
        board: str | None = None,
    ) -> Entered:
        """Take one entry as it was typed: checked, kept, saved. Rubbish is refused in one sentence."""
        circuit, point, test, stage = cell
        spec = TESTS[cast(TestKey, test)]
        values: dict[str, Any] = {}
        remark: EntryRemark | None = None
        notice = ""
        if spec.field is None:
            answer = {"1": "right", "2": "wrong", "right": "right", "wrong": "wrong"}.get(raw.strip().lower())
            if answer is None:
                return Entered(False, f"{spec.words}: type 1 for right or 2 for wrong. Nothing was kept.")
            values["answer"] = answer
        else:
            entry = parse(field(spec.field), raw, likely=likely_span(self.job, test))
            if isinstance(entry, EntryProblem):
                return Entered(False, entry.sentence)
            values |= {"value": entry.value, "sign": entry.sign}
            notice = entry.notice or ""
            remark = self.remark(cell, entry.value, entry.sign)
            if entry.unlikely and not (remark is not None and remark.doubt):
                remark = EntryRemark(entry.unlikely, doubt=True)
        before = self.standing(cell, probes)
        from fieldtool.safety.log import needs_taken

        now = self.clock()
        self.job, (row_id,) = new_ids(self.job, ["m"])
        instrument = next((i.id for i in self.job.instruments if i.kind in ("multifunction", "low_ohm")), None)
        reading = Reading(
            id=row_id,
            board=board,
            circuit=circuit,
            point=point,
            test=cast(TestKey, test),
            stage=cast(Stage, stage),
            raw=raw.strip(),
            mode=mode,
            probes=probes,
            instrument=instrument,
            by=self.by if any(person.id == self.by for person in self.job.people) else None,
            at=now,
            doubt=remark.sentence if remark is not None and remark.doubt else "",
            needs_taken=circuit is not None
            and needs_taken(self.job, circuit, test, point, self.now(), probes or "front"),
            replaces=before.id if before is not None else None,
            **values,
        )
        problem = self._apply([Put("readings", reading)], why="reading")
        if problem:
            return Entered(False, problem)
        return Entered(True, notice or (remark.sentence if remark is not None else ""), remark, reading)

    def remark(self, cell: Cell, value: float | None, sign: str) -> EntryRemark | None:
        """What is likely in a cell, and what is said of a value there."""
        from fieldtool.diagnosis.entry_check import remark

        circuit, point, test, stage = cell
        return remark(self.job, circuit, point, test, stage, value, sign)

    def expect(self, cell: Cell) -> str:
        """What a reading here is likely to be, before it is typed; empty where nothing can be said."""
        said = self.remark(cell, None, "=")
        return said.expect if said is not None else ""

    def _again(self, reading: Reading, why: str, **values: Any) -> str:
        self.job, (row_id,) = new_ids(self.job, ["m"])
        row = reading.model_copy(update={"id": row_id, "replaces": reading.id, **values})
        return self._apply([Put("readings", row)], why=why)

    def confirm(self, cell: Cell) -> str:
        """Confirm a doubtful reading as it stands: it counts from now on."""
        reading = self.standing(cell)
        if reading is None or not reading.doubt or reading.confirmed:
            return "Nothing here waits to be confirmed."
        return self._again(reading, "confirmed", confirmed=True)

    def set_details(self, cell: Cell, *, mode: Mode | None = None, probes: Probes | None = None) -> str:
        """Say how the reading in a cell was taken: the loop test's mode, and where the probes were."""
        reading = self.standing(cell)
        if reading is None:
            return "There is no reading here yet."
        return self._again(reading, "details", mode=mode or reading.mode, probes=probes or reading.probes)

    def note(self, cell: Cell, text: str) -> str:
        """Put a note on the reading in a cell."""
        reading = self.standing(cell)
        if reading is None:
            return "There is no reading here to note on."
        return self._again(reading, "note", note=text)

    def skip(self, cell: Cell, why: str) -> str:
        """Leave a cell without a reading, for a reason that stands in the record."""
        circuit, point, test, stage = cell
        before = self.standing(cell)
        self.job, (row_id,) = new_ids(self.job, ["m"])
        reading = Reading(
            id=row_id,
            circuit=circuit,
            point=point,
            test=cast(TestKey, test),
            stage=cast(Stage, stage),
            origin="limitation",
            why_not=why,
            at=self.clock(),
            replaces=before.id if before is not None else None,
        )
        return self._apply([Put("readings", reading)], why="not taken")

    def _withdrawal(self, reading: Reading, why: str) -> Reading:
        self.job, (row_id,) = new_ids(self.job, ["m"])
        return reading.model_copy(
            update={"id": row_id, "withdraws": reading.id, "replaces": None, "set_aside": why, "at": self.clock()}
        )

    def withdraw(self, cell: Cell, why: str = "taken back") -> str:
        """Take the reading in a cell back; it stays in the history."""
        reading = self.standing(cell)
        if reading is None:
            return "There is no reading here to take back."
        return self._apply([Put("readings", self._withdrawal(reading, why))], why=why)

    def set_aside(self, circuit_id: str, test: str, why: str) -> int:
        """Set a whole run of readings of one test aside in one entry. Says how many; none is deleted."""
        rows = [r for r in self.job.standing() if r.circuit == circuit_id and r.test == test and not r.why_not]
        changes = [Put("readings", self._withdrawal(reading, why)) for reading in rows]
        return 0 if self._apply(changes, why=why) else len(changes)

    def waiting_taken(self, circuit_id: str | None = None) -> tuple[Reading, ...]:
        """Dead readings that wait to be told when they were taken."""
        return tuple(
            r
            for r in self.job.standing()
            if r.needs_taken and r.taken is None and (circuit_id is None or r.circuit == circuit_id)
        )

    def answer_taken(self, circuit_id: str, answer: str) -> int:
        """Say once, for every dead reading that waits, when it was taken. Says how many were answered."""
        changes: list[Change] = []
        for reading in self.waiting_taken(circuit_id):
            self.job, (row_id,) = new_ids(self.job, ["m"])
            row = reading.model_copy(update={"id": row_id, "replaces": reading.id, "taken": answer})
            changes.append(Put("readings", row))
        return 0 if self._apply(changes, why="when taken") else len(changes)

    def move_down(self, circuit_id: str, test: str, point_id: str, new_point: Row) -> str:
        """Put a missed point into the walk before ``point_id`` and move the readings of one test down by one.

        One entry: the new point, the walk order of those after it, and each reading moved, the old ones withdrawn.
        """
        points = [p for p in self.job.points_of(circuit_id) if p.spur_from is None and p.behind is None]
        start = next((n for n, p in enumerate(points) if p.id == point_id), None)
        if start is None:
            return "That point is not on the walk."
        after = points[start:]
        changes: list[Change] = [Put("points", new_point)]
        changes += [Put("points", p.model_copy(update={"walk_order": start + 2 + n})) for n, p in enumerate(after)]
        targets = [new_point.id, *(p.id for p in after)]
        for source, target in zip(after, targets, strict=False):
            reading = self.standing((circuit_id, source.id, test, "as_found"))
            if reading is None:
                continue
            changes.append(Put("readings", self._withdrawal(reading, "belongs one point earlier")))
            self.job, (row_id,) = new_ids(self.job, ["m"])
            moved = reading.model_copy(update={"id": row_id, "point": target, "replaces": None})
            changes.append(Put("readings", moved))
        return self._apply(changes, why="a missed point put in")

    # cells --------------------------------------------------------------------------------------------------
    def cell(self, cell: Cell) -> CellView:
        """One cell as it is shown: text, mark, the value that was corrected, and when."""
        reading = self.standing(cell)
        if reading is None:
            return CellView()
        old = next((r for r in self.job.readings if r.id == reading.replaces), None)
        shown_old = f"/{_text(old)}/" if old is not None and _text(old) != _text(reading) else ""
        waiting = (reading.doubt and not reading.confirmed) or (reading.needs_taken and reading.taken is None)
        mark: Mark | None = "??" if waiting else ("--" if reading.origin == "limitation" else None)
        doubt = reading.doubt if reading.doubt and not reading.confirmed else ""
        if reading.needs_taken and reading.taken is None and not doubt:
            doubt = "Kept, not counted, until you say when it was taken."
        return CellView(
            text=_text(reading),
            mark=mark,
            doubt=doubt or reading.why_not,
            old=shown_old,
            note=reading.note,
            origin=reading.origin,
            at=reading.at.astimezone().strftime("%H:%M"),
            second=next((_text(r) for r in self.job.standing() if r.cell == cell and r.id != reading.id), ""),
        )

    def board_cells(self, stage: Stage = "as_found") -> tuple[Cell, ...]:
        """The readings taken at the board: Ze, fault current, and the electrode where the system is TT."""
        tests: list[TestKey] = ["ze", "pfc"]
        if self.job.supply.system == "tt":
            tests.insert(0, "ra")
        return tuple((None, None, test, stage) for test in tests)

    def walk(self, circuit_id: str, by: str = "test", stage: Stage = "as_found") -> tuple[Cell, ...]:
        """The cells of one circuit in the order a visit takes them, by test or by point."""
        from fieldtool.network.shape import labelled_shape

        ring = labelled_shape(self.job, circuit_id) == "ring"
        points = [point.id for point in self.job.points_of(circuit_id)]
        if stage == "after_work":
            points += [
                outlet.id
                for request, outlet in self.job.new_outlets()
                if request.circuit == circuit_id and request.chosen_way is not None
            ]
        ends: tuple[TestKey, ...] = ("r1", "rn", "r2") if ring else ()
        dead: tuple[TestKey, ...] = ("ln_cross", "le_cross") if ring else ("r1_r2",)
        board: tuple[TestKey, ...] = ("ir_ln", "ir_le", "ir_ne", "polarity")
        cells: list[tuple[str | None, TestKey]] = [(None, test) for test in ends]
        for group in (dead, ("zs",)):
            if by == "point":
                cells += [(point, test) for point in points for test in group]
            else:
                cells += [(point, test) for test in group for point in points]
            if group is dead:
                cells += [(None, test) for test in board]
        covered = self.job.circuit(circuit_id).rcd_covers != "none"
        cells += [(None, test) for test in (("rcd_ms", "rcd_button") if covered else ())]
        if stage == "after_work":
            cells += [(None, "function")]
        return tuple((circuit_id, point, test, stage) for point, test in cells)


def _text(reading: Reading) -> str:
    """A reading as its cell shows it: the number without its unit, ``right``, ``OL`` or ``lim``."""
    if reading.origin == "limitation":
        return "lim"
    spec = TESTS[reading.test]
    if spec.field is None:
        return reading.answer or ""
    shown = show(field(spec.field), reading.value, reading.sign)
    return shown.split(" ")[0]
