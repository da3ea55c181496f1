"""Folders of jobs to review, and the review run on them."""

from __future__ import annotations

import io
import json
from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from fieldtool.commands import review
from fieldtool.diagnosis.explain import explain
from fieldtool.job.job import Job
from fieldtool.job.request import KeptFinding, VerdictKept
from fieldtool.reference.edition import EDITION, RULE_SET
from fieldtool.verdict.best import standing
from tests.jobs import Facts, facts, made

NOW = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)


def put(folder: Path, name: str, *edits: Callable[[Facts], None], sample: str = "larch_row") -> Path:
    """A sample in a file of this name, with edits made to its facts first; its path."""
    body = facts(sample)
    for edit in edits:
        edit(body)
    path = folder / name
    path.parent.mkdir(parents=True, exist_ok=True)
    path.write_text(json.dumps(body))
    return path


def reviewed(folder: Path, *args: str) -> tuple[int, str, str]:
    """Exit code, stdout and stderr of a review."""
    out, err = io.StringIO(), io.StringIO()
    code = review.run([str(folder), *args], out, err)
    return code, out.getvalue(), err.getvalue()


def rows_of(folder: Path, *args: str) -> dict[str, dict[str, Any]]:
    """The rows of a review by the name of their file."""
    _, out, _ = reviewed(folder, "--json", *args)
    return {row["file"]: row for row in json.loads(out)["jobs"]}


def keep_verdict(body: Facts, *, rule_set: str = RULE_SET, at: str = "2026-12-01T09:00:00Z") -> None:
    """Choose the way that stands for the first request, and keep its verdict as the screen does."""
    job: Job = made(body)
    request = job.requests[0]
    answer = standing(job, request, explain(job, request.circuit))
    assert answer.verdict is not None
    body["requests"][0]["chosen_way"] = answer.way
    kept = VerdictKept(
        id="v900",
        request=request.id,
        way=answer.way,
        at=datetime.fromisoformat(at),
        why="work_begins",
        rule_set=rule_set,
        edition=EDITION,
        figures="",
        outcome=answer.outcome,
        findings=tuple(
            KeptFinding(rule=f.rule, place=f.place, outcome=f.outcome, measured=f.measured, limit=f.limit, unit=f.unit)
            for f in answer.verdict.findings
            if f.outcome != "not_applicable"
        ),
    )
    body["verdicts"] = [kept.model_dump(mode="json")]
