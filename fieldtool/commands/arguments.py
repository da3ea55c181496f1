"""What the commands have in common: arguments that fail with one sentence, and an example in every help."""

from __future__ import annotations

import argparse
from typing import NoReturn

__all__ = ["Parser", "Usage"]


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
