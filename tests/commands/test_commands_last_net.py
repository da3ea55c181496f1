"""The last net of the headless commands: one sentence, exit 2, and the traceback in a file of the user's log folder."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from fieldtool.__main__ import COMMANDS, main
from tests.jobs import SAMPLES


@pytest.mark.parametrize("name", sorted(COMMANDS))
def test_an_error_nobody_foresaw_is_one_sentence_and_a_file(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def fall(*_: object) -> int:
        raise RuntimeError("nobody foresaw this")

    monkeypatch.setattr(f"fieldtool.commands.{name}.run", fall)
    assert main([name, "x"]) == 2
    out, err = capsys.readouterr()
    log = next(tmp_path.rglob("mishaps.log"))
    assert out == ""
    assert err.count("\n") == 1
    assert f"fieldtool {name}:" in err
    assert str(log) in err
    assert "Traceback" not in err
    kept = log.read_text()
    assert "nobody foresaw this" in kept
    assert "in fall" in kept
    assert log.stat().st_mode & 0o077 == 0


def test_a_log_that_cannot_be_written_is_said(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr("fieldtool.mishap.user_log_path", lambda *_, **__: tmp_path / "file" / "log")
    (tmp_path / "file").write_text("")
    monkeypatch.setattr("fieldtool.commands.rules.run", lambda *_: 1 / 0)
    assert main(["rules"]) == 2
    assert capsys.readouterr().err == (
        "fieldtool rules: stopped by a fault of this tool (ZeroDivisionError); its log file could not be written\n"
    )


def test_a_command_whose_library_is_missing_ends_the_same_way(tmp_path: Path) -> None:
    code = (
        "import sys; sys.modules['shtab'] = None\n"
        "from fieldtool.__main__ import main\n"
        "sys.exit(main(['completion', 'bash']))"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout, done.stderr.count("\n")) == (2, "", 1)


def test_a_reader_of_a_pipe_that_goes_away_is_no_fault() -> None:
    command = f"{sys.executable} -m fieldtool tables | head -n 1"
    done = subprocess.run(["bash", "-c", command], capture_output=True, text=True, check=False)
    assert "fault" not in done.stderr
    assert "Traceback" not in done.stderr


def test_a_sample_folder_is_reviewed_by_the_door() -> None:
    done = subprocess.run(
        [sys.executable, "-m", "fieldtool", "review", str(SAMPLES)], capture_output=True, text=True, check=False
    )
    assert (done.returncode, done.stderr) == (4, "")
