"""One page for the person who ordered the work, in words without symbols."""

from __future__ import annotations

from fieldtool.answers import VerdictWord
from fieldtool.job.job import Job
from fieldtool.network.shape import labelled_shape
from fieldtool.record.blocks import Block, Points, Section, Words
from fieldtool.record.gathered import CircuitAnswers, Proposal
from fieldtool.record.say import moment
from fieldtool.rules.engine import catalogue
from fieldtool.safety.parting import outstanding

__all__ = ["plain_page", "spelled"]

_IS = {
    "intact_ring": "The readings show a cable that runs from the board round all its points and back, whole.",
    "ring_with_spurs": "The readings show a cable that runs from the board round its points and back, whole, "
    "with one or more branches hanging from it.",
    "bridged_ring": "The readings point to a link across the circuit that should be looked for.",
    "open_line": "A conductor of the circuit is broken.",
    "open_neutral": "A conductor of the circuit is broken.",
    "open_cpc": "The earth of the circuit is broken. That is dangerous.",
    "open_several": "Several conductors of the circuit are broken.",
    "joint_line": "The readings point to a bad joint somewhere in the circuit.",
    "joint_neutral": "The readings point to a bad joint somewhere in the circuit.",
    "joint_cpc": "The readings point to a bad joint, or a thin conductor, in the circuit's earth.",
    "high_loop": "The path to earth is worse than the cable explains. That must be found first.",
    "not_a_ring": "The circuit is not what its label says.",
}
_SAYS: dict[VerdictWord, str] = {
    "go": "On what was read and seen, nothing stands against the work as it is proposed.",
    "conditions": "The work can be done, on conditions that are part of it. They are named below.",
    "stop": "The work cannot be done in this way as things stand. The reasons are named below.",
    "more": "It cannot be said yet whether the work can be done: readings or answers are missing.",
}
_SPELLED = (
    ("kΩ", "thousand ohms"), ("MΩ", "million ohms"), ("Ω", "ohms"), ("mm²", "square millimetres"),
    ("m²", "square metres"), ("A²s", "of heating energy"), ("×", "times"), ("±", "give or take"), ("≤", "at most"),
    ("≥", "at least"), ("%", " per cent"), ("°C", "degrees"), ("I∆n", "its rated current"), ("–", "-"), ("²", ""),
    ("∆", ""), ("√", ""), ("<", "under "), (">", "over "), ("+", " and "), ("=", " is "), ("IT", "computer"),
)  # fmt: skip
_DOCUMENTED = "The person who does the work gives you the document that it calls for: {}."


def spelled(text: str) -> str:
    """A sentence with its signs written out, for somebody who does not know them."""
    for sign, word in _SPELLED:
        text = text.replace(sign, word)
    return " ".join(text.split())


def plain_page(job: Job, circuits: tuple[CircuitAnswers, ...]) -> Section:
    """What was found, what is proposed, what it needs and what was proved: one page, no symbols, no figures to read."""
    blocks: list[Block] = [
        Words(
            "This page says in ordinary words what the rest of this record holds. It is no certificate. Whoever does "
            "the work must be competent and decides on the place itself."
        )
    ]
    for answers in circuits:
        name = spelled(job.circuit(answers.circuit_id).name or answers.circuit_id)
        blocks.append(Words(f"The circuit: {name}", "strong"))
        blocks.append(Words("What was found", "under"))
        blocks.append(Words(_found(job, answers)))
        for proposal in answers.proposals:
            blocks.extend(_proposed(job, proposal))
        if not answers.proposals:
            blocks.append(Words("Nothing is proposed on this circuit."))
        blocks.append(Words("What was proved", "under"))
        blocks.append(Points(_proved(job, answers)))
    return Section("For the person who ordered the work", tuple(blocks), own_page=True)


