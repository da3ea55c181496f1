"""The headroom table against bisecting the one checker itself, for every way and every governing limit."""

from __future__ import annotations

from typing import Any

import pytest

from fieldtool.answers import Finding
from fieldtool.rules.facts import Facts
from fieldtool.verdict.check import check, edited, found_for
from fieldtool.verdict.compare import compare
from fieldtool.verdict.headroom import FAR_M
from fieldtool.ways.way import every_way
from tests.jobs import sample
from tests.ways.test_ways_best_and_refused import SERVES

CLOSE_M = 0.02


def at(job: Any, way: str, metres: float) -> Facts:
    request = job.requests[0]
    found = found_for(job, request.circuit, None, request)
    facts = edited(job, request, next(item for item in every_way() if item.key == way), found, metres=metres)
    assert isinstance(facts, Facts)
    return facts


def over(findings: tuple[Finding, ...], key: str, clear: bool) -> float:
    """How far the worst place is over its limit, its tolerance added where it has to be clear of that too."""
    return max(
        (f.measured or 0.0) + (f.tol if clear else 0.0) - f.limit
        for f in findings
        if f.limit_key == key and f.limit is not None and f.measured is not None
    )


def boundary(job: Any, way: str, key: str, clear: bool, asked: float) -> float:
    """By plain bisection of the checker: metres beyond those asked at which the limit is met; FAR_M where never."""
    low, high = 0.0, FAR_M
    if over(check(at(job, way, asked)).findings, key, clear) > 0:
        return 0.0
    if over(check(at(job, way, asked + high)).findings, key, clear) <= 0:
        return FAR_M
    while high - low > CLOSE_M:
        half = (low + high) / 2
        low, high = (half, high) if over(check(at(job, way, asked + half)).findings, key, clear) <= 0 else (low, half)
    return low


@pytest.mark.parametrize("way, name, edits", [c for c in SERVES if c[0] not in ("leave_it", "single_to_twin")],
                         ids=[c[0] for c in SERVES if c[0] not in ("leave_it", "single_to_twin")])  # fmt: skip
def test_metres_left_just_pass_and_a_decimetre_more_fails(way: str, name: str, edits: list[Any]) -> None:
    job = sample(name, *edits)
    answer = next(item for item in compare(job, job.requests[0]) if item.way == way)
    assert answer.verdict is not None
    asked = at(job, way, job.requests[0].outlets[0].metres).new_runs[0].length_m or 0.0
    assert answer.verdict.headroom, "a way that lays cable has metres left"
    for room in answer.verdict.headroom:
        for clear, shown in ((False, room.metres), (True, room.metres_clear)):
            edge = boundary(job, way, room.limit_key, clear, asked)
            if shown is None:
                assert edge == FAR_M
                continue
            # Shown rounded down to half a metre: never past the edge, and never half a metre short of it.
            assert shown <= edge + CLOSE_M
            assert edge - shown < 0.5 + 2 * CLOSE_M
            if 0 < edge < FAR_M:
                assert over(check(at(job, way, asked + edge)).findings, room.limit_key, clear) <= 0
                assert over(check(at(job, way, asked + edge + 0.1)).findings, room.limit_key, clear) > 0


def test_the_limit_named_first_is_the_one_that_stops_it() -> None:
    for way, name, edits in SERVES:
        answer = next(item for item in compare(*_pair(sample(name, *edits))) if item.way == way)
        rooms = answer.verdict.headroom if answer.verdict is not None else ()
        known = [room for room in rooms if room.metres is not None]
        if known:
            assert answer.verdict is not None
            assert answer.verdict.governing == min(known, key=lambda room: room.metres or 0.0).limit_key


def _pair(job: Any) -> tuple[Any, Any]:
    return job, job.requests[0]
