"""Open readings: each is answered by a stop or a wait, never by an error and never by a yes."""

from __future__ import annotations

import io
import json
from pathlib import Path

import pytest

from fieldtool.commands import verdict
from fieldtool.diagnosis.explain import explain
from fieldtool.verdict.compare import compare
from tests.jobs import facts, made, sample, set_reading

CASES = [
    *(("larch_row", test, None) for test in ("r1", "rn", "r2", "ze")),
    *(("larch_row", test, place) for test in ("ln_cross", "le_cross", "zs") for place in ("p1", "p5", "s1")),
    *(("mill_cottages", test, place) for test in ("r1_r2", "zs") for place in ("p1", "p2", "p4")),
]


@pytest.mark.parametrize("name, test, place", CASES, ids=[f"{n}-{t}-{p}" for n, t, p in CASES])
def test_an_open_reading_never_ends_in_a_yes(name: str, test: str, place: str | None) -> None:
    job = sample(name, lambda body: set_reading(body, test, None, place))
    request = job.requests[0]
    for answer in compare(job, request, explain(job, request.circuit)):
        if answer.applies and answer.way != "leave_it":
            assert answer.outcome in ("stop", "more"), answer.way


@pytest.mark.parametrize("name, test, place", CASES, ids=[f"{n}-{t}-{p}" for n, t, p in CASES])
def test_the_json_of_an_open_reading_holds_no_infinity(tmp_path: Path, name: str, test: str, place: str | None) -> None:
    body = facts(name)
    set_reading(body, test, None, place)
    path = tmp_path / "open.json"
    path.write_text(made(body).model_dump_json(by_alias=True))
    out, err = io.StringIO(), io.StringIO()
    assert verdict.run([str(path), "--json"], out, err) in (3, 4)
    json.loads(out.getvalue(), parse_constant=lambda word: pytest.fail(f"{word} is not JSON"))
    assert "inf" not in [word.strip(".,") for word in out.getvalue().split()]
