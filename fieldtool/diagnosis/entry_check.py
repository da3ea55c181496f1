"""What to say beside an entry as it is made: likely for this cable, in line with its neighbours, or look again.

Light enough for every key: no network is solved here. A doubt never refuses a value; it marks it until confirmed.
"""

from __future__ import annotations

from statistics import median

from fieldtool.answers import EntryRemark
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.reading import Reading
from fieldtool.reference.look import OutsideTable, cable, r_ohm_per_m

__all__ = ["remark"]

CONTACT_OHM = 0.03
"""Scatter of clips and contacts [ohm]; common practice: nothing is made of it."""


def remark(
    job: Job,
    circuit_id: str | None,
    point_id: str | None,
    test: str,
    stage: str,
    value: float | None,
    sign: str,
) -> EntryRemark | None:
    """What is likely in a cell, and what is said of a value typed there; None where nothing can be said.

    ``value`` is in SI; None asks only what is likely.
    """
    if circuit_id is None:
        return None
    span = _span(job, circuit_id, point_id, test, stage)
    expect = "" if span is None else f"expect {span[0]:.2f} to {span[1]:.2f}"
    if value is None or sign != "=":
        return EntryRemark("", expect=expect) if expect else None
    doubt = _doubt(job, circuit_id, point_id, test, stage, value, span)
    if doubt:
        return EntryRemark(doubt, doubt=True, expect=expect)
    return EntryRemark(_kind_words(job, circuit_id, point_id, test, stage, value, span), expect=expect)


def _value(job: Job, circuit_id: str, point_id: str | None, test: str, stage: str) -> float | None:
    reading = job.counted().get((circuit_id, point_id, test, stage))
    return reading.value if reading is not None and reading.sign == "=" else None


def _neighbours(job: Job, circuit_id: str, point_id: str | None, test: str, stage: str) -> list[float]:
    found: list[Reading] = [
        reading
        for cell, reading in job.counted().items()
        if cell[0] == circuit_id and cell[2] == test and cell[3] == stage and cell[1] != point_id
    ]
    return [reading.value for reading in found if reading.value is not None and reading.sign == "="]


def _span(job: Job, circuit_id: str, point_id: str | None, test: str, stage: str) -> tuple[float, float] | None:
    r1, rn, r2 = (_value(job, circuit_id, None, end, stage) for end in ("r1", "rn", "r2"))
    if test == "rn" and r1 is not None:
        return _around(r1)
    if test == "r2" and r1 is not None:
        key = job.circuit(circuit_id).cable
        ratio = _ratio(key)
        return None if ratio is None else _around(r1 * ratio)
    if test == "ln_cross" and r1 is not None and rn is not None:
        return _around((r1 + rn) / 4)
    if test == "le_cross" and r1 is not None and r2 is not None and r1 + r2 > 0:
        low, high = r1 * r2 / (r1 + r2), (r1 + r2) / 4
        return (max(0.0, round(low - CONTACT_OHM, 2)), round(high + CONTACT_OHM, 2))
    if test == "zs" and point_id is not None:
        board = job.counted_at(job.circuit(circuit_id).board, "ze")
        dead = _value(job, circuit_id, point_id, "r1_r2", stage)
        if dead is None and r1 is not None and r2 is not None:
            top = (r1 + r2) / 4
            if board is not None and board.value is not None:
                extra = 0.0
                cross = _value(job, circuit_id, point_id, "le_cross", stage)
                if cross is not None:
                    extra = max(0.0, cross - top)
                return (round(board.value, 2), round(board.value + top + extra + 0.05, 2))
            return None
        if dead is not None and board is not None and board.value is not None:
            return _around(board.value + dead)
    return None


def _ratio(key: str | None) -> float | None:
    if key is None:
        return None
    kind = cable(key)
    if kind.cpc_mm2 is None:
        return None
    try:
        return r_ohm_per_m(kind.cpc_mm2).value / r_ohm_per_m(kind.line_mm2).value
    except OutsideTable:
        return None


def _around(value: float) -> tuple[float, float]:
    slack = max(CONTACT_OHM, 0.06 * value)
    return (max(0.0, round(value - slack, 2)), round(value + slack, 2))


