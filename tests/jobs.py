"""Jobs for tests: the invented samples as plain facts, changed by hand where a test needs it."""

from __future__ import annotations

import copy
import json
from collections.abc import Callable
from datetime import UTC, datetime
from functools import cache
from pathlib import Path
from typing import Any

from fieldtool.job.job import Job
from fieldtool.jobfile.opening import JobFile

NOON = datetime(2026, 12, 1, 12, 0, tzinfo=UTC)
SAMPLES = Path(__file__).parent.parent / "sample_jobs"
Facts = dict[str, Any]


@cache
def _text(name: str) -> str:
    return (SAMPLES / f"{name}.json").read_text(encoding="utf-8")


def facts(name: str = "larch_row") -> Facts:
    """A sample's facts as plain data, free to change."""
    return copy.deepcopy(json.loads(_text(name)))


def made(body: Facts) -> Job:
    """A job from plain facts, validated as a file would be."""
    return Job.model_validate_json(json.dumps(body))


def sample(name: str = "larch_row", *edits: Callable[[Facts], None]) -> Job:
    """A sample job with edits made to its facts first."""
    body = facts(name)
    for edit in edits:
        edit(body)
    return made(body)


def row(body: Facts, table: str, row_id: str) -> Facts:
    """One row of a table by its id."""
    return next(item for item in body[table] if item["id"] == row_id)


def set_reading(body: Facts, test: str, value: float | None, point: str | None = None, **more: Any) -> None:
    """Give every reading of a cell another value; ``open`` for an open circuit."""
    for item in body["readings"]:
        if item["test"] == test and (point is None or item.get("point") == point):
            if value is None:
                item.pop("value", None)
                item["sign"] = "open"
                item["raw"] = "OL"
            else:
                item["value"] = value
                item["raw"] = f"{value:.2f}"
            item.update(more)


def drop_readings(body: Facts, test: str, point: str | None = None) -> None:
    """Take the readings of a cell out."""
    body["readings"] = [
        item
        for item in body["readings"]
        if not (item["test"] == test and (point is None or item.get("point") == point))
    ]


def ask_for(body: Facts, **request: Any) -> None:
    """Change the first request of a sample."""
    body["requests"][0].update(request)


def outlet(oid: str, metres: float, kind: str = "twin", **more: Any) -> Facts:
    """One new outlet as facts."""
    return {
        "id": oid,
        "kind": kind,
        "name": f"new {oid}",
        "metres": float(metres),
        "where": "indoors",
        "load_has_dc": "a",
        "heating_or_cooking": "no",
        **more,
    }


def written(path: Path, body: Facts) -> Path:
    """A job file of these facts; its path."""
    JobFile.create(path, made(body), NOON).close()
    return path


def empty_ring(path: Path, points: int) -> Path:
    """A job file of a ring of so many sockets of which nothing was read yet; its path."""
    body = facts("larch_row")
    body["readings"], body["requests"], body["runs"] = [], [], []
    body["points"] = [
        {"id": f"p{n}", "circuit": "c3", "kind": "twin", "name": f"P{n}", "walk_order": n} for n in range(1, points + 1)
    ]
    return written(path, body)
