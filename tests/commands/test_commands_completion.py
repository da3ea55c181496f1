"""Completion as a person gets it: the script sourced in a real shell, a tab pressed, the words read off the screen."""

from __future__ import annotations

import shutil
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

from fieldtool.__main__ import COMMANDS, main
from fieldtool.commands.arguments import parser_of
from tests.terminal import ROOT, Terminal


def script(shell: str) -> str:
    return subprocess.run(
        [sys.executable, "-m", "fieldtool", "completion", shell], capture_output=True, text=True, check=True, cwd=ROOT
    ).stdout


@pytest.fixture
def bash(tmp_path: Path) -> Iterator[Terminal]:
    """A bash in the repository's folder that has sourced the script."""
    path = tmp_path / "completion.bash"
    path.write_text(script("bash"))
    with Terminal(["bash", "--norc", "--noprofile", "-i"], columns=100) as terminal:
        terminal.send(f"PS1='> '; source {path}; clear; echo READY''\n")
        terminal.wait_for("> ")
        yield terminal


@pytest.mark.parametrize("typed, stands", [
    ("fieldtool rev", "> fieldtool review "),
    ("fieldtool sche", "> fieldtool schema "),
    ("fieldtool schema ver", "> fieldtool schema verdict "),
    ("fieldtool review --sch", "> fieldtool review --scheduler "),
    ("fieldtool review sample_j", "> fieldtool review sample_jobs/"),
    ("fieldtool verdict sample_jobs/larch_row_", "> fieldtool verdict sample_jobs/larch_row_annexe.json "),
    ("fieldtool sample_jobs/quar", "> fieldtool sample_jobs/quarry_yard.json "),
    ("fieldtool tables flat_", "> fieldtool tables flat_twin"),
])  # fmt: skip
def test_bash_completes_commands_options_choices_and_files(bash: Terminal, typed: str, stands: str) -> None:
    bash.send(f"{typed}\t")
    assert any(line.startswith(stands) for line in bash.wait_for(stands.rstrip()))


def test_bash_offers_every_command(bash: Terminal) -> None:
    bash.send("fieldtool \t\t")
    shown = " ".join(bash.wait_for("verdict"))
    assert all(command in shown.split() for command in COMMANDS)


def asked(shell: str, line: str, tmp_path: Path) -> set[str]:
    """What fish offers for a line, without its descriptions."""
    path = tmp_path / "completion.fish"
    path.write_text(script(shell))
    done = subprocess.run(
        [shell, "-c", f"source {path}; complete -C '{line}'"], capture_output=True, text=True, check=True, cwd=ROOT
    )
    return {item.split("\t")[0] for item in done.stdout.splitlines()}


@pytest.mark.skipif(shutil.which("fish") is None, reason="fish is not installed here")
def test_fish_completes_too(tmp_path: Path) -> None:
    assert asked("fish", "fieldtool rev", tmp_path) == {"review"}
    assert asked("fish", "fieldtool schema ", tmp_path) == {"job", "verdict", "review"}
    assert "--scheduler" in asked("fish", "fieldtool review --", tmp_path)


@pytest.mark.skipif(shutil.which("zsh") is None, reason="zsh is not installed here")
def test_zsh_completes_too(tmp_path: Path) -> None:
    (tmp_path / "_fieldtool").write_text(script("zsh"))
    with Terminal(["zsh", "-f", "-i"], columns=100) as terminal:
        terminal.send(f"PS1='> '; fpath=({tmp_path} $fpath); autoload -U compinit; compinit -u -D; clear\n")
        terminal.wait_for("> ")
        terminal.send("fieldtool rev\t")
        terminal.wait_for("> fieldtool review")
        terminal.send("--sch\t")
        terminal.wait_for("> fieldtool review --scheduler")


def test_every_command_shows_its_parser_without_running() -> None:
    import importlib

    for name in COMMANDS:
        parser = parser_of(importlib.import_module(f"fieldtool.commands.{name}").run)
        assert parser.prog == f"fieldtool {name}"
    with pytest.raises(TypeError):
        parser_of(lambda *_: 0)


def test_another_shell_is_refused_in_one_line(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["completion", "csh"]) == 2
    assert capsys.readouterr().err.count("\n") == 1
