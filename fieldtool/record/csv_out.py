"""Readings and findings as CSV."""

from __future__ import annotations

from math import isfinite

from fieldtool.answers import Finding
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.reading import Reading
from fieldtool.quantities.fields import FIELDS
from fieldtool.record.csv_cells import as_csv, guarded
from fieldtool.record.gathered import gather
from fieldtool.record.say import place

__all__ = ["FINDING_COLUMNS", "READING_COLUMNS", "SIGN_WORDS", "findings_csv", "readings_csv", "stored_unit"]

READING_COLUMNS: dict[str, str] = {
    "id": "the reading's own id; empty in: a new one is made",
    "board": "id of the board, for readings at the origin or a board",
    "circuit": "id of the circuit, for its readings",
    "point": "id of the point or new outlet, for readings at a point",
    "place": "what people call that place; not read in",
    "test": "key of the test, as in: " + " ".join(TESTS),
    "stage": "as_found or after_work; empty in: as_found",
    "value": "the number, with a point, in the unit beside it",
    "unit": "unit of the value: ohm, A, ms or mA as stored; in also MΩ, kA and what the screen takes. Never left out",
    "range": "over or under where the meter showed more or less than its range, open for an open circuit; else empty",
    "answer": "right or wrong, for tests that are answered so",
    "raw": "as it was typed",
    "mode": "high_current, no_trip, enquiry or calculated, for loop tests",
    "probes": "front, terminals or adaptor",
    "instrument": "id of the instrument",
    "temp_c": "temperature, degrees Celsius",
    "by": "id of the person",
    "at": "when, with its zone, like 2026-12-01T09:00:00Z; empty in: now",
    "origin": "measured, calculated or limitation; empty in: measured",
    "why_not": "why it was not taken, for a limitation",
    "note": "a note",
    "doubt": "the question asked at entry; column left out in: asked again",
    "confirmed": "yes where that was confirmed",
    "needs_taken": "yes where a dead reading waits to be told when it was taken; empty in: worked out",
    "taken": "when it was: proved_dead, just_now, earlier or not_sure",
    "replaces": "id of the reading that this one corrects",
    "withdraws": "id of the reading that this one takes back",
    "set_aside": "why it no longer counts",
}
"""The columns of readings, in order, and what each holds."""

FINDING_COLUMNS: dict[str, str] = {
    "circuit": "id of the circuit",
    "request": "id of the request; empty for the circuit as it stands",
    "way": "key of the way that is judged",
    "verdict": "go, conditions, stop or more",
    "rule": "id of the rule",
    "outcome": "holds, condition, broken, cannot_tell or not_applicable",
    "advice": "yes for what never blocks",
    "regulation": "its number",
    "place": "id of the place",
    "place_name": "what people call it",
    "says": "the finding in one line",
    "measured": "the figure judged",
    "limit": "the limit it is held to",
    "tolerance": "how far the meters can be off",
    "unit": "unit of these three",
    "origin": "measured, calculated, inferred, assumed or declared",
    "basis": "what is in the limit, and where it stands",
    "working": "the working, lines parted by line breaks",
    "do": "what to do about it",
    "assumed": "what was assumed",
    "decided": "a designer's decision on it",
}
"""The columns of findings, in order, and what each holds."""

SIGN_WORDS = {"=": "", ">": "over", "<": "under", "open": "open"}
"""What a meter's sign is called in a cell; the signs themselves could start a formula."""

_UNITS = {"ohm": "ohm", "ampere": "A", "millisecond": "ms", "milliampere": "mA"}


def stored_unit(test: str) -> str:
    """The unit that a test's value is stored in, as a cell names it; empty for a test answered right or wrong."""
    key = TESTS[test].field  # type: ignore[index]
    return _UNITS[FIELDS[key].si] if key is not None else ""


def readings_csv(job: Job) -> bytes:
    """Every reading of a job, oldest first, corrected and withdrawn ones too; reads back as the same readings."""
    return as_csv(tuple(READING_COLUMNS), (_reading(job, reading) for reading in job.readings))


def _reading(job: Job, reading: Reading) -> list[str]:
    cells: dict[str, str] = {
        "place": guarded(job.point_name(reading.point)) if reading.circuit is not None or reading.point else "",
        "value": repr(reading.value) if reading.value is not None else "",
        "unit": stored_unit(reading.test) if reading.value is not None else "",
        "range": SIGN_WORDS[reading.sign],
        "temp_c": repr(reading.temp_c) if reading.temp_c is not None else "",
        "at": reading.at.isoformat().replace("+00:00", "Z"),
        "confirmed": "yes" if reading.confirmed else "no",
        "needs_taken": "yes" if reading.needs_taken else "no",
    }
    return [cells[name] if name in cells else guarded(str(getattr(reading, name) or "")) for name in READING_COLUMNS]


def findings_csv(job: Job) -> bytes:
    """Every finding on every circuit: as it stands, then for the way that each request proposes."""
    rows: list[list[str]] = []
    for circuit in job.circuits:
        answers = gather(job, circuit.id)
        rows += [
            _finding(job, circuit.id, "", "", answers.existing.outcome, found) for found in answers.existing.findings
        ]
        for proposal in answers.proposals:
            way, verdict = proposal.proposed, proposal.proposed.verdict
            for found in verdict.findings if verdict is not None else ():
                rows.append(_finding(job, circuit.id, proposal.request.id, way.way, way.outcome, found))
    return as_csv(tuple(FINDING_COLUMNS), rows)


def _finding(job: Job, circuit: str, request: str, way: str, verdict: str, found: Finding) -> list[str]:
    basis = found.basis
    texts = (
        found.rule, found.outcome, "yes" if found.advice else "no", found.clause, found.place,
        place(job, found.place, circuit), found.says, _number(found.measured), _number(found.limit),
        _number(found.tol), found.unit, found.origin, f"{basis.basis} ({basis.table})" if basis is not None else "",
        "\n".join(found.working), found.do, "\n".join(found.assumed), found.overridden_by,
    )  # fmt: skip
    return [circuit, request, way, verdict, *(guarded(text) for text in texts)]


def _number(value: float | None) -> str:
    """A number as it is; nothing where there is none or it is infinite."""
    return repr(float(value)) if value is not None and isfinite(value) else ""
