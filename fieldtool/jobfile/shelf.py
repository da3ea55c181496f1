"""The folder of jobs on this machine: where it is, what is in it, names that cannot leave it."""

from __future__ import annotations

import os
import re
import unicodedata
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

from platformdirs import user_data_path

from fieldtool.job.history import accounted
from fieldtool.job.job import Job
from fieldtool.jobfile.opening import JobFile, load, make_folder
from fieldtool.jobfile.problems import JobFileProblem

__all__ = ["ShelfRow", "free_path", "job_folder", "open_sample", "safe_name", "shelf"]


@dataclass(frozen=True, slots=True)
class ShelfRow:
    """One job file of a folder; ``problem`` says why it cannot be opened, and is empty where it can."""

    path: Path
    name: str
    touched: datetime
    problem: str = ""
    job: Job | None = None


def job_folder() -> Path:
    """The folder of jobs: the one named by FIELDTOOL_JOBS, else the user's data folder; made where it is not there."""
    named = os.environ.get("FIELDTOOL_JOBS")
    folder = Path(named) if named else user_data_path("fieldtool", appauthor=False) / "jobs"
    make_folder(folder)
    return folder


def safe_name(text: str) -> str:
    """A file name from a person's text: letters, digits and dashes, never a path, never empty."""
    plain = unicodedata.normalize("NFKD", text).encode("ascii", "ignore").decode()
    words = re.sub(r"[^A-Za-z0-9]+", "-", plain).strip("-").lower()[:60].strip("-")
    return words or "job"


def free_path(folder: Path, name: str) -> Path:
    """A path in a folder for a new job of this name that nothing stands at yet."""
    base = safe_name(name)
    path = folder / f"{base}.json"
    number = 2
    while path.exists() or path.is_symlink():
        path = folder / f"{base}-{number}.json"
        number += 1
    return path


def shelf(folder: Path) -> tuple[ShelfRow, ...]:
    """The job files of a folder, last touched first. A file that cannot be opened is a row that says why."""
    rows = []
    for path in sorted(folder.glob("*.json")):
        try:
            touched = datetime.fromtimestamp(path.stat().st_mtime, UTC)
        except OSError:
            continue
        try:
            job = load(path).job
        except JobFileProblem as problem:
            rows.append(ShelfRow(path, path.stem, touched, problem.sentence))
        else:
            rows.append(ShelfRow(path, job.site.name or path.stem, touched, job=job))
    return tuple(sorted(rows, key=lambda row: row.touched, reverse=True))


def open_sample(sample: Path, folder: Path) -> Path:
    """A copy of an invented sample in the job folder, so that the sample stays as it is; its path."""
    now = datetime.now(UTC)
    path = free_path(folder, sample.stem)
    JobFile.create(path, accounted(load(sample).job, at=now), now).close()
    return path
