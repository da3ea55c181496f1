"""An open job and its file: opened, changed, saved, undone. The only mutable reference to a job is here."""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from datetime import UTC, datetime, timedelta
from pathlib import Path
from typing import Any, Self, cast

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
from fieldtool.job.history import accounted
from fieldtool.job.isolation import IsolationEntry
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.rows import Row
from fieldtool.jobfile.opening import JobFile
from fieldtool.jobfile.problems import SaveProblem

__all__ = ["Clock", "OpenJob"]

Clock = Callable[[], datetime]


def _now() -> datetime:
    return datetime.now(UTC)


def _running_s() -> float:
    """Seconds of a clock that nobody sets, counting on while the machine sleeps where the platform can tell [s]."""
    if hasattr(time, "CLOCK_BOOTTIME"):
        return time.clock_gettime(time.CLOCK_BOOTTIME)
    return time.monotonic()


class OpenJob:
    """A job with its file and its clock; every accepted change is on the disk before the call returns."""

    def __init__(
        self, file: JobFile, *, clock: Clock = _now, by: str = "", running_s: Callable[[], float] = _running_s
    ) -> None:
        self.file = file
        self.job: Job = file.job
        self.clock = clock
        self.by = by
        self.save_problem = ""
        self.saved_at: datetime | None = None
        self.notes: tuple[str, ...] = file.notes
        self._memo: dict[tuple[Any, ...], Any] = {}
        self._last_log_tick: float | None = None
        self.running_s = running_s
        self._begun = (clock(), running_s())

    def now(self) -> datetime:
        """The moment that a proof is held against: the later of the wall clock and of one that nobody sets.

        A wall clock that stands before the last entry of the log is given as it is: then nothing is proved.
        """
        wall, (begun, ticks) = self.clock(), self._begun
        latest = max((entry.at for entry in self.job.isolation), default=wall)
        return wall if wall < latest else max(wall, begun + timedelta(seconds=self.running_s() - ticks))

    # opening ------------------------------------------------------------------------------------------------
    @classmethod
    def open(cls, path: Path, *, clock: Clock = _now, want_write: bool = True, by: str = "") -> Self:
        """Open a job. A writer's opening is logged: whatever was proved before no longer counts."""
        visit = cls(JobFile.open(path, clock(), want_write=want_write), clock=clock, by=by)
        if not visit.read_only:
            visit.job = accounted(visit.job, at=clock())
            visit._log_opening()
        return visit

    @classmethod
    def create_new(cls, folder: Path, name: str, *, clock: Clock = _now, by: str = "") -> Self:
        """Start a job in a folder under a name that cannot leave it."""
        from fieldtool.job.place import Board, Site
        from fieldtool.jobfile.shelf import free_path

        job = Job(site=Site(name=name), boards=(Board(id="b1", name="board 1"),))
        file = JobFile.create(free_path(folder, name), accounted(job, at=clock()), clock())
        visit = cls(file, clock=clock, by=by)
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

    def put_all(self, changes: Sequence[Change], why: str) -> str:
        """Make several changes as one entry, all or none. Empty, or one sentence saying what is wrong."""
        return self._apply(changes, why)

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
