"""One measured value: who, when, with what, and never overwritten."""

from __future__ import annotations

from typing import Literal

from pydantic import model_validator

from fieldtool.job.kinds import TESTS, AnswerWord, Mode, Probes, ReadingOrigin, Sign, Stage, TestKey
from fieldtool.job.rows import Id, LongText, Moment, Row, Text

__all__ = ["Cell", "Reading"]

Cell = tuple[str | None, str | None, str, str]
"""What a reading is a reading of: circuit (or None), point (or None), test key, stage."""


class Reading(Row):
    """One value of one test at one place.

    ``value`` is in the SI unit of the test's field [ohm, A, ms, mA]; ``sign`` says whether the meter showed the
    value, more than its range (``>``), less (``<``) or an open circuit. ``doubt`` holds the question asked at
    entry; the reading does not count until ``confirmed``. ``taken`` answers when a dead reading was taken if the
    log did not show the circuit proved dead. ``replaces`` names the reading this one corrects; ``withdraws`` one
    that this row only takes back; ``set_aside`` says why a reading no longer counts.
    """

    board: Id | None = None
    circuit: Id | None = None
    point: Id | None = None
    test: TestKey
    stage: Stage = "as_found"
    value: float | None = None
    sign: Sign = "="
    answer: AnswerWord | None = None
    raw: Text = ""
    mode: Mode | None = None
    probes: Probes | None = None
    instrument: Id | None = None
    temp_c: float | None = None
    by: Id | None = None
    at: Moment
    origin: ReadingOrigin = "measured"
    why_not: LongText = ""
    doubt: LongText = ""
    confirmed: bool = False
    taken: Literal["proved_dead", "just_now", "earlier", "not_sure"] | None = None
    needs_taken: bool = False
    replaces: Id | None = None
    withdraws: Id | None = None
    set_aside: LongText = ""

    @property
    def cell(self) -> Cell:
        """The cell of the readings grid that this reading belongs to."""
        return (self.circuit, self.point, self.test, self.stage)

    @property
    def counts(self) -> bool:
        """True when nothing is left to ask about this reading and it carries something to use."""
        if self.origin == "limitation" or self.set_aside or self.withdraws:
            return False
        if self.doubt and not self.confirmed:
            return False
        return not (self.needs_taken and self.taken != "proved_dead")

    @model_validator(mode="after")
    def _one_content(self) -> Reading:
        spec = TESTS[self.test]
        if self.withdraws is not None:
            return self
        if self.origin == "limitation":
            if self.value is not None or self.answer is not None:
                raise ValueError("a limitation has no value; give the reason in why_not")
            if not self.why_not:
                raise ValueError("a limitation needs its reason in why_not")
            return self
        if spec.field is None:
            if self.answer is None or self.value is not None:
                raise ValueError(f"{spec.words} is answered right or wrong")
            return self
        if self.answer is not None:
            raise ValueError(f"{spec.words} is a number, not right or wrong")
        if self.sign == "open":
            if self.value is not None:
                raise ValueError("an open circuit has no value")
        elif self.value is None:
            raise ValueError(f"{spec.words} needs a value")
        elif self.value < 0:
            raise ValueError(f"{spec.words} cannot be below 0")
        if spec.where == "point" and self.point is None:
            raise ValueError(f"{spec.words} is read at a point; name it")
        if spec.where in ("point", "circuit") and self.circuit is None:
            raise ValueError(f"{spec.words} belongs to a circuit; name it")
        return self
