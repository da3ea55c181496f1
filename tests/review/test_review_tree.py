"""A review of a whole folder: order, links, broken files, nothing written, the forms it is printed in."""

from __future__ import annotations

import csv
import io
import json
import os
import subprocess
import sys
from datetime import datetime
from pathlib import Path
from typing import Any

import pytest

from fieldtool.commands import spread
from fieldtool.commands.review_print import CSV_COLUMNS
from fieldtool.job.job import Job
from fieldtool.jobfile.opening import JobFile
from fieldtool.jobfile.problems import JobFileProblem
from fieldtool.jobfile.tree import job_files
from fieldtool.quantities.show import cells
from fieldtool.reference.load import ReferenceProblem
from tests.jobs import Facts, outlet, sample
from tests.review.trees import NOW, keep_verdict, put, reviewed, rows_of
from tests.terminal import Terminal


def names(folder: Path) -> list[str]:
    return [found.name for found in job_files(folder)]


def everything(folder: Path) -> dict[str, tuple[int, int, bytes]]:
    """Each file of a folder: when it was last written, its links, its bytes."""
    return {
        str(path.relative_to(folder)): (path.stat().st_mtime_ns, path.stat().st_nlink, path.read_bytes())
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }


# which files ------------------------------------------------------------------------------------------------------
def test_jobs_are_found_below_in_one_steady_order(tmp_path: Path) -> None:
    for name in ("b.json", "a/z.json", "a/b/c.JSON", "a.json", "notes.txt", ".hidden.json", ".git/x.json"):
        (tmp_path / name).parent.mkdir(parents=True, exist_ok=True)
        (tmp_path / name).write_text("{}")
    assert names(tmp_path) == ["a/b/c.JSON", "a/z.json", "a.json", "b.json"]


def test_kept_generations_and_locks_are_no_jobs(tmp_path: Path) -> None:
    file = JobFile.create(tmp_path / "a.json", sample("larch_row"), NOW)
    file.save(file.job)
    file.save(file.job)
    assert len(os.listdir(tmp_path)) > 1
    assert names(tmp_path) == ["a.json"]
    file.close()


def test_links_do_not_lead_out_and_what_lies_inside_is_read_once(tmp_path: Path) -> None:
    outside, folder = tmp_path / "outside", tmp_path / "jobs"
    put(outside, "far.json")
    put(folder, "real.json")
    put(folder, "sub/deep.json")
    (folder / "again.json").symlink_to("real.json")
    (folder / "far.json").symlink_to(outside / "far.json")
    (folder / "folder").symlink_to(outside, target_is_directory=True)
    (folder / "loop").symlink_to(folder, target_is_directory=True)
    (folder / "nowhere.json").symlink_to("gone.json")
    (folder / "up").symlink_to("..", target_is_directory=True)
    rows = rows_of(folder)
    assert [name for name, row in rows.items() if row["problem"] is None] == ["real.json", "sub/deep.json"]
    assert {name for name, row in rows.items() if row["problem"] is not None} == {
        "far.json", "folder", "nowhere.json", "up"
    }  # fmt: skip
    assert all(row["problem"]["code"] == "link" for row in rows.values() if row["problem"])


def test_a_link_to_a_hidden_file_is_told_and_one_to_anything_else_is_no_job(tmp_path: Path) -> None:
    (tmp_path / ".store.json").write_text("{}")
    (tmp_path / "shown.json").symlink_to(".store.json")
    (tmp_path / "notes").symlink_to("/etc/hostname")
    assert [(found.name, found.problem is not None) for found in job_files(tmp_path)] == [("shown.json", True)]


def test_the_folder_itself_may_be_a_link(tmp_path: Path) -> None:
    put(tmp_path / "jobs", "a.json")
    (tmp_path / "link").symlink_to("jobs", target_is_directory=True)
    assert names(tmp_path / "link") == ["a.json"]


@pytest.mark.parametrize("name, depth", [("d", 1200), ("d" * 250, 20)], ids=["deeper than calls", "longer than paths"])
def test_folders_nested_too_deep_end_no_review(name: str, depth: int, tmp_path: Path) -> None:
    folder = tmp_path / "jobs"
    put(folder, "z.json")
    here = os.open(folder, os.O_RDONLY)
    for _ in range(depth):
        os.mkdir(name, dir_fd=here)
        below = os.open(name, os.O_RDONLY, dir_fd=here)
        os.close(here)
        here = below
    os.close(here)
    found = list(job_files(folder))
    subprocess.run(["rm", "-rf", str(folder)], check=True)
    assert found[-1].name == "z.json"
    assert found[-1].problem is None
    assert [item.problem.code for item in found[:-1]] == ([] if len(name) == 1 else ["unreadable"])


