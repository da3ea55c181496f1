"""A job as one row of a review: what it waits for, what stops it, and what a supervisor would ask about.

The rows of the JSON contract ``fieldtool-review/1``. The isolation state depends on the moment, which is handed in;
all else depends on the job alone. Nothing is written.
"""

from __future__ import annotations

from datetime import datetime
from math import isfinite
from typing import Any

from fieldtool.answers import CircuitReading, Finding, Verdict, WayAnswer
from fieldtool.diagnosis.explain import explain
from fieldtool.diagnosis.too_exact import too_exact
from fieldtool.job.job import Job
from fieldtool.job.request import Request, VerdictKept
from fieldtool.reference.edition import EDITION, RULE_SET
from fieldtool.safety.after import finished
from fieldtool.safety.parting import outstanding
from fieldtool.safety.states import state
from fieldtool.safety.strip import strip
from fieldtool.verdict.best import by_way, standing
from fieldtool.verdict.compare import existing
from fieldtool.verdict.contract import exit_of, proposed
from fieldtool.verdict.kept import Changed, changes, entries_since, last_kept
from fieldtool.verdict.predict import held_against
from fieldtool.ways.way import every_way

__all__ = ["CONTRACT", "job_row", "problem_row"]

CONTRACT = "fieldtool-review/1"


def problem_row(name: str, code: str, sentence: str) -> dict[str, Any]:
    """The row of a file that cannot be reviewed: its one sentence."""
    return {"file": name, "exit": 2, "problem": {"code": code, "sentence": sentence}}


def job_row(name: str, job: Job, now: datetime) -> dict[str, Any]:
    """The row of one job, at the moment ``now``. Proposals in the order of the circuits and of their requests.

    A circuit is judged as it stands only where nothing is proposed on it: a proposal's verdict holds every rule of
    the circuit it adds to.
    """
    circuits, proposals = [], []
    for circuit in job.circuits:
        reading = explain(job, circuit.id)
        requests = proposed(job, circuit.id)
        circuits.append(_circuit(job, circuit.id, reading, now, judge=not requests))
        proposals += [_proposal(job, request, reading) for request in requests]
    return {
        "file": name,
        "exit": exit_of([item["verdict"] for item in proposals]),
        "problem": None,
        "job": job.site.name,
        "state": strip(job, None, now).state,
        "circuits": circuits,
        "proposals": proposals,
    }


def _circuit(job: Job, circuit_id: str, reading: CircuitReading, now: datetime, *, judge: bool) -> dict[str, Any]:
    found = state(job, circuit_id, now)
    return {
        "circuit": circuit_id,
        "name": job.circuit(circuit_id).name or circuit_id,
        "sentence": reading.sentence,
        "state": found.word,
        "proved_at_places": list(found.places),
        "state_reason": found.reason,
        "alarm": found.alarm or None,
        "outstanding": [{"what": row.what, "sort": row.sort} for row in outstanding(job, circuit_id)],
        "existing": _judged(existing(job, circuit_id, reading)) if judge else None,
        "too_exact": [
            {"kind": item.kind, "sentence": item.sentence, "places": list(item.places)}
            for item in too_exact(job, circuit_id)
        ],
    }


def _proposal(job: Job, request: Request, reading: CircuitReading) -> dict[str, Any]:
    answer = standing(job, request, reading, foretold=request.work_done_at is not None)
    return {
        "request": request.id,
        "circuit": request.circuit,
        "way": answer.way,
        "way_words": answer.words,
        "way_chosen": answer.way == request.chosen_way,
        **_answered(answer),
        "to_finish": _to_finish(job, request, answer),
        "kept": _kept(job, request, reading, answer),
    }


def _to_finish(job: Job, request: Request, answer: WayAnswer) -> list[str]:
    """What keeps work that was begun from being finished, readings outside what was foretold among it."""
    if request.work_begun_at is None and request.work_done_at is None and request.abandoned_at is None:
        return []
    predicted = answer.verdict.predicted if answer.verdict is not None else ()
    outside = sum(item.agrees is False for item in held_against(job, predicted, request.circuit))
    return list(finished(job, request, answer.repeat_tests, outside))


def _answered(answer: WayAnswer) -> dict[str, Any]:
    if answer.verdict is not None:
        return {**_judged(answer.verdict), "refused": None}
    return {"verdict": "stop", "missing": [], "conditions": [], "broken": [], "refused": answer.refused}


def _judged(verdict: Verdict) -> dict[str, Any]:
    return {
        "verdict": verdict.outcome,
        "missing": [gap.words for gap in verdict.missing],
        "conditions": list(verdict.conditions),
        "broken": [_broken(finding) for finding in verdict.reasons("broken") if not finding.advice],
    }


def _broken(finding: Finding) -> dict[str, Any]:
    return {
        "rule": finding.rule,
        "regulation": finding.clause,
        "place": finding.place,
        "says": finding.says,
        "measured": _number(finding.measured),
        "limit": _number(finding.limit),
        "unit": finding.unit,
    }


def _kept(job: Job, request: Request, reading: CircuitReading, answer: WayAnswer) -> dict[str, Any] | None:
    """The verdict kept last against the same way judged now; None where none was kept."""
    kept = last_kept(job, request.id)
    if kept is None:
        return None
    now = _same_way(job, request, reading, answer, kept)
    return {
        "at": kept.at.isoformat().replace("+00:00", "Z"),
        "why": kept.why,
        "way": kept.way,
        "rule_set_then": kept.rule_set,
        "rule_set_now": RULE_SET,
        "edition_then": kept.edition,
        "edition_now": EDITION,
        "entries_since": entries_since(job, kept),
        "verdict_then": kept.outcome,
        "verdict_now": now.outcome if now is not None else None,
        "refused_now": now.refused or None if now is not None else "There is no such way any more.",
        "changes": [_change(item) for item in changes(kept, now.verdict if now is not None else None)],
    }


def _same_way(
    job: Job, request: Request, reading: CircuitReading, answer: WayAnswer, kept: VerdictKept
) -> WayAnswer | None:
    if kept.way in ("", answer.way):
        return answer
    way = next((item for item in every_way() if item.key == kept.way), None)
    return by_way(job, request, way, reading) if way is not None else None


def _change(item: Changed) -> dict[str, Any]:
    return {
        "rule": item.rule,
        "place": item.place,
        "kind": item.kind,
        "was": item.was,
        "now": item.now,
        "measured_was": _number(item.measured[0]),
        "measured_now": _number(item.measured[1]),
        "limit_was": _number(item.limit[0]),
        "limit_now": _number(item.limit[1]),
        "unit": item.unit,
        "worse": item.worse,
    }


def _number(value: float | None) -> float | None:
    return float(value) if value is not None and isfinite(value) else None
