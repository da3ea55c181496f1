"""Readings out as CSV and in again: the same readings, all or none, nothing that a spreadsheet would run."""

from __future__ import annotations

import csv as plain_csv
import io
import json
from datetime import UTC, datetime
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from fieldtool.commands import csv
from fieldtool.job.history import FOUND
from fieldtool.job.job import Job
from fieldtool.jobfile.lock import WriterLock
from fieldtool.jobfile.opening import read_job
from fieldtool.record.csv_cells import guarded, unguarded
from fieldtool.record.csv_in import CsvProblem, rows_read
from fieldtool.record.csv_out import FINDING_COLUMNS, READING_COLUMNS, findings_csv, readings_csv
from fieldtool.visit.taking_in import changes_for
from tests.jobs import SAMPLES, Facts, facts, made, sample
from tests.record.papers import NOW, SAMPLE_NAMES, whole_job

STARTS = "=+-@"
"""What starts a formula in the usual spreadsheets (common practice)."""

texts = st.text(
    st.characters(blacklist_categories=("Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp")) | st.sampled_from("=+-@',\"; \n"),
    max_size=60,
)
numbers = st.floats(min_value=0, max_value=1e9, allow_nan=False)


def ran(*args: str) -> tuple[int, str, str]:
    out, err = io.StringIO(), io.StringIO()
    code = csv.run(list(args), out, err)
    return code, out.getvalue(), err.getvalue()


def without_readings(job: Job) -> Job:
    return job.model_validate({name: () if name == "readings" else getattr(job, name) for name in Job.model_fields})


def back(job: Job) -> Job:
    return changes_for(without_readings(job), rows_read(readings_csv(job)), NOW).job


def written(tmp_path: Path, body: Facts, name: str = "job.json") -> Path:
    path = tmp_path / name
    path.write_text(json.dumps(body))
    return path


def rows_file(tmp_path: Path, *rows: str, name: str = "rows.csv") -> Path:
    path = tmp_path / name
    path.write_text("\n".join(rows), encoding="utf-8")
    return path


@pytest.mark.parametrize("name", [*SAMPLE_NAMES, "whole"])
def test_out_and_in_gives_the_same_readings(name: str) -> None:
    job = whole_job() if name == "whole" else sample(name)
    assert back(job).readings == job.readings


@given(note=texts, why=texts, raw=texts, value=numbers, temp=st.none() | st.floats(-20, 80))
def test_any_text_and_any_number_come_back_as_they_were(
    note: str, why: str, raw: str, value: float, temp: float | None
) -> None:
    body = facts("larch_row")
    first, second = body["readings"][2], body["readings"][3]
    first |= {
        "note": note,
        "raw": raw.replace("\n", " "),
        "value": value,
        "temp_c": temp,
        "doubt": why,
        "confirmed": True,
    }
    second.pop("value")
    second |= {"origin": "limitation", "why_not": why or "none", "raw": ""}
    job = made(body)
    assert back(job).readings == job.readings


@given(texts)
def test_no_text_cell_starts_a_formula_and_every_guard_comes_off(text: str) -> None:
    cell = guarded(text)
    assert cell.lstrip()[:1] not in tuple(STARTS)
    assert unguarded(cell) == text


@pytest.mark.parametrize(
    "formula", ['=HYPERLINK("http://outside.example")', "+1+1", "-2+3", "@SUM(A1)", " =1", "\t=1", "＝1"]
)
def test_a_formula_in_a_note_is_only_text_in_the_file(formula: str) -> None:
    body = facts("larch_row")
    body["readings"][0]["note"] = formula.replace("\t", " ")
    body["points"][0]["name"] = formula.replace("\t", " ")
    for data in (readings_csv(made(body)), findings_csv(made(body))):
        for row in plain_csv.reader(io.StringIO(data.decode("utf-8-sig"), newline="")):
            for cell in row:
                assert cell.lstrip()[:1] not in (*STARTS, "＝"), cell


def test_findings_have_their_columns_and_their_figures() -> None:
    rows = list(plain_csv.DictReader(io.StringIO(findings_csv(sample("larch_row")).decode("utf-8-sig"), newline="")))
    assert list(rows[0]) == list(FINDING_COLUMNS)
    row = next(r for r in rows if (r["request"], r["rule"], r["place"]) == ("q1", "zs_within_limit", "w1"))
    # 0.8 × 0.95 × 230 / (5 × 32): Table 41.3 with the 80 % of Appendix 3.
    assert float(row["limit"]) == pytest.approx(1.0925)
    assert row["unit"] == "ohm"
    assert row["working"].count("\n") >= 2


def test_the_file_goes_through_the_job_with_its_history_and_can_be_undone(tmp_path: Path) -> None:
    body = facts("larch_row")
    path = written(tmp_path, body)
    assert ran("out", str(path), "-o", str(tmp_path / "r.csv"))[0] == 0
    empty = written(tmp_path, {**body, "readings": []}, "empty.json")
    code, out, err = ran("in", str(empty), str(tmp_path / "r.csv"))
    assert (code, err) == (0, "")
    job = read_job(empty)
    assert job.readings == read_job(path).readings
    taken = [entry for entry in job.history if entry.why != FOUND]
    assert {entry.why for entry in taken} == {"readings from CSV"}
    assert len({entry.group for entry in taken}) == 1
    code, out, _ = ran("in", str(empty), str(tmp_path / "r.csv"))
    assert code == 0
    assert "nothing new" in out
    assert read_job(empty).readings == job.readings


