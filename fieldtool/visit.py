"""One open job: what is entered is checked, saved and answered here. No terminal, no screen.

Holds the only mutable reference to the job. Every accepted entry is on the disk before the call returns; where it
cannot be, it is kept in memory, ``save_problem`` says so, and the next entry tries again. What needs the networks
is imported on first use, so that the strip can be painted at once.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any, cast

from fieldtool.answers import (
    CircuitReading,
    EntryRemark,
    Mark,
    Missing,
    StateView,
    Verdict,
    WayAnswer,
)
from fieldtool.job.changes import (
    Change,
    ChangeProblem,
    Put,
    Remove,
    apply,
    new_ids,
    redo_changes,
    undo_changes,
)
from fieldtool.job.isolation import IsolationEntry
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS, IsolationKind, Mode, Probes, Stage, TestKey
from fieldtool.job.reading import Cell, Reading
from fieldtool.job.request import KeptFinding, Override, VerdictKept
from fieldtool.job.rows import Row
from fieldtool.jobfile.opening import JobFile
from fieldtool.jobfile.problems import SaveProblem
from fieldtool.quantities.entry import EntryProblem, parse
from fieldtool.quantities.fields import field
from fieldtool.quantities.show import show
from fieldtool.reference.edition import EDITION, RULE_SET

__all__ = ["CellView", "Entered", "Visit"]

Clock = Callable[[], datetime]

_TT_LOOP = (1.0, 500.0)
"""Loop readings that are no surprise through an earth electrode [ohm]; common practice."""


def _now() -> datetime:
    return datetime.now(UTC)


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


class Visit:
    """An open job with its file, its clock and its answers."""

    def __init__(self, file: JobFile, *, clock: Clock = _now, by: str = "") -> None:
        self.file = file
        self.job: Job = file.job
        self.clock = clock
        self.by = by
        self.save_problem = ""
        self.saved_at: datetime | None = None
        self.notes: tuple[str, ...] = file.notes
        self._memo: dict[tuple[Any, ...], Any] = {}
        self._last_log_tick: float | None = None

    # opening ------------------------------------------------------------------------------------------------
    @classmethod
    def open(cls, path: Path, *, clock: Clock = _now, want_write: bool = True, by: str = "") -> Visit:
        """Open a job. A writer's opening is logged: whatever was proved before no longer counts."""
        visit = cls(JobFile.open(path, clock(), want_write=want_write), clock=clock, by=by)
        if not visit.read_only:
            visit._log_opening()
        return visit

    @classmethod
    def create_new(cls, folder: Path, name: str, *, clock: Clock = _now, by: str = "") -> Visit:
        """Start a job in a folder under a name that cannot leave it."""
        from fieldtool.job.place import Board, Site
        from fieldtool.jobfile.shelf import free_path

        job = Job(site=Site(name=name), boards=(Board(id="b1", name="board 1"),))
        visit = cls(JobFile.create(free_path(folder, name), job, clock()), clock=clock, by=by)
        visit._log_opening()
        return visit

    @property
    def path(self) -> Path:
        """Where the job is kept."""
        return self.file.path

    @property
    def read_only(self) -> bool:
        """True where somebody else writes this job, or its file is of a newer make."""
        return self.file.read_only

    def close(self) -> None:
        """Save what is not saved yet, and let the file go."""
        if self.save_problem:
            self.retry_save()
        self.file.close()

    def _log_opening(self) -> None:
        if self.job.isolation:
            self.job, (row_id,) = new_ids(self.job, ["i"])
            entry = IsolationEntry(id=row_id, kind="opened", at=self.clock())
            self._apply([Put("isolation", entry)], why="opened")

    def follow(self) -> bool:
        """For a read-only view: take over what the writer wrote. True when something changed."""
        changed = self.file.reload_if_changed() if self.read_only else None
        if changed is None:
            return False
        self._swap(changed)
        return True

    # changing -----------------------------------------------------------------------------------------------
    def _swap(self, job: Job) -> None:
        self.job = job
        self._memo.clear()

    def _apply(self, changes: Sequence[Change], why: str = "") -> str:
        if self.read_only:
            return self.file.holder or "This is a read-only view; nothing was changed."
        try:
            job = apply(self.job, changes, at=self.clock(), by=self.by, why=why)
        except ChangeProblem as problem:
            return str(problem)
        self._swap(job)
        self._save()
        return ""

    def _save(self) -> None:
        try:
            self.file.save(self.job)
        except SaveProblem as problem:
            self.save_problem = str(problem)
        else:
            self.save_problem = ""
            self.saved_at = self.clock()

    def retry_save(self) -> bool:
        """Try again to bring everything to the disk. True when it is there."""
        self._save()
        return not self.save_problem

    def move_to(self, folder: Path) -> str:
        """Go on in another folder, for a medium that is full or gone. Empty when it worked, else why not."""
        try:
            self.file.move_to(folder, self.job)
        except SaveProblem as problem:
            return str(problem)
        self.save_problem = ""
        self.saved_at = self.clock()
        return ""

    def new_id(self, prefix: str) -> str:
        """A fresh id for a row that is about to be put."""
        self.job, (row_id,) = new_ids(self.job, [prefix])
        return row_id

    def put(self, table: str, row: Row, why: str = "") -> str:
        """Add a row, or put it in place of the one with its id. Empty, or one sentence saying what is wrong."""
        return self._apply([Put(table, row)], why)

    def remove(self, table: str, row_id: str, why: str = "") -> str:
        """Take a row out. Empty, or one sentence saying why not."""
        return self._apply([Remove(cast(Any, table), row_id)], why)

    def undo(self) -> str:
        """Take the last entry back, as a new entry. Says what was taken back; empty when nothing can be."""
        return self._turn(undo_changes)

    def redo(self) -> str:
        """Take the last undoing back. Says what came back; empty when nothing can."""
        return self._turn(redo_changes)

    def _turn(self, how: Callable[..., Job | None]) -> str:
        if self.read_only:
            return ""
        before = len(self.job.history)
        job = how(self.job, at=self.clock(), by=self.by)
        if job is None:
            return ""
        what = job.history[before].what if len(job.history) > before else ""
        self._swap(job)
        self._save()
        return self._said(what)

    def _said(self, what: str) -> str:
        table, _, row_id = what.partition("/")
        if table == "readings":
            reading = next((r for r in self.job.readings if r.id == row_id), None)
            if reading is not None:
                return f"{TESTS[reading.test].words} at {self.job.point_name(reading.point)}"
        return table.rstrip("s").replace("_", " ") if table else ""

    # entering readings --------------------------------------------------------------------------------------
    def preview(self, test: str, raw: str) -> str:
        """What a half-typed entry is understood as, or what is wrong with it."""
        spec = TESTS[cast(TestKey, test)]
        if not raw:
            return ""
        if spec.field is None:
            return {"1": "right", "2": "wrong"}.get(raw.strip(), "1 right, 2 wrong")
        entry = parse(field(spec.field), raw, likely=self._likely(test))
        return entry.sentence if isinstance(entry, EntryProblem) else entry.echo

    def _likely(self, test: str) -> tuple[float, float] | None:
        """The span in which a loop reading is no surprise, where the system is TT [ohm]; None for the usual one."""
        tt = self.job.supply.system == "tt"
        return _TT_LOOP if tt and test in ("ze", "zdb", "zs") else None

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
            entry = parse(field(spec.field), raw, likely=self._likely(test))
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
            needs_taken=circuit is not None and needs_taken(self.job, circuit, test, point, now),
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

    # answers ------------------------------------------------------------------------------------------------
    def _cached(self, key: tuple[Any, ...], make: Callable[[], Any]) -> Any:
        if key not in self._memo:
            self._memo[key] = make()
        return self._memo[key]

    def circuit_reading(self, circuit_id: str, stage: str = "as_found") -> CircuitReading:
        """What the readings say the circuit is."""
        from fieldtool.diagnosis.explain import explain

        return cast(
            CircuitReading,
            self._cached(("reading", circuit_id, stage), lambda: explain(self.job, circuit_id, stage)),
        )

    def existing(self, circuit_id: str) -> Verdict:
        """The circuit as it stands, judged."""
        from fieldtool.verdict.compare import existing

        return cast(
            Verdict,
            self._cached(
                ("existing", circuit_id), lambda: existing(self.job, circuit_id, self.circuit_reading(circuit_id))
            ),
        )

    def ways(self, request_id: str) -> tuple[WayAnswer, ...]:
        """Every way for one request, best first."""
        from fieldtool.verdict.compare import compare

        request = self.job.request(request_id)
        return cast(
            "tuple[WayAnswer, ...]",
            self._cached(
                ("ways", request_id), lambda: compare(self.job, request, self.circuit_reading(request.circuit))
            ),
        )

    def has_ways(self, request_id: str) -> bool:
        """True where the ways of a request are already worked out for the job as it stands."""
        return ("ways", request_id) in self._memo

    def asks(self, request_id: str) -> bool:
        """True where a request asks for something."""
        request = self.job.request(request_id)
        return bool(request.outlets) or request.swap is not None

    def adopt(
        self, job: Job, request_id: str, circuit_id: str, reading: CircuitReading, ways: tuple[WayAnswer, ...]
    ) -> bool:
        """Take over answers that were worked out elsewhere. False, and nothing kept, when the job moved on."""
        if job is not self.job:
            return False
        self._memo[("reading", circuit_id, "as_found")] = reading
        self._memo[("ways", request_id)] = ways
        return True

    def answer(self, request_id: str) -> WayAnswer | None:
        """The answer for the way that was chosen, else for the best one; None where nothing is asked for."""
        request = self.job.request(request_id)
        if not request.outlets and request.swap is None:
            return None
        answers = self.ways(request_id)
        if request.chosen_way is not None:
            return next((item for item in answers if item.way == request.chosen_way), None)
        real = (item for item in answers if item.applies and item.way != "leave_it")
        return next(real, answers[0] if answers else None)

    def verdict(self, request_id: str) -> Verdict | None:
        """The verdict of the chosen way, else of the best one."""
        found = self.answer(request_id)
        return found.verdict if found is not None else None

    def request_of(self, circuit_id: str) -> str | None:
        """The newest request on a circuit; None where there is none."""
        mine = [request.id for request in self.job.requests if request.circuit == circuit_id]
        return mine[-1] if mine else None

    def judged(self, circuit_id: str) -> Verdict:
        """The verdict that stands for a circuit now: of its request where there is one, else as it stands."""
        request_id = self.request_of(circuit_id)
        found = self.verdict(request_id) if request_id is not None else None
        return found if found is not None else self.existing(circuit_id)

    def missing(self, circuit_id: str) -> tuple[Missing, ...]:
        """What is still to be read or seen, in the order a visit takes it."""
        return self.judged(circuit_id).missing

    def keep_verdict(self, request_id: str, why: str) -> str:
        """Keep the verdict as it stands now, with its figures and the rule set, for whoever re-works it later."""
        found = self.answer(request_id)
        if found is None or found.verdict is None:
            return "There is no verdict to keep yet."
        self.job, (row_id,) = new_ids(self.job, ["v"])
        row = VerdictKept(
            id=row_id,
            request=request_id,
            way=found.way,
            at=self.clock(),
            why=cast(Any, why),
            rule_set=RULE_SET,
            edition=EDITION,
            figures=found.verdict.figures[:200],
            outcome=found.verdict.outcome,
            findings=tuple(
                KeptFinding(
                    rule=f.rule, place=f.place, outcome=f.outcome, measured=f.measured, limit=f.limit, unit=f.unit
                )
                for f in found.verdict.findings
                if f.outcome != "not_applicable"
            ),
        )
        return self._apply([Put("verdicts", row)], why="verdict kept")

    def override(self, request_id: str, rule: str, place: str, by: str, reason: str) -> str:
        """Record a designer's decision on one finding, bound to the figures as they are."""
        found = self.verdict(request_id)
        finding = next((f for f in found.findings if (f.rule, f.place) == (rule, place)), None) if found else None
        if finding is None or finding.outcome != "broken":
            return "There is nothing here for a designer to decide."
        if not finding.designer_may_decide:
            return "The standard leaves no choice here; nothing was recorded."
        if not reason.strip():
            return "Give the reason: it stands on the record."
        self.job, (row_id,) = new_ids(self.job, ["d"])
        row = Override(
            id=row_id,
            request=request_id,
            rule=rule,
            place=place,
            rule_set=RULE_SET,
            figures=finding.figures,
            by=by,
            reason=reason,
            at=self.clock(),
        )
        return self._apply([Put("overrides", row)], why="designer's decision")

    # safety -------------------------------------------------------------------------------------------------
    def strip(self, circuit_id: str | None) -> StateView:
        """The state plate and the reminders, for the strip."""
        from fieldtool.safety.next_step import strip

        return strip(self.job, circuit_id, self.clock())

    def next_change(self) -> datetime | None:
        """When the strip changes by itself: a warning or a lapse."""
        from fieldtool.safety.states import next_change

        return next_change(self.job, self.clock())

    def log_steps(self, circuit_id: str, place: str = "board") -> tuple[Any, ...]:
        """The steps of the isolation log for one circuit at one place."""
        from fieldtool.safety.log import steps

        return steps(self.job, circuit_id, self.clock(), place=place)

    def log(
        self,
        kind: IsolationKind,
        circuit_id: str | None,
        *,
        place: str = "board",
        detail: str = "",
        volts: tuple[float, float, float] | None = None,
        found_well: bool | None = None,
        tester: str = "",
        proving_unit: str = "",
    ) -> str:
        """Log one step of the isolation. Empty when it is kept, else why not and what comes first."""
        from fieldtool.safety.log import Refused, accept

        self.job, (row_id,) = new_ids(self.job, ["i"])
        tick = time.monotonic()
        answer = accept(
            self.job,
            kind,
            circuit_id,
            self.clock(),
            entry_id=row_id,
            place=place,
            detail=detail,
            volts=volts,
            found_well=found_well,
            tester=tester,
            proving_unit=proving_unit,
            tick_s=tick,
            last_tick_s=self._last_log_tick,
        )
        if isinstance(answer, Refused):
            return answer.sentence
        self._last_log_tick = tick
        return self._apply([Put("isolation", answer.entry)], why="isolation log")

    def strike(self, entry_id: str, why: str = "a mistake") -> str:
        """Strike an entry of the log through. It stays to be read, and can only lower the state."""
        entry = next((row for row in self.job.isolation if row.id == entry_id), None)
        if entry is None:
            return "There is no such entry in the log."
        self.job, (row_id,) = new_ids(self.job, ["i"])
        row = IsolationEntry(
            id=row_id,
            kind="struck",
            board=entry.board,
            circuit=entry.circuit,
            at=self.clock(),
            strikes=entry_id,
            detail=why,
        )
        return self._apply([Put("isolation", row)], why="struck through")

    def part(self, circuit_id: str, what: str, sort: str, conductor: str = "", place: str = "board") -> str:
        """Log something parted from its terminals, or joined for a test."""
        from fieldtool.safety.parting import may_part

        refused = may_part(self.job, circuit_id, what, cast(Any, sort), self.clock())
        if refused:
            return refused
        from fieldtool.job.isolation import Parted

        self.job, (row_id,) = new_ids(self.job, ["x"])
        row = Parted(
            id=row_id,
            circuit=circuit_id,
            what=what,
            sort=cast(Any, sort),
            conductor=conductor,
            place=place,
            at=self.clock(),
        )
        return self._apply([Put("parted", row)], why=sort)

    def part_all(self, circuit_id: str, things: Sequence[tuple[str, str]], place: str = "board") -> str:
        """Log several conductors parted together, as one entry: they were parted in one go."""
        from fieldtool.job.isolation import Parted
        from fieldtool.safety.parting import may_part, outstanding

        known = {row.what for row in outstanding(self.job, circuit_id)}
        changes: list[Change] = []
        for what, conductor in things:
            if what in known:
                continue
            refused = may_part(self.job, circuit_id, what, "parted", self.clock())
            if refused:
                return refused
            self.job, (row_id,) = new_ids(self.job, ["x"])
            changes.append(
                Put(
                    "parted",
                    Parted(
                        id=row_id,
                        circuit=circuit_id,
                        what=what,
                        sort="parted",
                        conductor=conductor,
                        place=place,
                        at=self.clock(),
                    ),
                )
            )
        return self._apply(changes, why="parted")

    def metres_left(self, circuit_id: str) -> dict[str, str]:
        """How far an unfused spur (or, on a radial, a branch) could reach from each point [m], as the map shows it."""
        from fieldtool.verdict.reach import reach

        found = reach(self.job, circuit_id, self.circuit_reading(circuit_id))
        return {point: "--" if metres is None else f"{metres:g}" for point, metres in found.items()}

    def leg_shares(self, circuit_id: str) -> dict[str, str]:
        """What the heavier leg carries of 20 A taken at each point of a ring [A]; empty where it is no ring."""
        from fieldtool.verdict.reach import heavier_leg

        return {point: f"{amps:.1f}" for point, amps in heavier_leg(self.job, circuit_id).items()}

    def put_back(self, parted_id: str) -> str:
        """Say that something parted is back in its terminals, or that something joined is off and proved open."""
        row = next((item for item in self.job.parted if item.id == parted_id), None)
        if row is None or row.back_at is not None:
            return "That is not parted or joined."
        return self._apply([Put("parted", row.model_copy(update={"back_at": self.clock()}))], why="put back")


def warm() -> None:
    """Import what the first answer needs, after the first paint, so that no entry waits for it."""
    from fieldtool.quantities import units

    units.warm()


def _text(reading: Reading) -> str:
    """A reading as its cell shows it: the number without its unit, ``right``, ``OL`` or ``lim``."""
    if reading.origin == "limitation":
        return "lim"
    spec = TESTS[reading.test]
    if spec.field is None:
        return reading.answer or ""
    shown = show(field(spec.field), reading.value, reading.sign)
    return shown.split(" ")[0]