# broken files -----------------------------------------------------------------------------------------------------
def test_a_broken_file_is_a_row_with_its_sentence_and_stops_nothing(tmp_path: Path) -> None:
    put(tmp_path, "good.json")
    (tmp_path / "a.json").write_text("{")
    (tmp_path / "b.json").write_bytes(b"\xff\xfe\x00")
    (tmp_path / "c.json").write_text('{"about": {"schema": 99}}')
    (tmp_path / "d.json").write_text('{"site": 4}')
    (tmp_path / "e.json").write_text("")
    os.mkfifo(tmp_path / "pipe.json")
    JobFile.create(tmp_path / "f.json", sample("larch_row"), NOW).close()
    sealed = (tmp_path / "f.json").read_text()
    (tmp_path / "f.json").write_text(sealed.replace('"value":0.52', '"value":0.25', 1))
    code, out, err = reviewed(tmp_path, "--json")
    rows = {row["file"]: row for row in json.loads(out)["jobs"]}
    assert code == 2
    assert err == ""
    assert rows.pop("good.json")["problem"] is None
    assert {name: row["problem"]["code"] for name, row in rows.items()} == {
        "a.json": "not-json", "b.json": "not-json", "c.json": "other-schema", "d.json": "not-a-job",
        "e.json": "empty", "f.json": "damaged", "pipe.json": "unreadable",
    }  # fmt: skip
    assert all(row["problem"]["sentence"].count("\n") == 0 for row in rows.values())


def test_nothing_is_written_locked_or_set_aside(tmp_path: Path) -> None:
    open_elsewhere = JobFile.create(tmp_path / "open.json", sample("larch_row"), NOW)
    open_elsewhere.save(open_elsewhere.job)
    put(tmp_path, "plain.json")
    put(tmp_path, "older.json", lambda body: body["about"].update(schema=0))
    (tmp_path / "damaged.json").write_text("{")
    before = everything(tmp_path)
    assert set(rows_of(tmp_path)) == {"damaged.json", "older.json", "open.json", "plain.json"}
    assert everything(tmp_path) == before
    open_elsewhere.save(open_elsewhere.job)
    open_elsewhere.close()


