"""The verdict of a job as plain data: the JSON contract ``fieldtool-verdict/1``.

Every number is SI with its unit in the name or beside it; what is not known is null. Arrays have a stable order:
findings worst first, then by rule and place. No clock and no path is in the body.
"""

from __future__ import annotations

from math import isfinite
from typing import Any

from fieldtool import __version__
from fieldtool.answers import CircuitReading, Finding, Headroom, Verdict, VerdictWord, WayAnswer
from fieldtool.diagnosis.explain import explain
from fieldtool.job.job import Job
from fieldtool.job.request import Request
from fieldtool.reference.edition import EDITION, EDITION_SENTENCE, RULE_SET
from fieldtool.verdict.compare import compare, existing
from fieldtool.ways.way import every_way

__all__ = ["CONTRACT", "contract", "exit_of", "proposed"]

CONTRACT = "fieldtool-verdict/1"


def contract(job: Job, only: str | None = None) -> dict[str, Any]:
    """Every circuit's existing verdict, reading and proposals. KeyError when ``only`` is not a circuit."""
    if only is not None:
        job.circuit(only)
    circuits = [_circuit(job, item.id) for item in job.circuits if only in (None, item.id)]
    return {
        "contract": CONTRACT,
        "tool": __version__,
        "rule_set": RULE_SET,
        "edition": EDITION,
        "edition_note": EDITION_SENTENCE,
        "job": job.site.name,
        "exit": exit_of([proposal["verdict"] for circuit in circuits for proposal in circuit["proposals"]]),
        "circuits": circuits,
    }


def exit_of(words: list[VerdictWord]) -> int:
    """The exit code that a job's verdicts make: 3 some proposal must stop, else 4 readings are missing or nothing is
    proposed, else 0."""
    if "stop" in words:
        return 3
    if not words or "more" in words:
        return 4
    return 0


def _circuit(job: Job, circuit_id: str) -> dict[str, Any]:
    circuit = job.circuit(circuit_id)
    reading = explain(job, circuit_id)
    return {
        "circuit": circuit_id,
        "name": circuit.name or circuit_id,
        "label_claims": circuit.label_claims,
        "circuit_reading": _reading(reading),
        "existing": _verdict(existing(job, circuit_id, reading)),
        "proposals": [_proposal(job, request, reading) for request in proposed(job, circuit_id)],
    }


def proposed(job: Job, circuit_id: str) -> tuple[Request, ...]:
    """The requests on a circuit that ask for something: an outlet, or a swap."""
    return tuple(
        request
        for request in job.requests
        if request.circuit == circuit_id and (request.outlets or request.swap is not None)
    )


def _reading(reading: CircuitReading) -> dict[str, Any]:
    leading = reading.leading
    return {
        "leading": leading.id if leading is not None else None,
        "odds": leading.odds if leading is not None else None,
        "sentence": reading.sentence,
        "shown_ring": reading.shown_ring,
        "nothing_fits": reading.nothing_fits,
        "explanations": [
            {
                "id": item.id,
                "group": item.group,
                "odds": item.odds,
                "sentence": item.sentence,
                "stands": item.stands,
                "where": list(item.where),
                "reasoning": list(item.reasoning),
                "predicted": [
                    {"test": test, "place": place or None, "value": _number(value), "unit": "ohm"}
                    for test, place, value in item.predicted
                ],
                "inferred": [
                    {
                        "what": one.what,
                        "place": one.place,
                        "value": _number(one.value),
                        "low": _number(one.low),
                        "high": _number(one.high),
                        "unit": one.unit,
                    }
                    for one in item.inferred
                ],
            }
            for item in reading.explanations
        ],
        "settle_by": None if reading.settle is None else reading.settle.sentence,
        "smallest_spur_m": _number(reading.smallest_spur_m),
    }


