"""A record or a table brought to a file: whole or not at all, and never over another file."""

from __future__ import annotations

import contextlib
import errno
import os
from datetime import datetime
from pathlib import Path

from fieldtool.job.job import Job
from fieldtool.jobfile.swap import Files
from fieldtool.quantities.show import plain, shorten
from fieldtool.record.contents import contents
from fieldtool.record.private import without_customer
from fieldtool.reference.load import ReferenceProblem

__all__ = ["PaperProblem", "free_name", "put_new", "record_bytes", "written_beside"]

SUFFIXES = (".pdf", ".html")


class PaperProblem(Exception):
    """A file that was not written; says in one sentence why. What stood there before still stands."""


def record_bytes(job: Job, suffix: str, now: datetime, *, customer: bool = True) -> bytes:
    """A job's record as the bytes of a file of this kind. Raises PaperProblem for a kind there is not, and for a job
    whose cable or device is in no table.
    """
    if suffix not in SUFFIXES:
        raise PaperProblem("a record is written as .pdf or .html; name the file so")
    try:
        made = contents(job if customer else without_customer(job), now)
    except ReferenceProblem as problem:
        raise PaperProblem(f"the job names what no table has: {problem}") from problem
    if suffix == ".html":
        from fieldtool.record.html import as_html

        return as_html(made)
    from fieldtool.record.pdf import as_pdf

    return as_pdf(made, now)


def put_new(path: Path, data: bytes, files: Files | None = None) -> bool:
    """Write a file that is not there yet, in one step, readable by its owner alone. True when it was written.

    A file that is there is left as it is: with the same content it is False, with any other it raises PaperProblem.
    """
    files = files if files is not None else Files()
    name = shorten(plain(path.name), 60)
    fresh = path.with_name(f".{path.name}.{os.getpid()}.new")
    try:
        if path.exists() or path.is_symlink():
            return _there(path, data, name)
        files.write_new(fresh, data)
        try:
            files.link(fresh, path)
        except FileExistsError:
            return _there(path, data, name)
        except OSError as problem:
            if problem.errno not in (errno.EPERM, errno.ENOTSUP, errno.EOPNOTSUPP, errno.ENOSYS, errno.EMLINK):
                raise
            # A medium without second names: the check above is all there is before the step.
            files.replace(fresh, path)
        files.sync_folder(path.parent)
    except OSError as problem:
        raise PaperProblem(_said(problem, name)) from problem
    finally:
        with contextlib.suppress(OSError):
            files.remove(fresh)
    return True


def _there(path: Path, data: bytes, name: str) -> bool:
    if path.is_file() and path.stat().st_size == len(data) and path.read_bytes() == data:
        return False
    raise PaperProblem(f"{name} is there already and holds something else; nothing was overwritten, name another file")


def _said(problem: OSError, name: str) -> str:
    if problem.errno in (errno.ENOSPC, errno.EDQUOT):
        return f"{name} was not written: the medium is full"
    if problem.errno in (errno.EROFS, errno.EACCES, errno.EPERM):
        return f"{name} was not written: its folder cannot be written"
    if problem.errno in (errno.ENOENT, errno.ENOTDIR):
        return f"{name} was not written: there is no such folder"
    return f"{name} was not written: {os.strerror(problem.errno or 0).lower()}"


def written_beside(job: Job, job_path: Path, now: datetime) -> str:
    """Write a job's record as PDF beside its file, under a name that no file has. Says in one sentence where it is."""
    path = free_name(job_path, ".pdf")
    try:
        put_new(path, record_bytes(job, ".pdf", now))
    except PaperProblem as problem:
        return f"{problem}.".replace("..", ".")
    folder = plain(str(path.parent))
    return f"Record written: {shorten(plain(path.name), 40)} in {folder if len(folder) < 60 else '…' + folder[-50:]}"


def free_name(job_path: Path, suffix: str) -> Path:
    """A name beside a job file that no file has yet: the job's own with ``-record``, then ``-record-2`` and so on."""
    number, made = 2, job_path.with_name(f"{job_path.stem}-record{suffix}")
    while made.exists() or made.is_symlink():
        made = job_path.with_name(f"{job_path.stem}-record-{number}{suffix}")
        number += 1
    return made
