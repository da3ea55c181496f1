"""The answer that stands for a request, without its margins: of the way chosen, else of the best way.

What ``compare`` would put first, found without judging every way to the end: a way is let go as soon as one finding
shows that it cannot come before the best one so far. For whoever looks at many jobs, where metres of headroom and
what to expect after the work are not asked for.
"""

from __future__ import annotations

from dataclasses import replace

from fieldtool.answers import CircuitReading, Finding, WayAnswer, worst_first
from fieldtool.job.job import Job
from fieldtool.job.request import Request
from fieldtool.rules.engine import Rule, catalogue, run_rule
from fieldtool.rules.facts import Facts
from fieldtool.verdict.check import check, edited, found_for, readings_to_judge_under, verdict_of
from fieldtool.verdict.compare import RANK, answer_of, compare, worse_of
from fieldtool.verdict.predict import predict
from fieldtool.ways.way import Refusal, Way, every_way

__all__ = ["by_way", "standing"]

_Place = tuple[int, bool, int, int]
"""Where a way stands among others: verdict, refused, work, order; the smallest first, as ``compare`` ranks."""


def standing(job: Job, request: Request, reading: CircuitReading | None = None, *, foretold: bool = False) -> WayAnswer:
    """The answer for the way that was chosen, else for the best way that could serve; margins left out.

    ``foretold`` adds what the tests after the work must read.
    """
    chosen = next((way for way in every_way() if way.key == request.chosen_way), None)
    if chosen is None:
        found = _Search(job, request, reading).best()
        if found is None:
            return compare(job, request, reading)[0]
        if not foretold:
            return found
        chosen = next(way for way in every_way() if way.key == found.way)
    return by_way(job, request, chosen, reading, foretold=foretold)


def by_way(
    job: Job, request: Request, way: Way, reading: CircuitReading | None = None, *, foretold: bool = False
) -> WayAnswer:
    """One way's answer under the worse standing explanation; margins left out. ``foretold`` as for ``standing``."""
    answers = []
    for under in readings_to_judge_under(reading):
        facts = edited(job, request, way, found_for(job, request.circuit, under, request), reading=under)
        if isinstance(facts, Refusal):
            answers.append(answer_of(way, facts))
            continue
        verdict = check(facts)
        answers.append(answer_of(way, facts, replace(verdict, predicted=predict(facts)) if foretold else verdict))
    return worse_of(answers)


class _Search:
    """The search for the best way: ways in order of work, the best so far as the bound for the next."""

    def __init__(self, job: Job, request: Request, reading: CircuitReading | None) -> None:
        self.job = job
        self.request = request
        self.unders = readings_to_judge_under(reading)
        self.found = [found_for(job, request.circuit, under, request) for under in self.unders]
        self.decided = any(item.request == request.id for item in job.overrides)
        self.rules: list[Rule] = list(catalogue())
        self.answer: WayAnswer | None = None
        self.place: _Place | None = None

    def best(self) -> WayAnswer | None:
        """The best way's answer; None where no way is about this circuit."""
        ways = []
        for way in every_way():
            if way.key == "leave_it":
                continue
            facts = [
                edited(self.job, self.request, way, found, reading=under)
                for found, under in zip(self.found, self.unders, strict=True)
            ]
            if any(isinstance(item, Refusal) and not item.applies for item in facts):
                continue
            works = [item.edit.work for item in facts if not isinstance(item, Refusal) and item.edit is not None]
            ways.append((min(works, default=0), way.order, way, facts))
        for work, _, way, facts in sorted(ways, key=lambda item: item[:2]):
            self._try(way, facts, work)
        return self.answer

    def _try(self, way: Way, facts: list[Facts | Refusal], work: int) -> None:
        answers = []
        for item in facts:
            if isinstance(item, Refusal):
                answers.append(answer_of(way, item))
                continue
            findings = self._run(item, work, way.order)
            if findings is None:
                return
            answers.append(answer_of(way, item, verdict_of(item, findings)))
        answer = worse_of(answers)
        place = (RANK[answer.outcome], answer.verdict is None, answer.work, way.order)
        if self.place is None or place < self.place:
            self.answer, self.place = answer, place

    def _run(self, facts: Facts, work: int, order: int) -> tuple[Finding, ...] | None:
        """Every rule's answers; None as soon as the way can no longer come first."""
        found: dict[str, tuple[Finding, ...]] = {}
        for number, rule in enumerate(self.rules):
            found[rule.id] = run_rule(rule, facts)
            least = max((self._least(finding) for finding in found[rule.id]), default=0)
            if self.place is not None and (least, False, work, order) > self.place:
                # What stopped one way often stops the next: that rule is asked first from here on.
                self.rules.insert(0, self.rules.pop(number))
                return None
        return worst_first(tuple(finding for key in sorted(found) for finding in found[key]))

    def _least(self, finding: Finding) -> int:
        """The best verdict that is still possible with this finding; a designer's decision may lift a stop."""
        if finding.advice:
            return 0
        if finding.outcome == "broken":
            return RANK["conditions"] if self.decided else RANK["stop"]
        return {"cannot_tell": RANK["more"], "condition": RANK["conditions"]}.get(finding.outcome, 0)