def _proposal(job: Job, request: Request, reading: CircuitReading) -> dict[str, Any]:
    answers = compare(job, request, reading)
    chosen = next((item for item in answers if item.way == request.chosen_way), None)
    if chosen is None:
        chosen = next((item for item in answers if item.applies and item.way != "leave_it"), answers[0])
    body: dict[str, Any] = {
        "request": request.id,
        "way": chosen.way,
        "way_words": chosen.words,
        "way_chosen": request.chosen_way is not None,
        "overrides": [item.id for item in job.overrides if item.request == request.id],
        "stopped_by": chosen.stopped_by or None,
    }
    body |= _verdict(chosen.verdict) if chosen.verdict is not None else _refused(chosen)
    body["ways"] = [_way(item) for item in answers]
    return body


def _refused(answer: WayAnswer) -> dict[str, Any]:
    return {
        "verdict": "stop",
        "missing": [],
        "conditions": [],
        "findings": [],
        "headroom": [],
        "governing": None,
        "predicted": [],
        "assumed": [],
        "why": answer.refused,
    }


def _verdict(verdict: Verdict) -> dict[str, Any]:
    return {
        "verdict": verdict.outcome,
        "missing": [gap.words for gap in verdict.missing],
        "conditions": list(verdict.conditions),
        "findings": [_finding(finding) for finding in verdict.findings],
        "headroom": [_room(room) for room in verdict.headroom],
        "governing": verdict.governing or None,
        "predicted": [
            {
                "test": item.test,
                "place": item.place,
                "value": _number(item.value),
                "low": _number(item.low),
                "high": _number(item.high),
                "unit": item.unit,
                "arrangement": item.arrangement,
            }
            for item in verdict.predicted
        ],
        "assumed": list(verdict.assumed),
    }


def _finding(finding: Finding) -> dict[str, Any]:
    basis = finding.basis
    return {
        "rule": finding.rule,
        "outcome": finding.outcome,
        "advice": finding.advice,
        "regulation": finding.clause,
        "place": finding.place,
        "says": finding.says,
        "measured": _number(finding.measured),
        "tolerance": _number(finding.tol),
        "limit": _number(finding.limit),
        "unit": finding.unit,
        "origin": finding.origin,
        "limit_basis": None
        if basis is None
        else {
            "table": basis.table,
            "basis": basis.basis,
            "cmin": basis.cmin,
            "eighty_percent": basis.eighty_percent,
            "sure": basis.sure,
        },
        "working": list(finding.working),
        "do": finding.do,
        "assumed": list(finding.assumed),
        "missing": [gap.words for gap in finding.missing],
        "designer_may_decide": finding.designer_may_decide,
        "overridden_by": finding.overridden_by or None,
    }


def _room(room: Headroom) -> dict[str, Any]:
    return {
        "limit": room.limit_key,
        "place": room.place,
        "metres": _number(room.metres),
        "metres_clear_of_tolerance": _number(room.metres_clear),
        "interval": None if room.interval is None else list(room.interval),
        "why": room.why or None,
    }


def _way(answer: WayAnswer) -> dict[str, Any]:
    words = {item.key: item.words for item in every_way()}
    return {
        "way": answer.way,
        "words": words.get(answer.way, answer.words),  # type: ignore[call-overload]
        "applies": answer.applies,
        "verdict": answer.outcome if answer.applies else None,
        "rank": answer.rank,
        "stopped_by": answer.stopped_by or None,
        "governing": answer.verdict.governing or None if answer.verdict is not None else None,
        "headroom": [_room(room) for room in answer.verdict.headroom] if answer.verdict is not None else [],
        "conditions": list(answer.verdict.conditions) if answer.verdict is not None else [],
        "missing": [gap.words for gap in answer.verdict.missing] if answer.verdict is not None else [],
        "material": [{"what": item.what, "amount": item.amount, "unit": item.unit} for item in answer.material],
        "repeat_tests": list(answer.repeat_tests),
        "document": answer.document,
    }


def _number(value: float | None) -> float | None:
    """A plain finite float, or null."""
    return float(value) if value is not None and isfinite(value) else None
