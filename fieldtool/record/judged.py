"""What the core says of a circuit: what it is, what was asked for, the verdict with its working, every way compared."""

from __future__ import annotations

from collections.abc import Iterator
from math import floor, isfinite

from fieldtool.answers import VERDICT_WORDS, CircuitReading, Finding, Verdict, WayAnswer
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS, words
from fieldtool.job.request import Request
from fieldtool.record.blocks import Block, Grid, Points, Words
from fieldtool.record.gathered import CircuitAnswers, Proposal
from fieldtool.record.say import amount, answers_of, moment, outcome_words, person, place
from fieldtool.reference.edition import RULE_SET

__all__ = [
    "asked_for",
    "foretold",
    "material",
    "overrides",
    "reading_says",
    "stands",
    "verdict_reached",
    "ways_compared",
]

_ODDS = {"almost_certainly": "almost certainly", "probably": "probably", "could_be": "could be"}


def reading_says(job: Job, reading: CircuitReading, circuit_id: str) -> Iterator[Block]:
    """What the readings say the circuit is: every explanation that still stands, its reasoning, what would settle it."""
    yield Words(reading.sentence, "strong")
    for item in reading.explanations:
        yield Words(f"{_ODDS[item.odds]}: {item.sentence}")
        lines = list(item.reasoning)
        for one in item.inferred:
            band = f"between {_rough(one.low, one.unit)} and {_rough(one.high, one.unit)}"
            what = words(one.what.removesuffix(f"_{one.unit}"))
            lines.append(f"{what} at {place(job, one.place, circuit_id)}: about {_rough(one.value, one.unit)}, {band}")
        if lines:
            yield Points(tuple(lines))
    if reading.settle is not None:
        yield Words(f"What would settle it: {reading.settle.sentence}")
    if reading.smallest_spur_m is not None:
        yield Words(
            f"The smallest spur these readings can show: {amount(round(reading.smallest_spur_m, 1), 'm')}.", "small"
        )


def _rough(value: float | None, unit: str) -> str:
    """A value that was inferred or is left over: no finer than it can be known, rounded down."""
    if value is None or not isfinite(value):
        return amount(value, unit)
    step = {"m": 10, "ohm": 100, "V": 10, "A": 10}.get(unit, 1000)
    return amount(floor(value * step + 1e-9) / step, unit)


def asked_for(job: Job, request: Request) -> Iterator[Block]:
    """What was asked for: where, which outlets, by which route, with which cures, and when the work was done."""
    where = {
        "point": f"from {job.point_name(request.at or request.swap)}",
        "between": f"between {job.point_name(request.at)} and {job.point_name(request.other)}",
        "board": "from the board",
        "end": f"from the last point{f', {job.point_name(request.at)}' if request.at else ''}",
    }[request.attach]
    rows = [("where", where)]
    if request.swap is not None:
        rows.append(("swapped for a twin", job.point_name(request.swap)))
    for outlet in request.outlets:
        said = f"{words(outlet.kind)}, {outlet.metres:g} m of cable to it"
        said += f", load {outlet.load_a:g} A" if outlet.load_a is not None else ""
        said += f", {outlet.where}" if outlet.where is not None else ", place not known"
        rows.append((outlet.name or outlet.id, said))
    if request.back_metres is not None:
        rows.append(("back to the ring", f"{request.back_metres:g} m"))
    rows += answers_of(request.route)
    if request.fuse_a is not None:
        rows.append(("fuse in the unit", f"{request.fuse_a:g} A"))
    rows += [("part of the work", words(cure)) for cure in request.cures]
    rows += [(words(choice.key), words(choice.value)) for choice in request.choices]
    rows.append(("way chosen", words(request.chosen_way) if request.chosen_way else "none yet"))
    for label, at in (
        ("work begun", request.work_begun_at),
        ("work done", request.work_done_at),
        ("given up", request.abandoned_at),
    ):
        if at is not None:
            rows.append((label, moment(at)))
    yield Grid((), tuple(rows), (2.0, 5.0))
    if request.note:
        yield Words(f"Note: {request.note}")


