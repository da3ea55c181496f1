"""What the record prints: each circuit's answers, worked out afresh, and every published figure they stand on."""

from __future__ import annotations

from dataclasses import dataclass

from fieldtool.answers import CircuitReading, Verdict, WayAnswer
from fieldtool.diagnosis.explain import explain
from fieldtool.job.job import Job
from fieldtool.job.request import Request
from fieldtool.reference.used import Asked, figures_used
from fieldtool.safety.after import finished
from fieldtool.verdict.compare import compare, existing, judge
from fieldtool.verdict.contract import proposed
from fieldtool.verdict.predict import Held, held_against
from fieldtool.ways.way import every_way

__all__ = ["CircuitAnswers", "Proposal", "gather"]


@dataclass(frozen=True, slots=True)
class Proposal:
    """One request with every way for it, the way that is proposed, and the readings after the work."""

    request: Request
    ways: tuple[WayAnswer, ...]
    proposed: WayAnswer
    held: tuple[Held, ...]
    left: tuple[str, ...]

    @property
    def chosen(self) -> bool:
        """True where somebody chose the way; else it is the best that could serve."""
        return self.request.chosen_way is not None


@dataclass(frozen=True, slots=True)
class CircuitAnswers:
    """What the core says of one circuit."""

    circuit_id: str
    reading: CircuitReading
    existing: Verdict
    proposals: tuple[Proposal, ...]
    used: dict[Asked, object]


def gather(job: Job, circuit_id: str) -> CircuitAnswers:
    """Everything the core says of a circuit now. KeyError for an unknown circuit.

    The figures used are those of the circuit as it stands and of the ways proposed, not of every way compared.
    """
    reading = explain(job, circuit_id)
    asked = proposed(job, circuit_id)
    compared = {item.id: compare(job, item, reading) for item in asked}
    with figures_used() as used:
        stands = existing(job, circuit_id, reading)
        proposals = tuple(_proposal(job, item, compared[item.id], reading) for item in asked)
    return CircuitAnswers(circuit_id, reading, stands, proposals, dict(used))


def _proposal(job: Job, request: Request, ways: tuple[WayAnswer, ...], reading: CircuitReading) -> Proposal:
    answer = next((item for item in ways if item.way == request.chosen_way), None)
    if answer is None:
        answer = next((item for item in ways if item.applies and item.way != "leave_it"), ways[0])
    for way in every_way():
        if way.key == answer.way:
            judge(job, request, way, reading)
    predicted = answer.verdict.predicted if answer.verdict is not None else ()
    held = held_against(job, predicted, request.circuit)
    outside = sum(item.agrees is False for item in held)
    left = finished(job, request, answer.repeat_tests, outside)
    return Proposal(request, ways, answer, held, left)
