"""Writing a whole file so that the old content or the new one stands there, whatever happens in between.

A temporary file in the same folder, flushed and synced, earlier generations kept, one atomic replace, the folder
synced where the platform has that. The only place that knows how platforms differ.
"""

from __future__ import annotations

import contextlib
import errno
import os
import shutil
import time
from pathlib import Path

from fieldtool.jobfile.problems import SaveProblem

__all__ = ["GENERATIONS", "Files", "generations", "replace_whole", "said_of"]

GENERATIONS = 5
"""How many earlier generations of a job file are kept."""


class Files:
    """The file calls a save makes, in one seam: tests count, stop and fail them; a platform differs here alone."""

    folder_sync = os.name != "nt"
    replace_tries = 20 if os.name == "nt" else 1
    """Windows refuses to replace a file that a reader holds open; a reader holds it for milliseconds."""

    def write_new(self, path: Path, data: bytes) -> None:
        """Write a new file readable by its owner alone, flushed and synced."""
        handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_TRUNC | getattr(os, "O_NOFOLLOW", 0), 0o600)
        try:
            view = memoryview(data)
            while view:
                view = view[os.write(handle, view) :]
            self.sync(handle)
        finally:
            os.close(handle)

    def sync(self, handle: int) -> None:
        """Bring a file's bytes to the medium."""
        os.fsync(handle)

    def link(self, old: Path, new: Path) -> None:
        """Give a file a second name."""
        os.link(old, new)

    def copy(self, old: Path, new: Path) -> None:
        """Copy a file, where the medium has no second names."""
        shutil.copyfile(old, new)
        os.chmod(new, 0o600)

    def replace(self, old: Path, new: Path) -> None:
        """Put a file in another's place in one step; tried again for half a second where a reader is in the way."""
        for left in reversed(range(self.replace_tries)):
            try:
                self.rename(old, new)
            except PermissionError:
                if not left:
                    raise
                time.sleep(0.025)
            else:
                return

    def rename(self, old: Path, new: Path) -> None:
        """The platform's own replacing rename."""
        os.replace(old, new)

    def remove(self, path: Path) -> None:
        """Take a file away; no file is no problem."""
        with contextlib.suppress(FileNotFoundError):
            os.unlink(path)

    def sync_folder(self, folder: Path) -> None:
        """Bring a folder's names to the medium, where the platform can."""
        if not self.folder_sync:
            return
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def generations(path: Path) -> tuple[Path, ...]:
    """The kept earlier generations of a job file, newest first; those that are there."""
    found = (path.with_name(f".{path.name}.{number}") for number in range(1, GENERATIONS + 1))
    return tuple(item for item in found if item.exists())


def replace_whole(path: Path, data: bytes, files: Files | None = None) -> None:
    """Put ``data`` in the place of a file in one step, the old content kept as its newest earlier generation.

    Raises SaveProblem with one sentence; the file then still holds what it held before.
    """
    files = files if files is not None else Files()
    target = path.resolve() if path.is_symlink() else path
    fresh = target.with_name(f".{target.name}.new")
    try:
        files.write_new(fresh, data)
        if target.exists():
            _keep(target, files)
        files.replace(fresh, target)
        files.sync_folder(target.parent)
    except OSError as problem:
        with contextlib.suppress(OSError):
            files.remove(fresh)
        raise SaveProblem(said_of(problem)) from problem


def _keep(target: Path, files: Files) -> None:
    """Shift the earlier generations by one and give the present content the first of their names."""
    names = [target.with_name(f".{target.name}.{number}") for number in range(1, GENERATIONS + 1)]
    for older, newer in zip(reversed(names), reversed(names[:-1]), strict=False):
        if newer.exists():
            files.replace(newer, older)
    aside = target.with_name(f".{target.name}.keep")
    files.remove(aside)
    try:
        files.link(target, aside)
    except OSError as problem:
        if problem.errno in (errno.ENOSPC, errno.EDQUOT, errno.EIO, errno.EROFS):
            raise
        files.copy(target, aside)
    files.replace(aside, names[0])


def said_of(problem: OSError) -> str:
    """One sentence for an error of the file system: what it means, and what to do."""
    if problem.errno in (errno.ENOSPC, errno.EDQUOT):
        return "The card is full: what you typed is held here, not saved. Free space, or F6."
    if problem.errno in (errno.EROFS, errno.EACCES, errno.EPERM):
        return "This folder cannot be written: what you typed is held here. F6: another folder."
    if problem.errno in (errno.ENOENT, errno.ENODEV, errno.ENXIO, errno.ENOTDIR):
        return "The folder is gone: what you typed is held here. Put it back, or F6."
    return "The job could not be saved: what you typed is held here. It is tried again."
