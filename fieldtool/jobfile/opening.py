"""Opening a job: the main file, else the newest good generation, and the person told exactly what was done.

A damaged file is set aside untouched, never overwritten. A file of a newer make opens for looking only; an older
one is migrated and its original kept. One writer at a time; everybody else reads and keeps up.
"""

from __future__ import annotations

import contextlib
import os
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

from fieldtool.job.job import SCHEMA, Job
from fieldtool.jobfile.bytes_in import document, read_bytes
from fieldtool.jobfile.lock import WriterLock
from fieldtool.jobfile.migrations import STEPS, migrate
from fieldtool.jobfile.problems import JobFileProblem, SaveProblem
from fieldtool.jobfile.rows import Serialiser, job_from, plain_rows
from fieldtool.jobfile.salvage import UNREADABLE, differences, salvage
from fieldtool.jobfile.storage import open_tables, seal_holds
from fieldtool.jobfile.swap import Files, generations, said_of

__all__ = ["JobFile", "Loaded", "load", "read_job"]


@dataclass(frozen=True, slots=True)
class Loaded:
    """A job as read from one file: its generation, and whether it was migrated or is of a newer make."""

    job: Job
    generation: int
    migrated: bool = False
    newer: bool = False


def load(path: Path) -> Loaded:
    """The job in one file, checked. Raises JobFileProblem; nothing is written."""
    data = read_bytes(path)
    seal = seal_holds(data)
    if seal is False:
        raise JobFileProblem("damaged", f"{path.name[:30]} is damaged: its content does not fit its seal.")
    body = plain_rows(document(data, path))
    about = body.get("about", {})
    if not isinstance(about, dict):
        raise JobFileProblem("not-a-job", f"{path.name[:30]} is JSON, but not a job.")
    shape = about.get("schema", SCHEMA)
    if not isinstance(shape, int) or isinstance(shape, bool) or shape < 0:
        raise JobFileProblem("other-schema", f"{path.name[:30]} does not say which shape it has.")
    written = "generation" in about and about["generation"] is not None
    if written != bool(about.get("check")) or (written and seal is None):
        raise JobFileProblem("damaged", f"{path.name[:30]} is damaged: its seal is half there.")
    generation = about.get("generation") or 0
    if shape > SCHEMA:
        about["schema"] = SCHEMA
        return Loaded(job_from(body, path, lenient=True), generation, newer=True)
    if shape < SCHEMA:
        if shape not in STEPS:
            raise JobFileProblem("other-schema", f"{path.name[:30]} is of a make that is no longer read.")
        body = migrate(body, shape, SCHEMA)
    return Loaded(job_from(body, path), generation, migrated=shape < SCHEMA)


def read_job(path: Path) -> Job:
    """A job for a headless command: no lock taken, nothing written. Raises JobFileProblem.

    A damaged file is not quietly replaced by an older generation here: ``mend`` is for that.
    """
    loaded = load(path)
    if loaded.newer:
        raise JobFileProblem("other-schema", f"{path.name[:30]} is of a newer make: update the tool to judge it.")
    return loaded.job


