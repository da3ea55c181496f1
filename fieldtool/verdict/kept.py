"""What changed since a verdict was kept: the finding of then against the finding of now, by rule and place."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import isclose
from typing import Literal

from fieldtool.answers import Finding, Verdict
from fieldtool.job.job import Job
from fieldtool.job.request import KeptFinding, VerdictKept

__all__ = ["Changed", "changes", "entries_since", "last_kept"]

_Answer = KeptFinding | Finding
"""What both have: rule, place, outcome and figures."""

Kind = Literal["new", "gone", "outcome", "figures"]

_WORST = ("broken", "cannot_tell", "condition", "holds")
"""Outcomes that are kept, worst first."""


@dataclass(frozen=True, slots=True)
class Changed:
    """One rule at one place that answers otherwise than when the verdict was kept.

    ``was`` and ``now`` are outcomes, None where that rule said nothing there; ``measured`` and ``limit`` pair the
    figures of then and now [``unit``]. ``worse`` is True where the answer of now weighs more.
    """

    rule: str
    place: str
    kind: Kind
    was: str | None
    now: str | None
    measured: tuple[float | None, float | None]
    limit: tuple[float | None, float | None]
    unit: str
    worse: bool


def last_kept(job: Job, request_id: str) -> VerdictKept | None:
    """The newest verdict kept for a request; None where none was."""
    mine = [row for row in job.verdicts if row.request == request_id]
    return max(mine, key=lambda row: row.at, default=None)


def entries_since(job: Job, kept: VerdictKept) -> int:
    """How many entries were made after a verdict was kept, verdicts and the isolation log left out.

    With none, what changed is the rules and not the figures.
    """
    return sum(
        entry.at > kept.at and entry.what.partition("/")[0] not in ("verdicts", "isolation", "parted")
        for entry in job.history
    )


def changes(kept: VerdictKept, verdict: Verdict | None) -> tuple[Changed, ...]:
    """Where the verdict of now differs from the kept one, worse answers first, then by rule and place.

    ``verdict`` is None where the way no longer serves: then every finding is gone. Where a rule has several answers
    at one place, its worst one is told. Figures are compared to nine digits.
    """
    now = (f for f in (verdict.findings if verdict is not None else ()) if f.outcome != "not_applicable")
    then_by, now_by = _by_place(kept.findings), _by_place(now)
    out = []
    for key in {**then_by, **now_by}:
        told = _compared(then_by.get(key, []), now_by.get(key, []))
        if told is not None:
            out.append(told)
    return tuple(sorted(out, key=lambda item: (not item.worse, item.rule, item.place)))


def _by_place(findings: Iterable[_Answer]) -> dict[tuple[str, str], list[_Answer]]:
    found: dict[tuple[str, str], list[_Answer]] = {}
    for finding in sorted(findings, key=lambda f: (_weight(f.outcome), f.measured or 0.0, f.limit or 0.0)):
        found.setdefault((finding.rule, finding.place), []).append(finding)
    return found


def _compared(then: list[_Answer], now: list[_Answer]) -> Changed | None:
    same_outcomes = [f.outcome for f in then] == [f.outcome for f in now]
    if same_outcomes and all(_same_figures(a, b) for a, b in zip(then, now, strict=True)):
        return None
    was = then[0] if then else None
    is_now = now[0] if now else None
    some = is_now or was
    assert some is not None
    kind: Kind = "new" if was is None else "gone" if is_now is None else "figures" if same_outcomes else "outcome"
    return Changed(
        rule=some.rule,
        place=some.place,
        kind=kind,
        was=was.outcome if was is not None else None,
        now=is_now.outcome if is_now is not None else None,
        measured=(was.measured if was is not None else None, is_now.measured if is_now is not None else None),
        limit=(was.limit if was is not None else None, is_now.limit if is_now is not None else None),
        unit=some.unit,
        worse=_weight(is_now.outcome if is_now else "holds") < _weight(was.outcome if was else "holds"),
    )


def _weight(outcome: str) -> int:
    return _WORST.index(outcome) if outcome in _WORST else len(_WORST)


def _same_figures(then: _Answer, now: _Answer) -> bool:
    return all(
        (a is None) == (b is None) and (a is None or b is None or isclose(a, b, rel_tol=1e-9, abs_tol=1e-12))
        for a, b in ((then.measured, now.measured), (then.limit, now.limit))
    )
