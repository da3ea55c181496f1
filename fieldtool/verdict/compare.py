"""Every way for one request, each judged by the one checker and ranked: verdict first, then least work."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from fieldtool.answers import CircuitReading, Verdict, VerdictWord, WayAnswer
from fieldtool.job.job import Job
from fieldtool.job.request import Request
from fieldtool.rules.facts import Facts
from fieldtool.verdict.check import check, edited, existing_facts, found_for, readings_to_judge_under
from fieldtool.verdict.headroom import governing, headroom
from fieldtool.verdict.predict import predict
from fieldtool.ways.way import Refusal, Way, every_way

__all__ = ["RANK", "answer_of", "compare", "existing", "judge", "worse_of"]

RANK: dict[VerdictWord, int] = {"go": 0, "conditions": 1, "more": 2, "stop": 3}
"""Verdicts from best to worst."""

_LEAVE = 1.5


def existing(job: Job, circuit_id: str, reading: CircuitReading | None = None) -> Verdict:
    """The circuit as it stands, judged: under every explanation that still stands, the worse verdict."""
    return max(
        (check(existing_facts(job, circuit_id, under)) for under in readings_to_judge_under(reading)),
        key=lambda verdict: RANK[verdict.outcome],
    )


def judge(job: Job, request: Request, way: Way, reading: CircuitReading | None = None) -> WayAnswer:
    """One way for one request: the verdict under the worse standing explanation, with all that goes with it."""
    answers = [_judge(job, request, way, under) for under in readings_to_judge_under(reading)]
    return worse_of(answers)


def worse_of(answers: Sequence[WayAnswer]) -> WayAnswer:
    """The answer that counts of those under each standing explanation: one that does not serve, else the worst."""
    return max(answers, key=lambda answer: (not answer.applies, RANK[answer.outcome]))


def _judge(job: Job, request: Request, way: Way, reading: CircuitReading | None) -> WayAnswer:
    found = found_for(job, request.circuit, reading, request)
    facts = edited(job, request, way, found, reading=reading)
    if isinstance(facts, Refusal):
        return answer_of(way, facts)
    verdict = check(facts)

    def at_metres(metres: float) -> Facts | Refusal:
        return edited(job, request, way, found, reading=reading, metres=metres)

    rooms = headroom(facts, at_metres, verdict.findings)
    verdict = replace(verdict, headroom=rooms, governing=governing(rooms), predicted=predict(facts))
    return answer_of(way, facts, verdict)


def answer_of(way: Way, facts: Facts | Refusal, verdict: Verdict | None = None) -> WayAnswer:
    """A way's answer: why it is refused, or its verdict with what it takes to do it."""
    if isinstance(facts, Refusal):
        return WayAnswer(way.key, way.words, None, facts.reason, facts.applies, stopped_by=facts.reason)
    edit = facts.edit
    assert edit is not None
    assert verdict is not None
    stopped = next((f for f in verdict.findings if f.outcome == "broken" and not f.advice), None)
    waits = verdict.missing[0].words if verdict.missing else ""
    return WayAnswer(
        way=way.key,
        words=way.words,
        verdict=verdict,
        stopped_by=stopped.says if stopped is not None else (waits if verdict.outcome == "more" else ""),
        material=edit.material,
        repeat_tests=edit.repeat_tests,
        document=edit.document,
        work=edit.work,
    )


def compare(job: Job, request: Request, reading: CircuitReading | None = None) -> tuple[WayAnswer, ...]:
    """Every way for one request, best first. A stopped way stays: its reason is the lesson.

    Order: verdict, then least work, then the order ways are offered in; ways that are not about this circuit last.
    """
    answers = [judge(job, request, way, reading) for way in every_way()]
    order: dict[str, int] = {way.key: way.order for way in every_way()}

    def place(answer: WayAnswer) -> tuple[bool, float, bool, int, int]:
        rank: float = RANK[answer.outcome]
        if answer.way == "leave_it" and rank < _LEAVE:
            # Nothing added is always possible: it stands behind every way that may be done.
            rank = _LEAVE
        return (not answer.applies, rank, answer.verdict is None, answer.work, order[answer.way])

    ranked = sorted(answers, key=place)
    return tuple(replace(answer, rank=number) for number, answer in enumerate(ranked, start=1))