def stands(verdict: Verdict, job: Job, circuit_id: str, *, whole: bool) -> Iterator[Block]:
    """The circuit as it stands; every finding where nothing is proposed, else only what does not simply hold."""
    said = {
        "go": "As it stands: nothing was found against it.",
        "conditions": "As it stands: could be added to, on conditions.",
        "stop": "As it stands: not to be added to.",
        "more": "As it stands: not known enough yet.",
    }[verdict.outcome]
    yield Words(said, "strong")
    if whole:
        yield from _findings(verdict, job, circuit_id)
        return
    lines = tuple(
        f"{outcome_words(f.outcome)}: {f.says} ({f.clause})"
        for f in verdict.findings
        if f.outcome in ("broken", "condition", "cannot_tell")
    )
    if lines:
        yield Points(lines)


def verdict_reached(job: Job, proposal: Proposal) -> Iterator[Block]:
    """The verdict on the way that is proposed, its margins, and every finding with its working."""
    answer = proposal.proposed
    how = "chosen" if proposal.chosen else "the best of the ways compared; nobody has chosen yet"
    yield Words(f"{VERDICT_WORDS[answer.outcome]}: {answer.words} ({how})", "strong")
    verdict = answer.verdict
    if verdict is None:
        yield Words(f"This way does not serve here: {answer.refused}.")
        return
    if verdict.conditions:
        yield Words("Conditions, each to be done before energising", "under")
        yield Points(verdict.conditions)
    if verdict.missing:
        yield Words("Still to be read or seen, in this order", "under")
        yield Points(tuple(gap.words for gap in verdict.missing))
    rooms = [room for room in verdict.headroom if room.metres is not None or room.why]
    if rooms:
        yield Words("How much further the cable could go", "under")
        rows = tuple(
            (
                words(room.limit_key),
                place(job, room.place, proposal.request.circuit),
                f"{room.metres:g} m" if room.metres is not None else room.why,
                f"{room.metres_clear:g} m" if room.metres_clear is not None else "–",
                _rough(room.spare, room.unit),
            )
            for room in rooms
        )
        head = ("limit", "at", "as the readings stand", "clear of the meters", "left of the limit")
        yield Grid(head, rows, (2.0, 2.5, 2.2, 2.2, 2.2))
    if verdict.assumed:
        yield Words("Assumed, where it was not known", "under")
        yield Points(verdict.assumed)
    yield Words("Every finding, the worst first, with its working", "under")
    yield from _findings(verdict, job, proposal.request.circuit)
    yield from _kept(job, proposal.request)


def _findings(verdict: Verdict, job: Job, circuit_id: str) -> Iterator[Block]:
    counted = [f for f in verdict.findings if f.outcome != "not_applicable"]
    rows = tuple((outcome_words(f.outcome), _rule(job, f, circuit_id), _working(f), f.clause) for f in counted)
    yield Grid(("answer", "rule, place", "what it says, and the working", "regulation"), rows, (1.6, 2.8, 7.2, 1.6))
    others = sorted({words(f.rule) for f in verdict.findings if f.outcome == "not_applicable"})
    if others:
        yield Words(f"Rules that do not apply here: {', '.join(others)}.", "small")


def _rule(job: Job, finding: Finding, circuit_id: str) -> str:
    where = "the new cable's route" if finding.place == "route" else place(job, finding.place, circuit_id)
    return f"{words(finding.rule)}{' (advice)' if finding.advice else ''}\n{where}"


def _working(finding: Finding) -> str:
    lines = [finding.says, *finding.working]
    if finding.measured is not None and finding.limit is not None and not finding.working:
        lines.append(f"{amount(finding.measured, finding.unit)} against {amount(finding.limit, finding.unit)}")
    if finding.basis is not None and not any("limit " in line for line in finding.working):
        basis = finding.basis
        lines.append(f"limit {amount(basis.value, basis.unit)}: {basis.basis} ({basis.table})")
    if finding.do:
        lines.append(f"To do: {finding.do}")
    lines += [f"Assumed: {item}" for item in finding.assumed]
    if finding.overridden_by:
        lines.append(f"Decided by a designer, {finding.overridden_by}")
    return "\n".join(lines)


def _kept(job: Job, request: Request) -> Iterator[Block]:
    kept = [row for row in job.verdicts if row.request == request.id]
    if not kept:
        return
    yield Words("Verdicts kept earlier", "under")
    rows = tuple(
        (
            moment(row.at),
            words(row.why),
            f"{VERDICT_WORDS.get(row.outcome, row.outcome)}: {words(row.way)}",  # type: ignore[call-overload]
            f"{row.edition}, rules {row.rule_set}",
            row.note,
        )
        for row in kept
    )
    yield Grid(("when", "why", "verdict", "judged by", "note"), rows, (2.2, 1.6, 3.6, 3.6, 2.0))