class JobFile:
    """An open job file: the job that was read, and the way to save the next one."""

    def __init__(self, path: Path, loaded: Loaded, *, lock: WriterLock | None, files: Files | None = None) -> None:
        self.path = path
        self.job = loaded.job
        self.generation = loaded.generation
        self.newer = loaded.newer
        self.notes: tuple[str, ...] = ()
        self.differences: tuple[str, ...] = ()
        self.holder = ""
        self._lock = lock
        self._files = files if files is not None else Files()
        self._packer = Serialiser()
        self._seen = _stamp(path)

    @property
    def read_only(self) -> bool:
        """True where somebody else writes, or the file is of a newer make."""
        return self._lock is None or self.newer

    @classmethod
    def create(cls, path: Path, job: Job, now: datetime, files: Files | None = None) -> JobFile:
        """A new job file. Raises SaveProblem when it cannot be written; a file that is there is not overwritten."""
        if path.exists():
            raise SaveProblem(f"{path.name[:40]} is there already; nothing was overwritten.")
        try:
            make_folder(path.parent)
        except OSError as problem:
            raise SaveProblem(said_of(problem)) from problem
        lock = WriterLock(path)
        if not lock.take(now):
            raise SaveProblem("This folder cannot be written; choose another.")
        made = cls(path, Loaded(job, 0), lock=lock, files=files)
        try:
            made.save(job)
        except SaveProblem:
            made.close()
            raise
        return made

    @classmethod
    def open(cls, path: Path, now: datetime, *, want_write: bool = True, files: Files | None = None) -> JobFile:
        """Open a job file, for writing where nobody else does. Raises JobFileProblem."""
        if not path.exists() and not generations(path):
            raise JobFileProblem("not-found", f"There is no file {path.name[:40]} here.")
        lock: WriterLock | None = WriterLock(path) if want_write else None
        holder = ""
        if lock is not None and not lock.take(now):
            holder = lock.holder()
            lock = None
        try:
            made = cls._opened(path, lock, files)
        except BaseException:
            if lock is not None:
                lock.release()
            raise
        made.holder = holder or (
            "This file is of a newer make: here you can read it. Update the tool to write." if made.newer else ""
        )
        if made.holder:
            made.notes = (*made.notes, made.holder)
        return made

    @classmethod
    def _opened(cls, path: Path, lock: WriterLock | None, files: Files | None) -> JobFile:
        try:
            loaded = load(path)
        except JobFileProblem as problem:
            return cls._recovered(path, problem, lock, files)
        made = cls(path, loaded, lock=lock, files=files)
        if loaded.migrated:
            made.notes = ("The file was of an older make; its original is kept beside it.",)
            if lock is not None:
                _keep_original(path, made._files)
        return made

    @classmethod
    def _recovered(cls, path: Path, problem: JobFileProblem, lock: WriterLock | None, files: Files | None) -> JobFile:
        """The newest good generation of a file that cannot be read, the file itself set aside."""
        if problem.code in ("a-directory", "too-large", "unreadable"):
            raise problem
        for kept in generations(path):
            with contextlib.suppress(JobFileProblem):
                loaded = load(kept)
                # Written before anything is moved: whichever step fails, a good generation is still there.
                made = cls(path, loaded, lock=lock, files=files)
                made.differences = differences(loaded.job, salvage(_whatever_is_there(path)))
                aside = _set_aside(path) if lock is not None else None
                when = datetime.fromtimestamp(kept.stat().st_mtime).astimezone().strftime("%H:%M")
                said = f"The job file is damaged. The {when} copy is open; {_missing(made.differences)}"
                where = f"The damaged file is kept as {aside.name}." if aside is not None else ""
                made.notes = tuple(line for line in (said, where) if line)
                return made
        raise problem

    def save(self, job: Job) -> None:
        """Bring a whole job to the disk, in one step. Raises SaveProblem; what stood there then still stands."""
        if self.read_only:
            raise SaveProblem(self.holder or "This is a read-only view: nothing is saved.")
        with open_tables(self.path, self._files) as tables:
            tables.storage.write(self._packer.tables(job, self.generation + 1))
        self.generation += 1
        self.job = job
        self._seen = _stamp(self.path)

    def reload_if_changed(self) -> Job | None:
        """For a reader: the job as the writer last saved it; None where nothing changed or it cannot be read now."""
        stamp = _stamp(self.path)
        if stamp is None or stamp == self._seen:
            return None
        try:
            loaded = load(self.path)
        except JobFileProblem:
            return None
        self._seen = stamp
        self.job, self.generation = loaded.job, loaded.generation
        return loaded.job

    def move_to(self, folder: Path, job: Job) -> None:
        """Go on in another folder, where this one cannot be written. Raises SaveProblem."""
        target = folder / self.path.name
        number = 2
        while target.exists():
            target = folder / f"{self.path.stem}-{number}{self.path.suffix}"
            number += 1
        lock = WriterLock(target)
        try:
            make_folder(folder)
        except OSError as problem:
            raise SaveProblem(said_of(problem)) from problem
        from datetime import UTC

        if not lock.take(datetime.now(UTC)):
            raise SaveProblem("That folder cannot be written either; choose another.")
        old_path, old_lock = self.path, self._lock
        self.path, self._lock = target, lock
        try:
            self.save(job)
        except SaveProblem:
            self.path, self._lock = old_path, old_lock
            lock.release()
            raise
        if old_lock is not None:
            old_lock.release()

    def close(self) -> None:
        """Let the file go."""
        if self._lock is not None:
            self._lock.release()


def make_folder(folder: Path) -> None:
    """A folder that only its owner can look into, where it is not there yet."""
    if not folder.exists():
        folder.mkdir(parents=True, mode=0o700)
        with contextlib.suppress(OSError):
            os.chmod(folder, 0o700)


def _stamp(path: Path) -> tuple[int, int] | None:
    try:
        found = path.stat()
    except OSError:
        return None
    return (found.st_mtime_ns, found.st_ino)


def _whatever_is_there(path: Path) -> bytes:
    """The bytes of a file that is damaged; none where there is none."""
    with contextlib.suppress(JobFileProblem):
        return read_bytes(path)
    return b""


def _missing(lines: Sequence[str]) -> str:
    if UNREADABLE in lines:
        return "later entries are missing."
    return f"{len(lines)} entries differ." if lines else "nothing differs."


def _set_aside(path: Path) -> Path | None:
    """Rename a damaged file so that nothing overwrites it; None where there is none."""
    if not path.exists():
        return None
    number = 1
    while path.with_name(f"{path.name}.damaged-{number}").exists():
        number += 1
    aside = path.with_name(f"{path.name}.damaged-{number}")
    os.replace(path, aside)
    return aside


def _keep_original(path: Path, files: Files) -> None:
    kept = path.with_name(f"{path.name}.older-make")
    if not kept.exists():
        with contextlib.suppress(OSError):
            files.copy(path, kept)
