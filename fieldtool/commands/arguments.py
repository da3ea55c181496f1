"""What the commands have in common: arguments that fail with one sentence, and an example in every help."""

from __future__ import annotations

import argparse
import io
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from typing import Any, NoReturn, TextIO

__all__ = ["Parser", "Usage", "parser_of"]

Run = Callable[[list[str], TextIO, TextIO], int]


class Usage(Exception):
    """A command called with words it does not know; says which."""


class Parser(argparse.ArgumentParser):
    """An argument parser of one command; raises ``Usage`` instead of leaving the program."""

    def __init__(self, command: str, words: str, example: str) -> None:
        super().__init__(
            prog=f"fieldtool {command}",
            description=words,
            epilog=example,
            formatter_class=argparse.RawDescriptionHelpFormatter,
        )

    def error(self, message: str) -> NoReturn:
        """Say what is wrong with the command's words."""
        raise Usage(f"{message}; see {self.prog} --help")

    def parse_known_args(self, args: Any = None, namespace: Any = None) -> Any:
        """The words of a command, read; see ``parser_of`` for when nothing is read."""
        if _asking.get():
            raise _Shown(self)
        return super().parse_known_args(args, namespace)


class _Shown(Exception):
    """A parser, held up before it reads a word."""

    def __init__(self, parser: Parser) -> None:
        super().__init__(parser.prog)
        self.parser = parser


_asking: ContextVar[bool] = ContextVar("asking for the parser alone", default=False)


@contextmanager
def _asked() -> Iterator[None]:
    before = _asking.set(True)
    try:
        yield
    finally:
        _asking.reset(before)


def parser_of(run: Run) -> Parser:
    """The parser of a command, from the command's own ``run``, which stops where it would read its words.

    Raises TypeError where ``run`` reads no words at all.
    """
    with _asked():
        try:
            run([], io.StringIO(), io.StringIO())
        except _Shown as shown:
            return shown.parser
    raise TypeError("this command has no parser")
