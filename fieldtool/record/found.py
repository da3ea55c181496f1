"""What was found: the place, the supply, the board, the circuit, its points and every reading."""

from __future__ import annotations

from collections.abc import Iterator

from fieldtool.job.circuit import Circuit
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS, words
from fieldtool.job.place import Board, Rcd
from fieldtool.job.reading import Reading
from fieldtool.record.blocks import Block, Grid, Points, Section, Words
from fieldtool.record.say import (
    amount,
    answers_of,
    cable_words,
    device_words,
    instrument_words,
    moment,
    origin_words,
    person,
    place,
    value_of,
)  # fmt: skip

__all__ = ["circuit_found", "place_found", "readings_taken"]

_PAIR = (2.0, 5.0)
_SHORT = 40
"""A longer reason stands below the table, not in its narrow last column [characters]."""


def _pairs(rows: list[tuple[str, str]]) -> Grid:
    return Grid((), tuple(rows), _PAIR)


def _note(text: str) -> Iterator[Block]:
    if text:
        yield Words(f"Note: {text}")


def place_found(job: Job) -> Section:
    """The place, the people, the instruments, the supply and each board, as they were found."""
    blocks: list[Block] = [_pairs(answers_of(job.site)), *_note(job.site.note)]
    if job.people:
        blocks.append(Words("Who was there", "under"))
        blocks.append(_pairs([(one.role, one.name + (f" ({one.note})" if one.note else "")) for one in job.people]))
    if job.instruments:
        blocks.append(Words("Instruments", "under"))
        blocks.append(_instruments(job))
    blocks.append(Words("Supply", "under"))
    blocks.append(_pairs(answers_of(job.supply)))
    if job.supply.bonds:
        rows = [
            (f"bond to {words(bond.part)}", f"{words(bond.condition)}, {amount(bond.size_mm2, 'mm2')}")
            for bond in job.supply.bonds
        ]
        blocks.append(_pairs(rows))
    for source in job.supply.other_sources:
        back = {"yes": "feeds back", "no": "does not feed back", None: "feeding back not known"}[source.feeds_back]
        said = f"Other source: {words(source.kind)}, {back}, isolated by {source.isolated_by or 'not known'}."
        blocks.append(Words(f"{said} {source.note}".strip()))
    blocks.extend(_note(job.supply.note))
    for board in job.boards:
        blocks.extend(_board(board))
    return Section("What was found: the place and the supply", tuple(blocks))


def _instruments(job: Job) -> Grid:
    rows = []
    for tool in job.instruments:
        checked = [f"calibrated {moment(tool.calibrated_on)}"] if tool.calibrated_on is not None else []
        if tool.low_ohm_checked_at is not None:
            checked.append(f"low ohms checked {moment(tool.low_ohm_checked_at)}")
        if tool.lead_null_ohm is not None:
            checked.append(f"leads nulled at {amount(tool.lead_null_ohm, 'ohm')}")
        own = ""
        if tool.kind in ("multifunction", "low_ohm", "clamp"):
            own = f"±({tool.gain_percent:g} % + {tool.digits:g} digits)"
        rows.append(
            (tool.name, words(tool.kind), tool.serial or "–", own, "; ".join([*checked, tool.note]).strip("; "))
        )
    return Grid(("name", "kind", "serial", "accuracy", "checks"), tuple(rows), (2.4, 2.4, 1.8, 2.4, 4.0))


def _board(board: Board) -> Iterator[Block]:
    yield Words(f"Board: {board.name}", "under")
    yield _pairs([pair for pair in answers_of(board) if pair[0] != "board name"])
    yield from _note(board.note)


def _rcd(rcd: Rcd) -> str:
    said = f"type {words(rcd.type)}, {rcd.i_dn_ma:g} mA, delay {words(rcd.delay)}"
    said += f", BS EN {rcd.standard}" if rcd.standard.startswith("61") else f", standard {rcd.standard}"
    where = {"circuit": "at the circuit's own way", "upstream": "ahead of the board's ways", "outlet": "in an outlet"}
    return f"{said}, {where[rcd.place]}"


