"""Two additions to one circuit: never judged as if each were alone."""

from __future__ import annotations

from typing import Any

import pytest

from fieldtool.verdict.compare import compare
from tests.jobs import Facts, ask_for, outlet, sample


def second(**more: Any) -> Any:
    def edit(body: Facts) -> None:
        ask_for(body, attach="point", at="p5", outlets=[outlet("w1", 3)])
        other = {**body["requests"][0], "id": "q9", "outlets": [outlet("w9", 3)], "chosen_way": None, **more}
        body["requests"].append(other)

    return edit


def answers(*edits: Any) -> list[dict[str, Any]]:
    job = sample("larch_row", *edits)
    return [{item.way: item for item in compare(job, request)} for request in job.requests]


def test_two_requests_at_one_point_stop_each_other() -> None:
    """Each alone would be an unfused spur from the same socket; together they are two spurs on it (433.1.204)."""
    for each in answers(second()):
        assert each["spur_at_point"].outcome == "stop"
        assert "Another addition" in each["spur_at_point"].stopped_by


def test_one_given_up_does_not_stand_in_the_way() -> None:
    first, _ = answers(second(abandoned_at="2026-12-01T10:00:00Z"))
    assert first["spur_at_point"].outcome in ("go", "conditions")


@pytest.mark.parametrize("made", [None, "2026-12-01T10:00:00Z"])
def test_another_one_elsewhere_on_the_circuit_is_a_condition(made: str | None) -> None:
    first, _ = answers(second(at="p2", work_done_at=made))
    assert first["spur_at_point"].outcome == "conditions"
    assert first["spur_at_point"].verdict is not None
    said = " ".join(first["spur_at_point"].verdict.conditions)
    assert ("read again" in said) is (made is not None)