def ways_compared(proposal: Proposal) -> Iterator[Block]:
    """Every way for the request side by side, best first; those that are not about this circuit by name only."""
    about = [answer for answer in proposal.ways if answer.applies]
    rows = tuple(_way(answer, chosen=answer is proposal.proposed) for answer in about)
    head = ("way", "verdict", "what stops it, or first", "more cable", "material", "document")
    yield Grid(head, rows, (2.4, 1.6, 3.6, 1.6, 3.2, 2.2))
    others = [f"{answer.words} ({answer.refused})" for answer in proposal.ways if not answer.applies]
    if others:
        yield Words(f"Not ways for this request: {'; '.join(others)}.", "small")


def _way(answer: WayAnswer, *, chosen: bool) -> tuple[str, ...]:
    verdict = answer.verdict
    first, room = answer.stopped_by or answer.refused, "–"
    if verdict is not None:
        if not first and verdict.conditions:
            first = verdict.conditions[0]
        if not first and verdict.governing:
            first = f"limited first by {words(verdict.governing)}"
        metres = [item.metres for item in verdict.headroom if item.metres is not None]
        room = f"{min(metres):g} m" if metres else "–"
    stuff = ", ".join(_item(item.what, item.amount, item.unit) for item in answer.material)
    name = f"{answer.words}{' – proposed' if chosen else ''}"
    return (name, VERDICT_WORDS[answer.outcome], first or "–", room, stuff or "–", answer.document or "–")


def _item(what: str, count: float, unit: str) -> str:
    return f"{what} {count:g} {unit}".strip() if unit else f"{count:g} × {what}"


def overrides(job: Job, answers: CircuitAnswers) -> Iterator[Block]:
    """Every designer's decision on this circuit, with its reason, and whether it still stands."""
    asked = {item.request.id: item for item in answers.proposals}
    for made in job.overrides:
        if made.request not in asked:
            continue
        verdict = asked[made.request].proposed.verdict
        stand = verdict is not None and any(
            f.overridden_by and (f.rule, f.place) == (made.rule, made.place) for f in verdict.findings
        )
        state = "stands" if stand else f"does not stand on the figures as they are now (rules {RULE_SET})"
        where = place(job, made.place, answers.circuit_id)
        yield Words(
            f"{words(made.rule)} at {where}: decided by {person(job, made.by)}, {moment(made.at)}; {state}.", "strong"
        )
        yield Words(f"Reason: {made.reason}{f' Note: {made.note}' if made.note else ''}")


def foretold(job: Job, proposal: Proposal) -> Iterator[Block]:
    """Each reading to expect after the work, its band, and what was read."""
    rows = []
    for held in proposal.held:
        item = held.prediction
        read = "not taken yet" if held.agrees is None else amount(held.measured, item.unit)
        if held.agrees is False and held.measured is None:
            read = "open"
        says = {None: "–", True: "as foretold", False: "not as foretold: " + "; or ".join(held.reasons)}[held.agrees]
        rows.append(
            (
                TESTS[item.test].words,  # type: ignore[index]
                place(job, item.place, proposal.request.circuit),
                amount(item.value, item.unit),
                f"{amount(item.low, item.unit)} to {amount(item.high, item.unit)}",
                read,
                says,
            )
        )
    if rows:
        head = ("test", "at", "to expect", "within", "read after the work", "")
        yield Grid(head, tuple(rows), (2.0, 2.6, 1.6, 2.6, 2.2, 3.2))
    else:
        yield Words("Nothing can be foretold on the figures as they are.")


def material(answer: WayAnswer) -> Iterator[Block]:
    """What to fetch, which tests follow, which document the work needs."""
    if answer.material:
        yield Points(tuple(_item(item.what, item.amount, item.unit) for item in answer.material))
    else:
        yield Words("No material.")
    if answer.repeat_tests:
        named = ", ".join(TESTS[test].words for test in answer.repeat_tests)  # type: ignore[index]
        yield Words(f"Tests to take after the work: {named}.")
    if answer.document:
        yield Words(f"Document: {answer.document}.")
