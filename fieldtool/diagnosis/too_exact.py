"""Readings that agree too well: marked measured, and yet to the last digit what others of the job make.

Two meters, two days and two pairs of clips never agree to the last digit at one point after another. Nothing is
claimed of a single point or of a few; the answer is a question for the person who took them.
"""

from __future__ import annotations

from dataclasses import dataclass

from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.reading import Reading
from fieldtool.quantities.entry import last_digit
from fieldtool.quantities.fields import FIELDS

__all__ = ["LEAST_POINTS", "TooExact", "too_exact"]

LEAST_POINTS = 4
"""Fewer points prove nothing. With 0.02 Ω of scatter between readings (our assumption) and a last digit of 0.01 Ω
one point agrees by chance about one time in five, four points one time in six hundred."""


@dataclass(frozen=True, slots=True)
class TooExact:
    """One set of readings that could have been worked out: which relation, the question, and where it holds."""

    kind: str
    sentence: str
    places: tuple[str, ...]


def too_exact(job: Job, circuit_id: str) -> tuple[TooExact, ...]:
    """Sets of measured readings of one circuit that are exactly what others make, at every point that has both.

    Readings marked calculated are not asked about: they say so themselves. Raises KeyError for an unknown circuit.
    """
    out: list[TooExact] = []
    board = job.circuit(circuit_id).board
    for stage, when in (("as_found", "as found"), ("after_work", "after the work")):
        zs, r1_r2, crossed = (_measured(job, circuit_id, test, stage) for test in ("zs", "r1_r2", "le_cross"))
        for base, words in (("ze", "Ze"), ("zdb", "the loop at the board")):
            supply = job.counted_at(board, base, stage) or job.counted_at(board, base)
            if supply is None or supply.value is None or supply.sign != "=":
                continue
            made = {place: supply.value + (reading.value or 0.0) for place, reading in r1_r2.items()}
            if where := _all_equal(zs, made):
                said = f"Zs {when} is {words} + R1+R2 to the last digit at all {len(where)} points: read or worked out?"
                out.append(TooExact("zs_from_r1_r2", said, where))
                break
        copied = {place: reading.value or 0.0 for place, reading in crossed.items()}
        if where := _all_equal(r1_r2, copied):
            said = f"R1+R2 {when} is L-E crossed to the last digit at all {len(where)} points: read or copied?"
            out.append(TooExact("r1_r2_from_crossed", said, where))
    before = {place: item.value or 0.0 for place, item in _measured(job, circuit_id, "zs", "as_found").items()}
    if where := _all_equal(_measured(job, circuit_id, "zs", "after_work"), before):
        said = f"Zs after the work is Zs as found to the last digit at all {len(where)} points: read or copied?"
        out.append(TooExact("zs_repeated", said, where))
    return tuple(out)


def _measured(job: Job, circuit_id: str, test: str, stage: str) -> dict[str, Reading]:
    """The readings of one test that count and say they were measured, by point."""
    return {
        point: reading
        for (circuit, point, key, at), reading in job.counted().items()
        if circuit == circuit_id and point is not None and key == test and at == stage
        if reading.origin == "measured" and reading.mode not in ("calculated", "enquiry")
        if reading.value is not None and reading.sign == "="
    }


def _all_equal(readings: dict[str, Reading], made: dict[str, float]) -> tuple[str, ...]:
    """The points that have both, where there are enough and every one agrees within half a last digit; else none."""
    both = sorted(readings.keys() & made.keys())
    if len(both) < LEAST_POINTS:
        return ()
    for place in both:
        reading = readings[place]
        digit = last_digit(FIELDS[TESTS[reading.test].field or "loop_ohm"], reading.raw)
        if abs((reading.value or 0.0) - made[place]) > digit / 2 + 1e-9:
            return ()
    return tuple(both)