def _doubt(
    job: Job,
    circuit_id: str,
    point_id: str | None,
    test: str,
    stage: str,
    value: float,
    span: tuple[float, float] | None,
) -> str:
    if test in ("r1", "rn", "r2") and value == 0:
        return "0.00 between the ring ends: nothing is that good. Are the clips touching?"
    r1 = _value(job, circuit_id, None, "r1", stage)
    if test == "r2" and r1 is not None and span is not None and 0 < value < 0.8 * r1:
        return f"r2 {value:.2f} is under r1 {r1:.2f}; an earth near {sum(span) / 2:.2f} was likely. Check clips."
    if test not in ("r1", "rn", "r2", "ln_cross", "le_cross", "r1_r2", "zs"):
        return ""
    if test in _ENDS:
        length = _length_doubt(job, circuit_id, test, value)
        if length:
            return length
    near = _neighbours(job, circuit_id, point_id, test, stage) if point_id is not None else []
    usual = median(near) if near else (sum(span) / 2 if span is not None else None)
    if usual is None or usual <= 0:
        return ""
    for factor in (1000, 100, 10):
        if value >= usual * factor * 0.6 and value > 2:
            return f"{value:g} Ω is about {factor} times what was likely, {usual:.2f}. Look again."
    if test in _ENDS and 0 < value <= usual / 6:
        return f"{value:g} Ω is about a tenth of what was likely, {usual:.2f}. Look again."
    if 0 < value <= usual / 50:
        return f"{value:g} Ω is far under what was likely, {usual:.2f}. Look again."
    before = _value(job, circuit_id, point_id, test, stage)
    if before is not None and abs(before - value) > max(0.1, 0.3 * before):
        return f"Was {before:.2f} here before. Both are kept; which one stands?"
    return ""


_ENDS = ("r1", "rn", "r2")

MOST_RING_M, LEAST_RING_M = 300.0, 5.0
"""Lengths beyond which a ring is hardly one [m]; our assumption, about three times the longest met."""


def _length_doubt(job: Job, circuit_id: str, test: str, value: float) -> str:
    """An end-to-end reading that no likely length of the cable found would give."""
    key = job.circuit(circuit_id).cable
    kind = cable(key) if key is not None else None
    if kind is None or kind.cpc_mm2 is None or kind.measured_resistance_only:
        return ""
    metres = value / r_ohm_per_m(kind.cpc_mm2 if test == "r2" else kind.line_mm2).value
    if metres > MOST_RING_M:
        slip = next((times for times in (1000, 100, 10) if 15 <= metres / times <= 150), None)
        ask = f" {value / slip:.2f}?" if slip else " Look again."
        return f"{value:g} Ω would be {metres:.0f} m of {kind.words}.{ask}"
    if metres < LEAST_RING_M:
        return f"{value:g} Ω would be {metres:.1f} m of ring. Are the clips touching?"
    return ""


def _kind_words(
    job: Job,
    circuit_id: str,
    point_id: str | None,
    test: str,
    stage: str,
    value: float,
    span: tuple[float, float] | None,
) -> str:
    name = job.point_name(point_id)[:15] if point_id else TESTS[test].words  # type: ignore[index]
    if test in ("ln_cross", "le_cross") and span is not None:
        if value <= span[1] + 1e-9 and value >= span[0] - 1e-9:
            return f"{name} {value:.2f}: level with the ring."
        if value > span[1]:
            metres = _spur_metres(job, circuit_id, test, value - sum(span) / 2)
            length = f", a spur of about {metres:.0f} m?" if metres is not None else ": a spur?"
            return f"{name} {value:.2f} sits off the ring{length}"
        return f"{name} {value:.2f} is low: does it climb from the board?"
    if test == "le_cross":
        other = _value(job, circuit_id, point_id, "ln_cross", stage)
        if other is not None and other == value:
            return "The same as L-N: are the clips still on neutral?"
    return ""


def _spur_metres(job: Job, circuit_id: str, test: str, excess: float) -> float | None:
    key = job.circuit(circuit_id).cable
    if key is None or excess <= 0:
        return None
    kind = cable(key)
    if kind.cpc_mm2 is None:
        return None
    line = r_ohm_per_m(kind.line_mm2).value
    other = line if test == "ln_cross" else r_ohm_per_m(kind.cpc_mm2).value
    return excess / (line + other)
