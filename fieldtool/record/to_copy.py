"""The figures that people copy to the document they write, on one page, each marked with where it comes from."""

from __future__ import annotations

from math import isfinite

from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS, words
from fieldtool.job.reading import Reading
from fieldtool.quantities.show import round_limit_down
from fieldtool.record.blocks import Block, Grid, Section, Words
from fieldtool.record.gathered import CircuitAnswers
from fieldtool.record.say import amount, cable_words, device_words, origin_words, value_of

__all__ = ["to_copy"]

_Row = tuple[str, str, str, str]

_AT_THE_BOARD = (
    ("r1", "r1, line of the ring end to end"),
    ("rn", "rn, neutral of the ring end to end"),
    ("r2", "r2, cpc of the ring end to end"),
    ("ir_ln", "Insulation resistance, line to neutral"),
    ("ir_le", "Insulation resistance, line to earth"),
    ("ir_ne", "Insulation resistance, neutral to earth"),
    ("ir_live_e", "Insulation resistance, live conductors to earth"),
    ("polarity", "Polarity"),
    ("rcd_ms", "RCD trip time at rated residual current"),
    ("rcd_button", "RCD test button"),
    ("function", "Function"),
)
_AT_POINTS = (
    ("r1_r2", "R1+R2, highest read"),
    ("le_cross", "R1+R2 of the ring, legs crossed, highest read"),
    ("zs", "Zs, highest read"),
)
_NO_REASON = "not taken; no reason was given yet"
_RING_ONLY = ("r1", "rn", "r2", "le_cross")
_MAY_LACK = ("ir_live_e", "function", "le_cross")


def to_copy(job: Job, answers: CircuitAnswers) -> Section:
    """One page of figures for one circuit under their usual names.

    A value read after the work stands before one as found. What nobody measured is marked so, never filled in.
    """
    circuit = job.circuit(answers.circuit_id)
    ring = any(reading.test in ("r1", "rn", "r2") and reading.circuit == circuit.id for reading in job.readings)
    rows: list[_Row] = [
        ("Earthing system", words(job.supply.system), "seen", ""),
        _reading(job, "Ze", None, "ze", circuit.board),
        _reading(job, "Prospective fault current", None, "pfc", circuit.board),
    ]
    if job.supply.system == "tt":
        rows.append(_reading(job, "RA, earth electrode", None, "ra", circuit.board))
    if circuit.device is not None:
        device = circuit.device
        rows.append(("Protective device", device_words(device.type, device.in_a), "seen", ""))
        rows.append(("Breaking capacity", amount(device.breaking_ka, "kA"), "seen", ""))
    rcd = circuit.rcd
    if rcd is not None:
        rows.append(("RCD", f"type {words(rcd.type)}, {rcd.i_dn_ma:g} mA", "seen", ""))
    rows.append(("Cable as found", cable_words(circuit.cable), "seen", ""))
    for test, name in _AT_THE_BOARD[:3] if ring else ():
        rows.append(_reading(job, name, circuit.id, test))
    for test, name in _AT_POINTS:
        if test in _RING_ONLY and not ring:
            continue
        found = _highest(job, circuit.id, test)
        if found is not None:
            rows.append((name, value_of(found), origin_words(found), _how(job, found, place=True)))
        elif test not in _MAY_LACK and not (ring and test == "r1_r2"):
            rows.append((name, "–", "limitation", _NO_REASON))
    rows += _worked_out(job, answers)
    for test, name in _AT_THE_BOARD[3:]:
        row = _reading(job, name, circuit.id, test)
        if row[3] != _NO_REASON or not (test in _MAY_LACK or (test.startswith("rcd") and rcd is None)):
            rows.append(row)
    blocks: tuple[Block, ...] = (
        Words(
            "For copying by hand. Measured: read with the instrument named in the record. Calculated: worked out here, "
            "never to be entered as read. Limitation: not measured, for the reason given. Seen: by eye."
        ),
        Grid(("figure", "value", "origin", "note"), tuple(rows), (3.6, 3.4, 1.8, 4.2)),
    )
    return Section(f"Figures to copy: {circuit.name or circuit.id}", blocks, own_page=True)


def _reading(job: Job, name: str, circuit_id: str | None, test: str, board: str = "") -> _Row:
    for stage in ("after_work", "as_found"):
        if circuit_id is None:
            found = job.counted_at(board, test, stage)
        else:
            found = job.counted().get((circuit_id, None, test, stage))
        if found is not None:
            return (name, value_of(found), origin_words(found), _how(job, found))
    for found in reversed(job.standing()):
        if (found.circuit, found.point, found.test) == (circuit_id, None, test) and found.origin == "limitation":
            return (name, "–", "limitation", found.why_not)
        if (found.circuit, found.point, found.test) == (circuit_id, None, test):
            return (name, "–", "limitation", f"read {value_of(found)}, which does not count: see the readings")
    return (name, "–", "limitation", _NO_REASON)


def _how(job: Job, reading: Reading, *, place: bool = False) -> str:
    said = [f"at {job.point_name(reading.point)}"] if place else []
    said += [words(reading.stage)]
    said += [words(reading.mode)] if reading.mode in ("high_current", "no_trip") else []
    return ", ".join(said)


def _highest(job: Job, circuit_id: str, test: str) -> Reading | None:
    mine = [r for cell, r in job.counted().items() if cell[0] == circuit_id and cell[2] == test]
    newest = {r.point: r for r in sorted(mine, key=lambda r: r.stage == "after_work")}
    if not newest:
        return None
    return max(newest.values(), key=lambda r: float("inf") if r.sign == "open" else r.value or 0.0)


def _worked_out(job: Job, answers: CircuitAnswers) -> list[_Row]:
    """What the tool worked out for the circuit, marked calculated: the limit of the loop, Zs and R1+R2 to expect."""
    verdict = answers.existing
    for proposal in answers.proposals:
        verdict = proposal.proposed.verdict or verdict
    rows: list[_Row] = []
    limits = [f for f in verdict.findings if f.limit_key == "zs" and f.basis is not None]
    if limits:
        least = min(limits, key=lambda f: f.limit or float("inf"))
        basis = least.basis
        assert basis is not None
        # A limit is copied rounded down, never up.
        most = round_limit_down(basis.value, 3 if basis.value < 10 else 0)
        rows.append(("Largest Zs allowed, as a reading", f"{most:g} Ω", "calculated", basis.basis))
    for item in verdict.predicted:
        if item.test in ("r1_r2", "zs") and isfinite(item.value):
            name = f"{TESTS[item.test].words} to expect"  # type: ignore[index]
            where = f"at {job.point_name(item.place)}, after the work"
            rows.append((name, amount(item.value, item.unit), "calculated", where))
    return rows
