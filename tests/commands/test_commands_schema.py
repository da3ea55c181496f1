"""The printed schemas: every sample and its verdict meet them, what is broken does not, and neither outruns the tool."""

from __future__ import annotations

import copy
import json
import tempfile
from collections.abc import Callable, Iterator
from datetime import UTC, datetime
from functools import cache
from pathlib import Path
from typing import Any

import jsonschema
import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldtool.__main__ import main
from fieldtool.job.job import Job
from fieldtool.jobfile.opening import JobFile, read_job
from fieldtool.jobfile.problems import JobFileProblem
from fieldtool.jobfile.schema import job_schema
from fieldtool.verdict.contract import contract
from tests.jobs import SAMPLES, Facts, facts, made, row, sample
from tests.review.trees import keep_verdict

NAMES = sorted(path.stem for path in SAMPLES.glob("*.json"))
NOW = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)


@cache
def checker() -> jsonschema.Draft202012Validator:
    jsonschema.Draft202012Validator.check_schema(job_schema())
    return jsonschema.Draft202012Validator(job_schema())


def printed(capsys: pytest.CaptureFixture[str], *args: str) -> dict[str, Any]:
    assert main(["schema", *args]) == 0
    schema: dict[str, Any] = json.loads(capsys.readouterr().out)
    return schema


@pytest.mark.parametrize("name", NAMES)
def test_every_sample_meets_the_schema_by_hand_and_as_the_tool_writes_it(name: str, tmp_path: Path) -> None:
    checker().validate(facts(name))
    path = tmp_path / "job.json"
    JobFile.create(path, sample(name), NOW).close()
    checker().validate(json.loads(path.read_text()))


def test_a_job_with_a_kept_verdict_and_a_history_meets_it(tmp_path: Path) -> None:
    from fieldtool.visit import Visit

    path = tmp_path / "job.json"
    JobFile.create(path, sample("larch_row", keep_verdict), NOW).close()
    visit = Visit.open(path, clock=lambda: NOW)
    assert visit.enter(("c3", "p1", "zs", "as_found"), "0.31", mode="high_current").accepted
    assert visit.log("survey_eye", "c3", found_well=True) == ""
    visit.close()
    body = json.loads(path.read_text())
    assert body["history"]
    assert body["verdicts"]
    checker().validate(body)


@pytest.mark.parametrize("name", NAMES)
def test_every_verdict_meets_the_printed_schema_and_a_changed_one_does_not(
    name: str, capsys: pytest.CaptureFixture[str]
) -> None:
    schema = printed(capsys, "verdict")
    body = contract(sample(name))
    jsonschema.validate(body, schema)
    body["circuits"][0]["existing"]["verdict"] = "perhaps"
    assert not jsonschema.Draft202012Validator(schema).is_valid(body)


@pytest.mark.parametrize("spoil", [
    lambda body: body["circuits"][0].update(lable_claims="ring"),
    lambda body: body["circuits"][0].update(label_claims="loop"),
    lambda body: body["readings"][0].pop("at"),
    lambda body: body["readings"][0].update(value="0.5"),
    lambda body: body["points"][0].update(id="P 1"),
    lambda body: body.update(reading=[]),
    lambda body: body["site"].update(name=3),
    lambda body: body["about"].update(generation=3),
    lambda body: body["about"].update(schema=99),
    lambda body: body["requests"][0]["outlets"][0].update(metres=-1),
], ids=["unknown name", "unknown word", "no time", "number as text", "id", "unknown table", "text", "half a seal",
        "newer make", "below nought"])  # fmt: skip
def test_a_broken_job_does_not_meet_it_and_the_tool_refuses_it_too(
    spoil: Callable[[Facts], object], tmp_path: Path
) -> None:
    body = facts("larch_row")
    spoil(body)
    assert not checker().is_valid(body)
    with pytest.raises(JobFileProblem):
        read_written(tmp_path / "job.json", body)


def _places(value: Any, where: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    if where:
        yield where
    items = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for key, inside in items:
        yield from _places(inside, (*where, key))


@given(
    name=st.sampled_from(NAMES),
    pick=st.integers(0, 10_000),
    other=st.sampled_from([None, "x", "", -1, 1e9, False, [], {}, [1], {"1": {}}, "2026-12-01T09:00:00Z", "a" * 201]),
)
def test_what_the_schema_refuses_the_tool_refuses(name: str, pick: int, other: Any) -> None:
    body = facts(name)
    places = list(_places(body))
    *path, last = places[pick % len(places)]
    inside = body
    for key in path:
        inside = inside[key]
    inside[last] = copy.deepcopy(other)
    if not checker().is_valid(body):
        with tempfile.TemporaryDirectory() as folder, pytest.raises(JobFileProblem):
            read_written(Path(folder) / "job.json", body)


def read_written(path: Path, body: Any) -> Job:
    path.write_text(json.dumps(body))
    return read_job(path)


def test_the_schema_of_a_row_is_the_models(capsys: pytest.CaptureFixture[str]) -> None:
    schema = printed(capsys)
    assert schema == printed(capsys, "job")
    job = made(facts("larch_row"))
    for table in ("people", "points", "readings", "requests", "verdicts", "isolation"):
        reference = schema["properties"][table]["then"]["items"]["$ref"].rsplit("/", 1)[1]
        rows = getattr(job, table)
        if rows:
            assert set(schema["$defs"][reference]["properties"]) == set(type(rows[0]).model_fields)
    assert row(facts("larch_row"), "points", "p1")["id"] == "p1"


def test_another_word_is_refused_in_one_line(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["schema", "record"]) == 2
    assert capsys.readouterr().err.count("\n") == 1
