"""The sole judge: every rule on one circuit as edited, designers' decisions applied, and one word at the end."""

from __future__ import annotations

from dataclasses import replace

from fieldtool.answers import CircuitReading, Finding, Missing, Verdict, VerdictWord, worst_first
from fieldtool.job.job import Job
from fieldtool.job.request import Request
from fieldtool.network.as_found import AsFound, as_found
from fieldtool.reference.edition import RULE_SET
from fieldtool.rules.engine import run
from fieldtool.rules.facts import Facts
from fieldtool.ways.way import Edit, Refusal, Setting, Way

__all__ = [
    "check",
    "decide",
    "edited",
    "existing_facts",
    "figures_of",
    "found_for",
    "readings_to_judge_under",
    "verdict_of",
]


MOST_JUDGED = 3
"""How many explanations a way is judged under."""


def decide(findings: tuple[Finding, ...]) -> VerdictWord:
    """One word for a set of findings. Advice never counts; a stop outweighs what is missing, that a condition."""
    counted = {finding.outcome for finding in findings if not finding.advice}
    if "broken" in counted:
        return "stop"
    if "cannot_tell" in counted:
        return "more"
    return "conditions" if "condition" in counted else "go"


def figures_of(findings: tuple[Finding, ...]) -> str:
    """A digest of every finding's figures: two verdicts with the same digest were judged on the same values."""
    return "-".join(sorted({finding.figures for finding in findings if finding.figures}))[:190]


def check(facts: Facts) -> Verdict:
    """Every rule's findings for one circuit as edited, and the verdict they make.

    The existing circuit, a proposal, every way of adding, an override and the after-work prediction all come
    through here; there is no other judge.
    """
    return verdict_of(facts, run(facts))


def verdict_of(facts: Facts, found: tuple[Finding, ...]) -> Verdict:
    """The verdict that the catalogue's answers make; ``found`` is what ``engine.run`` gave for these facts."""
    findings = _with_overrides(found, facts.job, facts.request)
    missing: dict[tuple[str, str, str], Missing] = {}
    for finding in findings:
        if finding.outcome == "cannot_tell" and not finding.advice:
            for gap in finding.missing:
                missing.setdefault((gap.test, gap.place, gap.field), gap)
    return Verdict(
        outcome=decide(findings),
        findings=findings,
        conditions=_conditions(findings, facts.edit),
        missing=tuple(sorted(missing.values(), key=lambda gap: (gap.order, gap.place, gap.words))),
        assumed=tuple(dict.fromkeys(line for finding in findings for line in finding.assumed)),
        figures=figures_of(findings),
    )


def _conditions(findings: tuple[Finding, ...], edit: Edit | None) -> tuple[str, ...]:
    """What to do under each condition; conditions that one action settles are said once."""
    said: dict[str, str] = {}
    for finding in findings:
        if finding.outcome == "condition" and not finding.advice:
            said.setdefault(finding.merge_key or finding.do or finding.says, finding.do or finding.says)
    if edit is not None and said:
        for line in edit.conditions:
            said.setdefault(line, line)
    return tuple(dict.fromkeys(said.values()))


def _with_overrides(findings: tuple[Finding, ...], job: Job, request: Request | None) -> tuple[Finding, ...]:
    """A designer's recorded decision turns a stop into a condition, while its figures still stand."""
    if request is None or not job.overrides:
        return findings
    out: list[Finding] = []
    for finding in findings:
        made = next(
            (
                item
                for item in reversed(job.overrides)
                if (item.request, item.rule, item.place) == (request.id, finding.rule, finding.place)
            ),
            None,
        )
        if made is None or finding.outcome != "broken":
            out.append(finding)
            continue
        who = next((person.name for person in job.people if person.id == made.by), made.by)
        current = made.figures == finding.figures and made.rule_set == RULE_SET
        if finding.designer_may_decide and current:
            out.append(
                replace(
                    finding,
                    outcome="condition",
                    overridden_by=f"{who}: {made.reason}",
                    do=f"Designer's decision by {who} stands on the record: {made.reason}",
                )
            )
            continue
        out.append(finding)
        why = "the figures changed" if finding.designer_may_decide else "the standard leaves no choice here"
        out.append(
            Finding(
                rule="decision_out_of_date",
                outcome="condition",
                clause="120.3",
                place=finding.place,
                says=f"A designer's decision on {finding.rule.replace('_', ' ')} no longer applies: {why}"[:74],
                do="Decide again on the figures as they are, or take the decision out.",
            )
        )
    return worst_first(tuple(out))


def readings_to_judge_under(reading: CircuitReading | None) -> tuple[CircuitReading | None, ...]:
    """The explanations to judge under: the leading one, and the best of every other class that still stands.

    A sound ring with the same spurs is no other circuit, so it is not judged twice.
    """
    if reading is None or reading.leading is None:
        return (reading,)
    out: list[CircuitReading | None] = [reading]
    first = reading.leading
    groups = {first.group}
    for item in reading.explanations[1:]:
        if item.group in groups or not item.stands or len(out) >= MOST_JUDGED:
            continue
        groups.add(item.group)
        if item.healthy and first.healthy and item.inferred == first.inferred:
            continue
        rest = tuple(other for other in reading.explanations if other is not item)
        nothing = item.id == "nothing_fits"
        out.append(replace(reading, explanations=(item, *rest), nothing_fits=nothing))
    return tuple(out)


def found_for(job: Job, circuit_id: str, reading: CircuitReading | None, request: Request | None = None) -> AsFound:
    """The circuit as found, with the places that a request touches at mid-ring where they are not known."""
    worst = [place for place in ((request.at, request.other, request.swap) if request is not None else ()) if place]
    return as_found(job, circuit_id, reading=reading, worst_at=worst)


def existing_facts(job: Job, circuit_id: str, reading: CircuitReading | None = None) -> Facts:
    """The facts of a circuit as it stands, with nothing added."""
    return Facts(job, circuit_id, found_for(job, circuit_id, reading), reading=reading)


def edited(
    job: Job,
    request: Request,
    way: Way,
    found: AsFound,
    *,
    reading: CircuitReading | None = None,
    metres: float | None = None,
) -> Facts | Refusal:
    """The facts of a circuit as one way would leave it, or why that way does not serve."""
    setting = Setting(job, job.circuit(request.circuit), request, found, metres)
    edit = way.apply(setting)
    if isinstance(edit, Refusal):
        return edit
    return Facts(job, request.circuit, found, edit=edit, request=request, way=way.key, reading=reading)