HEAD = "test,circuit,point,value,unit"


@pytest.mark.parametrize(
    "rows, line, said",
    [
        ((HEAD, "zs,c3,p1,0.31,ohm", "zs,c3,p99,0.31,ohm"), 3, "p99"),
        ((HEAD, "zs,c3,p1,0.31,ohm", "zs,c3,p1,0.31,"), 3, "unit"),
        ((HEAD, "zs,c3,p1,0,31,ohm"), 2, "cells"),
        ((HEAD, "zs,c3,p1,about 1,ohm"), 2, "number"),
        ((HEAD, "zs,c3,p1,nan,ohm"), 2, "number"),
        ((HEAD, "zs,c3,p1,-1,ohm"), 2, "below 0"),
        ((HEAD, "zs,c3,p1,1,MA"), 2, ""),
        ((HEAD, "zx,c3,p1,1,ohm"), 2, "not a test"),
        ((HEAD, "zs,c3,,1,ohm"), 2, "point"),
        ((HEAD, "zs,c9,p1,1,ohm"), 2, "c9"),
        ((HEAD, "polarity,c3,,1,ohm"), 2, "right or wrong"),
        ((HEAD, "zs,c3,p1,,"), 2, "value"),
        (("test,circuit,colour", "zs,c3,red"), 1, "colour"),
        (("circuit,value,unit", "c3,1,ohm"), 1, "test"),
        (("test,test", "zs,zs"), 1, "twice"),
        ((), 1, "columns"),
        (("id," + HEAD, "m1,zs,c3,p1,0.31,ohm"), 2, "m1"),
        (("id," + HEAD, "m901,zs,c3,p1,0.31,ohm", "m901,zs,c3,p2,0.31,ohm"), 3, "m901"),
        (("at," + HEAD, "yesterday,zs,c3,p1,0.31,ohm"), 2, "at"),
        (("note," + HEAD, "a\u202eb,zs,c3,p1,0.31,ohm"), 2, "U+202E"),
        ((HEAD, 'zs,c3,"p1,0.31,ohm'), 2, "CSV"),
        (("note," + HEAD, '"two\nlines",zs,c3,p1,0.31,ohm', ",zs,c3,p77,0.31,ohm"), 4, "p77"),
    ],
)
def test_a_bad_row_is_named_with_its_line_and_nothing_is_taken(
    tmp_path: Path, rows: tuple[str, ...], line: int, said: str
) -> None:
    path = written(tmp_path, facts("larch_row"))
    before = path.read_bytes()
    code, out, err = ran("in", str(path), str(rows_file(tmp_path, *rows)))
    assert (code, out, err.count("\n")) == (2, "", 1)
    assert f"line {line}:" in err
    assert said in err
    assert "Nothing was taken in" in err
    assert path.read_bytes() == before


def test_bytes_that_are_no_text_are_refused() -> None:
    with pytest.raises(CsvProblem, match="line 2: is not UTF-8"):
        rows_read(b"test,circuit\nzs,\xff\xfe")


def test_a_value_may_come_in_the_units_of_a_meter(tmp_path: Path) -> None:
    path = written(tmp_path, facts("larch_row"))
    rows = rows_file(tmp_path, HEAD + ",range", "ir_ln,c3,,200,MΩ,over", "zs,c3,p1,310,mΩ,")
    assert ran("in", str(path), str(rows))[0] == 0
    job = read_job(path)
    assert [(r.value, r.sign) for r in job.readings[-2:]] == [(200e6, ">"), (pytest.approx(0.31), "=")]


def test_a_row_without_an_id_is_taken_as_if_it_were_typed(tmp_path: Path) -> None:
    path = written(tmp_path, facts("larch_row"))
    rows = rows_file(tmp_path, HEAD, "zs,c3,p1,31,ohm", "r1,c3,,0.52,ohm")
    code, out, _ = ran("in", str(path), str(rows))
    assert code == 0
    assert "do not count" in out
    doubted, dead = read_job(path).readings[-2:]
    assert doubted.doubt
    assert not doubted.counts
    assert dead.needs_taken
    assert not dead.counts
    before = {r.id: (r.test, r.point) for r in sample("larch_row").readings}
    assert [before[r.replaces or ""] for r in (doubted, dead)] == [("zs", "p1"), ("r1", None)]


def test_a_job_that_is_open_elsewhere_is_not_written(tmp_path: Path) -> None:
    path = written(tmp_path, facts("larch_row"))
    before = path.read_bytes()
    lock = WriterLock(path)
    assert lock.take(datetime.now(UTC))
    try:
        code, _, err = ran("in", str(path), str(rows_file(tmp_path, HEAD, "zs,c3,p1,0.31,ohm")))
    finally:
        lock.release()
    assert code == 2
    assert "Nothing was taken in" in err
    assert path.read_bytes() == before


@pytest.mark.parametrize(
    "args",
    [("out",), ("sideways", "x"), ("in", str(SAMPLES / "larch_row.json")), ("out", str(SAMPLES / "larch_row.json"))],
)
def test_words_that_are_not_enough_end_with_two(args: tuple[str, ...]) -> None:
    code, out, err = ran(*args)
    assert (code, out, err.count("\n")) == (2, "", 1)


def test_every_column_is_described_in_the_help(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit):
        csv.run(["--help"], io.StringIO(), io.StringIO())
    said = capsys.readouterr().out
    assert all(name in said for name in (*READING_COLUMNS, *FINDING_COLUMNS))
