"""The job files of a folder and of the folders in it, in one steady order, without ever leaving the folder.

A link to something inside the folder is passed over: what it leads to is found where it lies. A link that leads out
of it, or nowhere, is not followed and is told. Hidden files and folders (a file's kept generations among them) are
left alone.
"""

from __future__ import annotations

import os
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from fieldtool.jobfile.problems import JobFileProblem
from fieldtool.quantities.show import plain, shorten

__all__ = ["Found", "job_files"]

_SUFFIX = ".json"


@dataclass(frozen=True, slots=True)
class Found:
    """One name of the tree, relative to the folder, with ``/`` between; ``problem`` where it is not to be opened."""

    name: str
    problem: JobFileProblem | None = None


def job_files(folder: Path) -> Iterator[Found]:
    """Every job file in a folder and below, by name within each folder. Names are read a folder at a time.

    Raises JobFileProblem where the folder itself cannot be looked into.
    """
    root = folder.resolve()
    if not root.is_dir():
        code = "not-a-folder" if root.exists() else "not-found"
        said = "is not a folder; name a folder of job files" if root.exists() else "is not there"
        raise JobFileProblem(code, f"{_short(folder.name or str(folder))} {said}.")
    try:
        names = _names(root)
    except OSError:
        raise JobFileProblem(
            "unreadable", f"{_short(folder.name)} cannot be looked into: see who may read it."
        ) from None
    # A stack of its own: folders can be nested deeper than calls can.
    open_folders = [(root, iter(names))]
    while open_folders:
        folder, rest = open_folders[-1]
        name = next(rest, None)
        if name is None:
            open_folders.pop()
            continue
        path = folder / name
        told = path.relative_to(root).as_posix()
        try:
            if path.is_symlink():
                problem = _link_problem(root, path)
                if problem is not None:
                    yield Found(told, problem)
            elif path.is_dir():
                open_folders.append((path, iter(_names(path))))
            elif path.suffix.lower() == _SUFFIX:
                yield Found(told)
        except OSError:
            said = f"{_short(name)} cannot be looked into: see who may read it."
            yield Found(told, JobFileProblem("unreadable", said))


def _names(folder: Path) -> list[str]:
    return sorted(name for name in os.listdir(folder) if not name.startswith("."))


def _link_problem(root: Path, path: Path) -> JobFileProblem | None:
    """Why a link is not followed, where that must be told; None for one whose end is found where it lies."""
    try:
        end = path.resolve(strict=True)
    except (OSError, RuntimeError):
        if path.suffix.lower() != _SUFFIX:
            return None
        return JobFileProblem("link", f"{_short(path.name)} is a link that leads nowhere.")
    of_interest = end.is_dir() or _SUFFIX in (path.suffix.lower(), end.suffix.lower())
    if not of_interest or (end.is_relative_to(root) and _is_found(root, end)):
        return None
    what = "out of the folder" if not end.is_relative_to(root) else "to what is not a job file"
    return JobFileProblem("link", f"{_short(path.name)} is a link {what}: not followed.")


def _is_found(root: Path, end: Path) -> bool:
    hidden = any(part.startswith(".") for part in end.relative_to(root).parts)
    return not hidden and (end.is_dir() or end.suffix.lower() == _SUFFIX)


def _short(name: str) -> str:
    return shorten(plain(name), 40)