def circuit_found(job: Job, circuit: Circuit) -> Iterator[Block]:
    """The circuit's own survey: device, RCD, cable, what was seen; then its points and traced runs."""
    rows = [pair for pair in answers_of(circuit) if pair[0] != "circuit name"]
    rows.insert(0, ("board", job.board(circuit.board).name))
    if circuit.device is not None:
        device = circuit.device
        said = device_words(device.type, device.in_a)
        said += f", breaks {device.breaking_ka:g} kA" if device.breaking_ka is not None else ", breaking not known"
        said += f", energy class {device.energy_class}" if device.energy_class is not None else ""
        said += f", {words(device.condition)}" if device.condition is not None else ""
        rows.append(("device", said))
    else:
        rows.append(("device", "not known"))
    if circuit.rcd is not None:
        rows.append(("RCD", _rcd(circuit.rcd)))
    rows += answers_of(circuit.install)
    yield _pairs(rows)
    yield from _note(circuit.note)
    points = job.points_of(circuit.id)
    if points:
        yield Words("Points, in walking order where it was traced", "under")
        yield Grid(
            ("point", "kind", "hangs on", "cables", "seen"),
            tuple(
                (
                    point.name or point.id,
                    words(point.kind),
                    _hangs(job, point.spur_from, point.behind, point.walk_order),
                    str(point.cables) if point.cables is not None else "–",
                    ", ".join(
                        part
                        for part in (
                            words(point.condition) if point.condition else "",
                            f"fuse {point.fuse_a:g} A" if point.fuse_a is not None else "",
                            f"box {point.box_depth_mm:g} mm" if point.box_depth_mm is not None else "",
                            "cannot be reached" if point.accessible == "no" else "",
                            point.note,
                        )
                        if part
                    ),
                )
                for point in points
            ),
            (3.0, 2.4, 3.0, 1.2, 4.0),
        )
    runs = [run for run in job.runs if run.circuit == circuit.id]
    if runs:
        yield Words("Cable runs that were traced", "under")
        yield Grid(
            ("from", "to", "length", "cable", "note"),
            tuple(
                (
                    job.point_name(run.a),
                    job.point_name(run.b),
                    f"{amount(run.length_m, 'm')}, {words(run.length_from)}",
                    cable_words(run.cable or circuit.cable),
                    run.note,
                )
                for run in runs
            ),
            (2.6, 2.6, 2.4, 3.0, 3.0),
        )
    loads = [load for load in job.loads if load.circuit == circuit.id]
    if loads:
        known = (
            f"{load.name or 'load'} at {job.point_name(load.point)}: {amount(load.amps, 'A')}"
            f"{', for long' if load.lasting else ''} {load.note}".strip()
            for load in loads
        )
        yield Words("Loads that are known", "under")
        yield Points(tuple(known))


def _hangs(job: Job, spur_from: str | None, behind: str | None, order: int | None) -> str:
    if behind is not None:
        return f"behind the fused unit {job.point_name(behind)}"
    if spur_from is not None:
        return f"spur from {job.point_name(spur_from)}"
    return f"number {order} of the walk" if order is not None else "not traced"


def readings_taken(job: Job, circuit_id: str | None) -> Iterator[Block]:
    """Every reading of a circuit, or of the boards where ``circuit_id`` is None: as found, then after the work.

    A reading that was corrected, taken back or not counted stays in the list and says so.
    """
    mine = [reading for reading in job.readings if reading.circuit == circuit_id and reading.withdraws is None]
    for stage in ("as_found", "after_work"):
        rows = [reading for reading in mine if reading.stage == stage]
        if not rows:
            continue
        yield Words(f"Readings {words(stage)}", "under")
        yield Grid(
            ("test", "at", "reading", "origin", "how taken", "with, by", "when", "counts"),
            tuple(_row(job, reading) for reading in rows),
            (2.5, 2.1, 1.5, 1.5, 3.7, 3.0, 2.8, 1.6),
        )
        for reading in rows:
            said = [f"not taken because: {reading.why_not}"] if reading.why_not else []
            said += [f"asked at entry: {reading.doubt}"] if reading.doubt else []
            said += [reading.note] if reading.note else []
            said += [f"does not count: {why}"] if len(why := _set_aside(job, reading)) > _SHORT else []
            if said:
                head = f"{TESTS[reading.test].words} at {place(job, reading.point)}"
                yield Words(f"{head}: {' – '.join(said)}", "small")


def _row(job: Job, reading: Reading) -> tuple[str, ...]:
    how = [words(reading.mode)] if reading.mode in ("high_current", "no_trip") else []
    how += [f"probes {reading.probes}"] if reading.probes else []
    how += [f"at {reading.temp_c:g} °C"] if reading.temp_c is not None else []
    where = job.point_name(reading.point)
    if reading.point is None and reading.board is not None:
        where = job.board(reading.board).name
    return (
        TESTS[reading.test].words,
        where,
        _as_typed(reading),
        origin_words(reading),
        ", ".join(how) or "–",
        f"{instrument_words(job, reading)}, {person(job, reading.by)}",
        moment(reading.at),
        _counts(job, reading),
    )


def _as_typed(reading: Reading) -> str:
    """A reading's value, with what was typed where that says it otherwise."""
    shown = value_of(reading)
    if not reading.raw or reading.answer is not None or shown.startswith(reading.raw):
        return shown
    return f"{shown}\ntyped: {reading.raw}"


def _set_aside(job: Job, reading: Reading) -> str:
    """Why a reading was taken back or set aside; empty where it was not."""
    later = next((row for row in job.readings if row.withdraws == reading.id), None)
    return later.set_aside if later is not None else reading.set_aside


def _in_short(why: str) -> str:
    return f"no: {why}" if len(why) <= _SHORT else "no: see below"


def _counts(job: Job, reading: Reading) -> str:
    """Whether a reading counts, and if not, why."""
    for later in job.readings:
        if later.replaces == reading.id:
            return (
                f"no: corrected to {value_of(later)}" if value_of(later) != value_of(reading) else "no: entered again"
            )
        if later.withdraws == reading.id:
            return _in_short(later.set_aside or "taken back")
    if reading.counts:
        extra = " (confirmed)" if reading.doubt else ""
        return f"yes{extra}"
    if reading.set_aside:
        return _in_short(reading.set_aside)
    if reading.origin == "limitation":
        return "limitation"
    if reading.doubt and not reading.confirmed:
        return "no: doubtful, not confirmed"
    return {
        None: "no: when it was taken is not said",
        "not_sure": "no: not sure when taken",
    }.get(reading.taken, f"no: taken {words(reading.taken)}")
