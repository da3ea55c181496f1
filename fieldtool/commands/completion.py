"""``fieldtool completion``: what makes a shell complete commands, options and file names, made from the parsers."""

from __future__ import annotations

import argparse
import importlib
import pkgutil
from collections.abc import Iterator
from typing import TextIO

from fieldtool import commands
from fieldtool.commands.arguments import Parser, Usage, parser_of
from fieldtool.reference.load import names

__all__ = ["run"]

EXAMPLE = """example: fieldtool completion bash > ~/.local/share/bash-completion/completions/fieldtool

zsh:  fieldtool completion zsh > "${fpath[1]}/_fieldtool"
fish: fieldtool completion fish > ~/.config/fish/completions/fieldtool.fish
For this shell alone: eval "$(fieldtool completion bash)"
Print it again after an update. Exit code: 0 printed; 2 the command is not usable."""

SHELLS = ("bash", "zsh", "fish")

_FILES = frozenset({"file", "facts", "output", "rows"})
_FOLDERS = frozenset({"folder"})
"""Names under which commands take files and folders."""


def run(args: list[str], out: TextIO, err: TextIO) -> int:
    """Print a completion script; returns the exit code: 0 printed, 2 the command is not usable."""
    parser = Parser("completion", "Print what makes a shell complete commands, options and file names.", EXAMPLE)
    parser.add_argument("shell", choices=SHELLS, help="your shell")
    try:
        given = parser.parse_args(args)
    except Usage as problem:
        err.write(f"fieldtool completion: {problem}\n")
        return 2
    import shtab

    text = shtab.complete(_whole(), shell=given.shell).rstrip("\n") + "\n"
    if given.shell == "bash":
        # The first word may be a job file, which opens the app: where no command fits, bash offers its file names.
        text = text.replace("complete -o bashdefault ", "complete -o bashdefault -o default ")
    out.write(text)
    return 0


def _whole() -> argparse.ArgumentParser:
    """Every command's parser under one, as the command line has them."""
    import shtab

    whole = argparse.ArgumentParser(prog="fieldtool")
    whole.add_argument("--version", action="store_true", help="print the version")
    below = whole.add_subparsers(dest="command")
    for name, parser in _parsers():
        for action in parser._actions:
            if action.dest in _FILES:
                action.complete = shtab.FILE  # type: ignore[attr-defined]
            elif action.dest in _FOLDERS:
                action.complete = shtab.DIRECTORY  # type: ignore[attr-defined]
            elif (name, action.dest) == ("tables", "name"):
                action.choices = names()
        below.add_parser(
            name, help=parser.description, description=parser.description, parents=[parser], add_help=False
        )
    return whole


def _parsers() -> Iterator[tuple[str, Parser]]:
    """Every command of the package with its parser; a module without ``run`` is no command."""
    for found in pkgutil.iter_modules(commands.__path__):
        module = importlib.import_module(f"{commands.__name__}.{found.name}")
        if hasattr(module, "run"):
            yield found.name, parser_of(module.run)
