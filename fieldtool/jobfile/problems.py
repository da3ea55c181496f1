"""What can go wrong between a job and its file, each with one sentence for the person."""

from __future__ import annotations

__all__ = ["JobFileProblem", "SaveProblem"]


class JobFileProblem(Exception):
    """A file that cannot be opened as a job. ``code`` is for programs, ``sentence`` for people."""

    def __init__(self, code: str, sentence: str) -> None:
        super().__init__(sentence)
        self.code = code
        self.sentence = sentence


class SaveProblem(Exception):
    """A save that did not reach the disk. What stood there before still stands."""