def test_a_fault_of_the_tool_on_one_file_is_that_files_row(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    put(tmp_path, "a.json")
    put(tmp_path, "b.json", sample="mill_cottages")
    from fieldtool.record import review as rows

    put(tmp_path, "c.json")
    real = rows.job_row

    def faulty(name: str, job: Job, now: datetime) -> dict[str, Any]:
        if name == "a.json":
            raise ZeroDivisionError
        if name == "c.json":
            raise ReferenceProblem("there is no cable flex_9")
        return real(name, job, now)

    monkeypatch.setattr(rows, "job_row", faulty)
    told = rows_of(tmp_path)
    assert told["a.json"]["problem"]["code"] == "not-judged"
    assert told["b.json"]["problem"] is None
    assert told["c.json"]["problem"]["code"] == "not-in-the-tables"
    assert "ZeroDivisionError" in next(tmp_path.rglob("mishaps.log")).read_text()


# exit codes -------------------------------------------------------------------------------------------------------
def stopped(body: Facts) -> None:
    body["requests"][0].update(at="s1", chosen_way="spur_at_point", outlets=[outlet("w1", 3)])


def test_the_heaviest_exit_code_of_the_jobs_is_the_reviews(tmp_path: Path) -> None:
    put(tmp_path, "go.json")
    assert reviewed(tmp_path)[0] == 0
    put(tmp_path, "more.json", sample="larch_row_annexe")
    assert reviewed(tmp_path)[0] == 4
    put(tmp_path, "stop.json", stopped)
    assert reviewed(tmp_path)[0] == 3
    (tmp_path / "broken.json").write_text("{")
    assert reviewed(tmp_path)[0] == 2


def test_no_job_at_all_is_not_a_go(tmp_path: Path) -> None:
    code, out, err = reviewed(tmp_path, "--json")
    assert (code, json.loads(out)["jobs"], err.count("\n")) == (4, [], 1)


@pytest.mark.parametrize("args", [["gone"], ["a.json"], [], ["jobs", "--json", "--csv"], ["jobs", "--cores", "0"]])
def test_what_cannot_be_reviewed_ends_with_two_and_one_sentence(
    args: list[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    (tmp_path / "a.json").write_text("{}")
    (tmp_path / "jobs").mkdir()
    from fieldtool.commands import review

    out, err = io.StringIO(), io.StringIO()
    assert review.run(args, out, err) == 2
    assert err.getvalue().count("\n") == 1
    assert "--json" in args or out.getvalue() == ""


def test_a_folder_that_is_not_there_is_said_in_json_too(tmp_path: Path) -> None:
    code, out, _ = reviewed(tmp_path / "gone", "--json")
    assert (code, json.loads(out)["error"]["code"]) == (2, "not-found")
    with pytest.raises(JobFileProblem, match="is not there"):
        list(job_files(tmp_path / "gone"))


# forms ------------------------------------------------------------------------------------------------------------
def test_the_text_fits_eighty_cells_and_cuts_no_name(tmp_path: Path) -> None:
    long_name = "a very long name of a job in a street with a long name, number 12, 台所台所台所台所台所台所.json"
    put(tmp_path, long_name, keep_verdict, stopped, lambda body: body.update(verdicts=[]))
    put(tmp_path, "annexe.json", sample="larch_row_annexe")
    put(tmp_path, "mill.json", sample="mill_cottages")
    (tmp_path / "broken.json").write_text("{")
    _, out, _ = reviewed(tmp_path)
    assert max(cells(line) for line in out.splitlines()) <= 80
    assert long_name.replace(" ", "") in out.replace("\n", "").replace(" ", "")
    assert "NOT KNOWN" in out
    assert "STOP" in out
    assert "to take: polarity." in out
    assert "read or worked out?" in " ".join(out.split())


def test_csv_has_one_row_a_job_and_no_cell_starts_a_formula(tmp_path: Path) -> None:
    put(tmp_path, "=1+1.json", lambda body: body["site"].update(name="=HYPERLINK(1)"))
    put(tmp_path, "b.json", keep_verdict)
    (tmp_path / "c.json").write_text("{")
    _, out, _ = reviewed(tmp_path, "--csv")
    rows = list(csv.DictReader(io.StringIO(out)))
    assert tuple(rows[0]) == CSV_COLUMNS
    assert [(row["file"], row["exit"]) for row in rows] == [("'=1+1.json", "0"), ("b.json", "0"), ("c.json", "2")]
    assert rows[0]["job"] == "'=HYPERLINK(1)"
    assert rows[1]["kept_verdict"] == "go"
    assert rows[2]["problem"]


def test_a_bar_is_drawn_on_stderr_only_where_a_person_looks_on(tmp_path: Path) -> None:
    class Seen(io.StringIO):
        def isatty(self) -> bool:
            return True

    from fieldtool.commands import review

    put(tmp_path, "a.json")
    out, err = io.StringIO(), Seen()
    review.run([str(tmp_path), "--csv"], out, err)
    assert "1/1" in err.getvalue() or "0/1" in err.getvalue()
    assert out.getvalue() == reviewed(tmp_path, "--csv")[1]
    assert reviewed(tmp_path)[2] == ""


# over the cores ---------------------------------------------------------------------------------------------------
def test_over_the_cores_the_same_rows_come_in_the_same_order(tmp_path: Path) -> None:
    kinds = ("larch_row", "mill_cottages", "quarry_yard")
    for number in range(spread.ALONE_BELOW + 8):
        put(tmp_path, f"{number:02}.json", sample=kinds[number % 3])
    (tmp_path / "11.json").write_text("{")
    (one_code, one, _), (two_code, two, _) = (reviewed(tmp_path, "--json", "--cores", n) for n in ("1", "2"))
    assert one_code == two_code
    assert json.loads(one)["jobs"] == json.loads(two)["jobs"]


def test_few_are_under_way_at_once_however_many_there_are() -> None:
    taken = 0

    def things() -> object:
        nonlocal taken
        while True:
            taken += 1
            yield taken

    answers = spread.over_cores(abs, things(), abs, helpers=2)
    assert [next(answers) for _ in range(100)] == list(range(1, 101))
    assert taken <= 100 + 2 * 2 * 8 * 4
    answers.close()


def _dies_of_seven(number: int) -> int:
    if number == 7:
        os._exit(9)
    return number


def _lost(number: int) -> int:
    return -number


def test_what_kills_a_helper_is_one_answer_and_stops_no_other() -> None:
    count = spread.ALONE_BELOW + 16
    answers = list(spread.over_cores(_dies_of_seven, range(count), _lost, helpers=2))
    assert answers == [-7 if number == 7 else number for number in range(count)]


def test_ctrl_c_ends_it_without_a_traceback(tmp_path: Path) -> None:
    for number in range(400):
        put(tmp_path, f"{number:03}.json")
    command = f"{sys.executable} -m fieldtool review {tmp_path} --csv > {tmp_path}/out.csv; echo ENDED $?"
    with Terminal(["bash", "-c", command], columns=100) as terminal:
        terminal.wait_for("/400")
        terminal.send("\x03")
        shown = terminal.wait_for("ENDED")
    assert any("ENDED 130" in line for line in shown)
    assert not any("Traceback" in line or "KeyboardInterrupt" in line for line in shown)