def _found(job: Job, answers: CircuitAnswers) -> str:
    leading = answers.reading.leading
    says = _IS.get(leading.id, "") if leading is not None else ""
    if leading is not None and leading.healthy and not answers.reading.shown_ring:
        says = "The readings so far fit a sound circuit, but they do not show all of it yet."
    known = any(f.rule == "shape_known" and f.outcome == "holds" for f in answers.existing.findings)
    if not says and known and labelled_shape(job, answers.circuit_id) == "radial":
        says = "The readings fit a cable that runs from the board through its points and ends there."
    if not says:
        says = "What the circuit is stands in the record; the readings show no more than is said there."
    extra = {
        "go": "Nothing was found against it as it stands.",
        "conditions": "It could be added to on conditions.",
        "stop": "As it stands it must not be added to.",
        "more": "Not everything about it is known yet.",
    }[answers.existing.outcome]
    return f"{says} {extra}"


def _proposed(job: Job, proposal: Proposal) -> list[Block]:
    request, answer = proposal.request, proposal.proposed
    wanted = [f"{outlet.name or 'a new outlet'}, with {outlet.metres:g} metres of cable" for outlet in request.outlets]
    if request.swap is not None:
        wanted.append(f"a twin outlet in place of the single one at {job.point_name(request.swap)}")
    blocks: list[Block] = [
        Words("What is proposed", "under"),
        Words(spelled(f"Wanted: {'; '.join(wanted)}. Way of doing it: {answer.words}.")),
        Words(_SAYS[answer.outcome], "strong"),
    ]
    needs = _needs(proposal)
    if needs:
        blocks += [Words("What it needs", "under"), Points(needs)]
    return blocks


def _needs(proposal: Proposal) -> tuple[str, ...]:
    answer, titles = proposal.proposed, {rule.id: rule.title for rule in catalogue()}
    if answer.verdict is None:
        return (spelled(f"Another way: this one does not serve here, because {answer.refused}."),)
    lines = []
    for finding in answer.verdict.findings:
        if finding.advice or finding.outcome not in ("broken", "condition", "cannot_tell"):
            continue
        state = {"broken": "Not met", "condition": "To be done", "cannot_tell": "Not known yet"}[finding.outcome]
        lines.append(spelled(f"{state}: {titles.get(finding.rule, finding.rule.replace('_', ' '))}"))
    lines = list(dict.fromkeys(lines))
    if len(lines) > 12:
        lines = [*lines[:11], f"and {len(lines) - 11} more, which stand in the record."]
    if answer.document:
        lines.append(spelled(_DOCUMENTED.format(answer.document)))
    return tuple(lines)


def _proved(job: Job, answers: CircuitAnswers) -> tuple[str, ...]:
    mine = [entry for entry in job.isolation if entry.circuit == answers.circuit_id]
    proofs = [entry for entry in mine if entry.kind == "tester_proved_after"]
    lines = []
    if proofs:
        lines.append(f"The circuit was logged as switched off, locked and proved dead on {moment(proofs[-1].at)}.")
    else:
        lines.append("This record does not show that the circuit was switched off and proved dead.")
    out = outstanding(job, answers.circuit_id)
    if out:
        lines.append(f"{len(out)} conductors or links are not put back yet. The circuit must not be switched on.")
    taken = [r for r in job.standing() if r.circuit == answers.circuit_id and r.counts]
    after = [r for r in taken if r.stage == "after_work"]
    lines.append(f"{len(taken) - len(after)} readings were taken as it was found, {len(after)} after the work.")
    for proposal in answers.proposals:
        if proposal.request.abandoned_at is not None:
            lines.append("The work was given up and left as the record says.")
        elif proposal.request.work_done_at is None:
            lines.append("The work is not logged as done.")
        wrong = sum(held.agrees is False for held in proposal.held)
        if wrong:
            lines.append(
                f"{wrong} readings after the work are not what was worked out before it. They must be explained."
            )
        if proposal.request.work_done_at is not None and not proposal.left:
            lines.append("Every test that the work calls for was taken, and the circuit was handed over.")
        elif proposal.request.work_done_at is not None:
            lines.append("Not everything that finishes the work was logged; what remains stands in the record.")
    return tuple(lines)
