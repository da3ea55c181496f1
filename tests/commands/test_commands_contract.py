"""The headless commands: exit codes, the JSON contract, one sentence for everything unusable."""

from __future__ import annotations

import io
import json
import subprocess
import sys
from importlib.resources import files
from pathlib import Path

import jsonschema
import pytest

from fieldtool.__main__ import COMMANDS, main
from fieldtool.commands import new, verdict
from tests.jobs import SAMPLES, Facts, facts, outlet

SAMPLE_NAMES = sorted(path.stem for path in SAMPLES.glob("*.json"))


def judged(path: Path, *args: str) -> tuple[int, str, str]:
    out, err = io.StringIO(), io.StringIO()
    code = verdict.run([str(path), *args], out, err)
    return code, out.getvalue(), err.getvalue()


def written(tmp_path: Path, body: Facts) -> Path:
    path = tmp_path / "job.json"
    path.write_text(json.dumps(body))
    return path


def test_there_are_at_least_six_samples_and_each_is_marked_invented() -> None:
    assert len(SAMPLE_NAMES) >= 6
    assert all(facts(name)["site"]["invented"] for name in SAMPLE_NAMES)


@pytest.mark.parametrize("name", SAMPLE_NAMES)
def test_the_json_of_every_sample_meets_the_schema_and_its_exit_code(name: str) -> None:
    code, out, _ = judged(SAMPLES / f"{name}.json", "--json")
    body = json.loads(out, parse_constant=lambda word: pytest.fail(f"{word} is not JSON"))
    schema = json.loads((files("fieldtool.verdict") / "contract.schema.json").read_text())
    jsonschema.validate(body, schema)
    assert body["exit"] == code
    assert body["contract"] == "fieldtool-verdict/1"
    assert "A4:2026" in body["edition_note"]


@pytest.mark.parametrize(
    "name, code",
    [("larch_row", 0), ("mill_cottages", 0), ("quarry_yard", 0), ("harbour_court", 0), ("larch_row_annexe", 4)],
)
def test_samples_end_as_their_stories_say(name: str, code: int) -> None:
    assert judged(SAMPLES / f"{name}.json")[0] == code


def test_a_stop_outweighs_what_is_missing(tmp_path: Path) -> None:
    body = facts("larch_row")
    body["requests"][0].update(at="s1", chosen_way="spur_at_point", outlets=[outlet("w1", 3)])
    body["readings"] = [item for item in body["readings"] if item["test"] != "polarity"]
    assert judged(written(tmp_path, body))[0] == 3


def test_nothing_proposed_is_four_and_an_unknown_circuit_is_two(tmp_path: Path) -> None:
    body = facts("larch_row")
    body["requests"] = []
    path = written(tmp_path, body)
    assert judged(path)[0] == 4
    code, _, err = judged(path, "--circuit", "c99")
    assert code == 2
    assert err.count("\n") == 1


@pytest.mark.parametrize("content", ["", "{", "[]", '{"site": 4}', '{"about": {"schema": 99}}'])
def test_unusable_files_end_with_two_and_one_sentence(tmp_path: Path, content: str) -> None:
    path = tmp_path / "x.json"
    path.write_text(content)
    code, out, err = judged(path, "--json")
    assert code == 2
    assert err.count("\n") == 1
    assert json.loads(out)["error"]["sentence"]


def test_a_cable_that_no_table_has_is_one_sentence(tmp_path: Path) -> None:
    body = facts("larch_row")
    body["circuits"][0]["cable"] = "no_such_cable"
    code, out, err = judged(written(tmp_path, body), "--json")
    assert code == 2
    assert err.count("\n") == 1
    assert "no_such_cable" in json.loads(out)["error"]["sentence"]


def test_a_directory_and_a_file_that_is_not_there(tmp_path: Path) -> None:
    assert judged(tmp_path)[0] == 2
    assert judged(tmp_path / "none.json")[0] == 2


def test_new_builds_a_job_and_names_the_field_it_refuses(tmp_path: Path) -> None:
    source, target = written(tmp_path, facts("larch_row")), tmp_path / "made.json"
    out, err = io.StringIO(), io.StringIO()
    assert new.run([str(target), "--from", str(source)], out, err) == 0
    assert judged(target)[0] == 0
    assert new.run([str(target), "--from", str(source)], out, err) == 2
    body = facts("larch_row")
    body["circuits"][0]["lable_claims"] = "ring"
    assert new.run([str(tmp_path / "b.json"), "--from", str(written(tmp_path, body))], out, err) == 2
    assert "lable_claims" in err.getvalue()


@pytest.mark.parametrize("command", sorted(COMMANDS))
def test_every_command_has_help_with_an_example(command: str) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "fieldtool", command, "--help"], capture_output=True, text=True, check=False
    )
    assert done.returncode == 0
    assert f"example: fieldtool {command}" in done.stdout
    assert "Exit code: " in done.stdout


def test_without_a_terminal_the_app_says_so_in_one_line() -> None:
    done = subprocess.run(
        [sys.executable, "-m", "fieldtool"], capture_output=True, text=True, stdin=subprocess.DEVNULL, check=False
    )
    assert done.returncode == 2
    assert done.stderr.count("\n") == 1
    assert "terminal" in done.stderr


def test_nonsense_is_refused_in_one_line(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["frobnicate"]) == 2
    assert capsys.readouterr().err.count("\n") == 1


@pytest.mark.parametrize("args", [["tables", "--json"], ["rules", "--json"]])
def test_tables_and_rules_print_json_with_the_edition(args: list[str], capsys: pytest.CaptureFixture[str]) -> None:
    assert main(args) == 0
    body = json.loads(capsys.readouterr().out)
    assert "A4:2026" in body["edition_note"]


def test_importing_the_app_loads_no_heavy_library() -> None:
    code = (
        "import sys, screens.app, screens.shelf, screens.readings, fieldtool.visit, fieldtool.safety.next_step\n"
        "print([m for m in ('numpy', 'pint', 'fpdf', 'networkx') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_the_core_loads_no_screen() -> None:
    code = (
        "import sys, fieldtool.verdict.contract\nprint([m for m in ('textual', 'screens', 'rich') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
