"""The record of a visit as plain sections, in the order a supervisor re-works it."""

from __future__ import annotations

from datetime import datetime

from fieldtool import __version__
from fieldtool.job.job import Job
from fieldtool.record.blocks import Block, Points, Record, Section, Words
from fieldtool.record.figures import provenance
from fieldtool.record.found import circuit_found, place_found, readings_taken
from fieldtool.record.gathered import CircuitAnswers, Proposal, gather
from fieldtool.record.judged import (
    asked_for,
    foretold,
    material,
    overrides,
    reading_says,
    stands,
    verdict_reached,
    ways_compared,
)  # fmt: skip
from fieldtool.record.logged import isolation_log, parted_and_back
from fieldtool.record.plain_page import plain_page
from fieldtool.record.plan import plan
from fieldtool.record.say import amount, moment, value_of
from fieldtool.record.to_copy import to_copy
from fieldtool.reference.edition import EDITION_SENTENCE, RULE_SET

__all__ = ["CAUTIONS", "contents"]

CAUTIONS = (
    "For competent persons. This record holds what was entered and what follows from it; it cannot see the circuit.",
    "It never says that a circuit is free of danger. A verdict says which rules hold on these figures, which do not, "
    "and what is missing. The standard in force, the makers' instructions, the local building-control rules and the "
    "judgement of the person on site decide.",
    "No live work: prove dead at every place, every time, with an instrument proved before and after. A board whose "
    "main switch is off still has live incoming terminals, and other sources stay live.",
    "It is no certificate and stands in place of none.",
)


def contents(job: Job, now: datetime) -> Record:
    """The whole record of a job, its answers worked out afresh; ``now`` is when it is written."""
    circuits = tuple(gather(job, circuit.id) for circuit in job.circuits)
    name = job.site.name or "a visit"
    sections = [_cautions(job, now), place_found(job)]
    at_boards = tuple(readings_taken(job, None))
    if at_boards:
        sections.append(Section("Readings at the origin and the boards", at_boards))
    for answers in circuits:
        sections += _circuit(job, answers)
    if not circuits:
        sections.append(Section("Circuits", (Words("No circuit was entered yet."),)))
    used = {asked: found for answers in circuits for asked, found in answers.used.items()}
    sections.append(Section("Where every published figure comes from", tuple(provenance(used))))
    sections += [to_copy(job, answers) for answers in circuits]
    sections.append(plain_page(job, circuits))
    return Record(f"Record of {name}", f"{name} – written {moment(now)}", tuple(sections))


def _cautions(job: Job, now: datetime) -> Section:
    zone = now.astimezone().tzname() or "local time"
    marked = (
        (Words("INVENTED DEMONSTRATION: no such place, people or circuit.", "caution"),) if job.site.invented else ()
    )
    blocks: tuple[Block, ...] = (
        *marked,
        Words(EDITION_SENTENCE, "caution"),
        Points(CAUTIONS),
        Words(
            f"Written {moment(now)} by fieldtool {__version__}, rules {RULE_SET}. Times are this machine's ({zone}). "
            f"The verdicts were worked out when this was written.",
            "small",
        ),
    )
    return Section("Read this first", blocks)


def _circuit(job: Job, answers: CircuitAnswers) -> list[Section]:
    circuit = job.circuit(answers.circuit_id)
    name = circuit.name or circuit.id

    def titled(words: str, blocks: tuple[Block, ...]) -> Section:
        return Section(f"{name}: {words}", blocks)

    sections = [
        titled("what was found", tuple(circuit_found(job, circuit))),
        titled("map", _map(job, answers)),
        titled("readings", tuple(readings_taken(job, circuit.id)) or (Words("No reading was taken yet."),)),
        titled("what the readings say", tuple(reading_says(job, answers.reading, circuit.id))),
        titled("as it stands", tuple(stands(answers.existing, job, circuit.id, whole=not answers.proposals))),
    ]
    many = len(answers.proposals) > 1
    for number, proposal in enumerate(answers.proposals, start=1):
        which = f" {number}" if many else ""
        sections.append(titled(f"what was asked for{which}", tuple(asked_for(job, proposal.request))))
        sections.append(titled(f"the verdict{which}", tuple(verdict_reached(job, proposal))))
        sections.append(titled(f"ways compared{which}", tuple(ways_compared(proposal))))
    decided = tuple(overrides(job, answers))
    if decided:
        sections.append(titled("designer's decisions", decided))
    sections.append(titled("isolation log", tuple(isolation_log(job, circuit.id))))
    sections.append(titled("parted and put back", tuple(parted_and_back(job, circuit.id))))
    for number, proposal in enumerate(answers.proposals, start=1):
        which = f" {number}" if many else ""
        sections.append(titled(f"foretold and measured{which}", tuple(foretold(job, proposal))))
        sections.append(titled(f"material, tests and document{which}", tuple(material(proposal.proposed))))
        sections.append(titled(f"what remains{which}", _remains(proposal)))
    return sections


def _remains(proposal: Proposal) -> tuple[Block, ...]:
    verdict = proposal.proposed.verdict
    missing = tuple(f"to read or see: {gap.words}" for gap in verdict.missing) if verdict is not None else ()
    lines = (*missing, *proposal.left)
    return (Points(lines),) if lines else (Words("Nothing: everything asked for was read, put back and handed over."),)


def _map(job: Job, answers: CircuitAnswers) -> tuple[Block, ...]:
    values: dict[str, str] = {}
    for test in ("r1_r2", "le_cross", "zs"):
        for cell, reading in job.counted().items():
            if cell[0] == answers.circuit_id and cell[1] is not None and cell[2] == test and cell[3] == "as_found":
                values[cell[1]] = value_of(reading)
    shown = "Zs read there as found, else R1+R2"
    for proposal in answers.proposals:
        for item in proposal.proposed.verdict.predicted if proposal.proposed.verdict is not None else ():
            if item.test == "zs":
                values.setdefault(item.place, f"{amount(item.value, item.unit)} calc.")
    ring = answers.reading.shown_ring or any(
        reading.circuit == answers.circuit_id and reading.test in ("r1", "rn", "r2") and reading.sign == "="
        for reading in job.standing()
    )
    drawn = plan(job, answers.circuit_id, ring=ring, values=values)
    if drawn is None:
        return (Words("No points were entered yet."),)
    key = (
        f"Beside each name: {shown}; what is only worked out is marked calc. In the boxes: 2 twin outlet, 1 single, "
        "F fused unit, A appliance, J joint box, – blanked box. Dashed: proposed. Lengths are not to scale."
    )
    away = [
        outlet.name or outlet.id
        for request, outlet in job.new_outlets()
        if request.circuit == answers.circuit_id and not (request.at or request.swap)
    ]
    if away:
        key += f" Proposed, but not from a point of the map: {', '.join(away)}."
    return (drawn, Words(key, "small"))
