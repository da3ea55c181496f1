"""Requests that cannot be: one sentence that names the row and what would be right, and nothing is taken."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path

import pytest

from fieldtool.jobfile.problems import JobFileProblem
from fieldtool.jobfile.rows import job_from
from tests.jobs import Facts, ask_for, facts, row

BAD: dict[str, tuple[Callable[[Facts], None], str]] = {
    "from a point that is not there": (lambda b: ask_for(b, at="p99"), "p99 is not a point of its circuit"),
    "a run to nowhere": (
        lambda b: b["runs"].append({"id": "rx", "circuit": "c3", "a": "p1", "b": "nowhere", "length_m": 3.0}),
        "nowhere is not a point",
    ),
    "a load below zero": (lambda b: b["requests"][0]["outlets"][0].update(load_a=-3.0), "load_a"),
    "ten kilometres of cable": (lambda b: b["requests"][0]["outlets"][0].update(metres=10000.0), "metres"),
    "cable of a negative length": (lambda b: b["requests"][0]["outlets"][0].update(metres=-1.0), "metres"),
    "one outlet in two requests": (lambda b: b["requests"].append({**b["requests"][0], "id": "q9"}), "w1 stands 2"),
    "a cable that nobody makes": (lambda b: b["requests"][0]["route"].update(cable="ft_99"), "not in the catalogue"),
    "cable found that nobody makes": (lambda b: row(b, "circuits", "c3").update(cable="ft_99"), "not in the catalogue"),
    "a device that nobody makes": (lambda b: row(b, "circuits", "c3")["device"].update(type="b99"), "not in the catal"),
    "a load at a point that is not there": (
        lambda b: b["loads"].append({"id": "l9", "circuit": "c3", "point": "p99", "amps": 5.0}), "p99"),
}  # fmt: skip


@pytest.mark.parametrize("case", BAD)
def test_a_request_that_cannot_be_is_refused_in_one_sentence(case: str) -> None:
    edit, said = BAD[case]
    body = facts("larch_row")
    edit(body)
    with pytest.raises(JobFileProblem) as told:
        job_from(json.loads(json.dumps(body)), Path("job.json"))
    assert said in told.value.sentence
    assert "\n" not in told.value.sentence
    assert len(told.value.sentence) < 140
