"""The spot check: few keys, never "go ahead", and "do not know" never passes."""

from __future__ import annotations

from datetime import UTC, datetime

import pytest

from fieldtool.spot import UNKNOWN, asked, judge_spot
from fieldtool.spot import accept as taken

NOW = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)
TYPED = {
    "adding": "1", "what": "1", "shape": "1", "device": "1", "rcd": "1", "system": "1", "cable": "1", "taken": "1",
    "r1": ".52", "rn": ".53", "r2": ".86", "ln_cross": ".26", "le_cross": ".34", "zs": ".50", "mode": "1", "pfc": "1.4",
    "breaking": "1", "ir": ">200", "polarity": "1", "earthing": "1", "sources": "1", "metres": "3", "hidden": "1",
    "where": "1", "method": "1", "spur_here": "1",
}  # fmt: skip


def answers(**changed: str) -> dict[str, object]:
    out: dict[str, object] = {}
    for _ in range(60):
        question = next((q for q in asked(out) if q.key not in out), None)  # type: ignore[arg-type]
        if question is None:
            return out
        typed = changed.get(question.key, TYPED.get(question.key, "1"))
        out[question.key] = UNKNOWN if typed == "+" else taken(question, typed)
    return out


def test_a_sound_ring_is_at_best_on_conditions_with_its_assumptions_named() -> None:
    answer, _ = judge_spot(answers(), NOW)  # type: ignore[arg-type]
    assert answer.verdict is not None
    stops = [f.says for f in answer.verdict.findings if f.outcome in ("broken", "cannot_tell") and not f.advice]
    assert answer.outcome == "conditions", stops
    assert any("mid ring" in line for line in answer.verdict.assumed)


def test_the_keys_are_sixty_or_fewer() -> None:
    questions = asked(answers())  # type: ignore[arg-type]
    keys = 1 + sum(1 if q.choices else len(TYPED[q.key]) + 1 for q in questions)
    assert keys <= 60


@pytest.mark.parametrize("key", [k for k in TYPED if k not in ("adding", "shape")])
def test_do_not_know_never_ends_in_a_yes(key: str) -> None:
    answer, _ = judge_spot(answers(**{key: "+"}), NOW)  # type: ignore[arg-type]
    assert answer.outcome in ("more", "stop")
