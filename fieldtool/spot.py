"""The spot check: one addition checked now, from a few answers, with no job behind it.

Asks only what the answer needs, one question a line. It builds a job from the answers and puts it to the one
checker; what was not asked is assumed and named, so the best it ever says is "go ahead if".
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from datetime import datetime
from typing import Any

from fieldtool.answers import Missing, Verdict, WayAnswer
from fieldtool.job.circuit import Circuit, Install, Point
from fieldtool.job.job import Job
from fieldtool.job.place import Board, Bond, Device, OtherSource, Rcd, Site, Supply
from fieldtool.job.reading import Reading
from fieldtool.job.request import NewOutlet, Request, Route
from fieldtool.quantities.entry import Entry, EntryProblem, parse
from fieldtool.quantities.fields import field

__all__ = ["QUESTIONS", "Answers", "Question", "SpotProblem", "accept", "asked", "job_from", "judge_spot"]

UNKNOWN = "unknown"
"""The answer "do not know": it leads to "not enough yet", never to a default that passes."""

Answers = Mapping[str, "str | Entry"]


class SpotProblem(ValueError):
    """An answer that cannot be taken; says why in one sentence."""


@dataclass(frozen=True, slots=True)
class Question:
    """One question: choices answered by a digit, or a quantity answered by a number."""

    key: str
    words: str
    choices: tuple[tuple[str, str], ...] = ()
    quantity: str = ""
    when: Callable[[Answers], bool] = lambda _: True


def _ring(answers: Answers) -> bool:
    return answers.get("shape") == "ring"


def _radial(answers: Answers) -> bool:
    return answers.get("shape") == "radial"


def _new_cable(answers: Answers) -> bool:
    return answers.get("adding") != "single_to_twin"


QUESTIONS: tuple[Question, ...] = (
    Question(
        "adding",
        "adding",
        (
            ("spur_at_point", "unfused spur"),
            ("fused_spur", "fused spur"),
            ("radial_end", "radial longer"),
            ("single_to_twin", "twin for single"),
        ),
    ),
    Question("what", "what", (("twin", "one twin"), ("single", "one single"), ("appliance", "one appliance"))),
    Question("shape", "circuit", (("ring", "ring"), ("radial", "radial"))),
    Question(
        "device",
        "device",
        (
            ("bs60898_b:32", "B32"),
            ("bs60898_b:20", "B20"),
            ("bs60898_b:16", "B16"),
            ("bs60898_c:32", "C32"),
            ("bs60898_c:20", "C20"),
            ("bs3036:30", "30 A rewireable"),
        ),
    ),
    Question(
        "rcd",
        "RCD",
        (
            ("a", "30 mA type A, trips in time"),
            ("ac", "30 mA type AC, in time"),
            ("none", "none"),
            ("slow", "not in time"),
        ),
    ),
    Question("system", "earthing", (("tn_c_s", "TN-C-S"), ("tn_s", "TN-S"), ("tt", "TT"))),
    Question("cable", "cable now", (("ft_2_5", "2.5/1.5"), ("ft_4", "4/1.5"), ("ft_2_5_1_0", "2.5/1.0"))),
    Question("taken", "dead readings", (("proved_dead", "today, proved dead"), ("not_sure", "not sure"))),
    Question("r1", "r1, line end to end", quantity="low_ohm", when=_ring),
    Question("rn", "rn, neutral end to end", quantity="low_ohm", when=_ring),
    Question("r2", "r2, earth end to end", quantity="low_ohm", when=_ring),
    Question("ln_cross", "L-N crossed, at the point", quantity="low_ohm", when=_ring),
    Question("le_cross", "L-E crossed, at the point", quantity="low_ohm", when=_ring),
    Question("r1_r2", "R1+R2 at the point", quantity="low_ohm", when=_radial),
    Question("zs", "Zs at the point", quantity="loop_ohm"),
    Question("mode", "Zs taken with", (("high_current", "high current"), ("no_trip", "no-trip"))),
    Question("pfc", "fault current at the board", quantity="fault_a"),
    Question("breaking", "device breaks", (("6", "6 kA"), ("10", "10 kA"), ("3", "3 kA"))),
    Question("ir", "IR, all ways", quantity="insulation_ohm"),
    Question("polarity", "polarity", (("right", "right everywhere"), ("wrong", "wrong"))),
    Question(
        "earthing", "earth and bonds", (("seen", "seen, right size"), ("small", "undersized"), ("absent", "absent"))
    ),
    Question(
        "sources",
        "other sources",
        (("none", "none"), ("pv", "solar panels"), ("battery", "battery"), ("other", "other")),
    ),
    Question("metres", "metres of new cable", quantity="length_m", when=_new_cable),
    Question(
        "hidden",
        "new cable is",
        (
            ("in_zone", "in a safe zone"),
            ("surface", "on the surface"),
            ("deep", "over 50 mm deep"),
            ("off_zone", "off the zones"),
        ),
        when=_new_cable,
    ),
    Question(
        "where",
        "place",
        (("indoors", "ordinary room"), ("kitchen", "kitchen"), ("outdoors", "outdoors"), ("bathroom", "bathroom")),
    ),
    Question(
        "method",
        "cables lie",
        (
            ("c", "clipped, plaster"),
            ("100", "ceiling, to 100 mm"),
            ("101", "ceiling, over 100 mm"),
            ("102", "stud, touching"),
            ("103", "stud, not touching"),
        ),
    ),
    Question("spur_here", "spur here already", (("no", "no"), ("yes", "yes"))),
)
"""Every question in the order it is asked; ``when`` leaves out what the answer does not need."""


def asked(answers: Answers) -> tuple[Question, ...]:
    """The questions that these answers call for, in order."""
    return tuple(question for question in QUESTIONS if question.when(answers))


def accept(question: Question, typed: str) -> str | Entry:
    """One typed answer: a digit for a choice, a number for a quantity. Raises SpotProblem with one sentence."""
    if question.choices:
        if typed.isdecimal() and 1 <= int(typed) <= len(question.choices):
            return question.choices[int(typed) - 1][0]
        raise SpotProblem(f"{question.words}: type 1 to {len(question.choices)}, or + where you do not know.")
    entry = parse(field(question.quantity), typed)
    if isinstance(entry, EntryProblem):
        raise SpotProblem(entry.sentence)
    return entry


_STOOD_FOR = (
    "board, cut-out, heat and back-feed were not asked: taken as sound",
    "place on the ring not given: taken as mid ring, the worst",
    "readings at the other points were not entered",
    "Z at the board is worked out from the fault current, not read",
)


def _number(answers: Answers, key: str) -> Entry | None:
    found = answers.get(key)
    return found if isinstance(found, Entry) else None


def _choice(answers: Answers, key: str) -> str | None:
    found = answers.get(key)
    return found if isinstance(found, str) and found != UNKNOWN else None


def job_from(answers: Answers, now: datetime) -> Job:
    """The job that these answers stand for. What is not known stays not known."""
    device_key = _choice(answers, "device")
    breaking = _choice(answers, "breaking")
    device = None
    if device_key is not None:
        kind, _, rating = device_key.partition(":")
        device = Device(
            type=kind,
            in_a=float(rating),
            breaking_ka=float(breaking) if breaking is not None else None,
            energy_class=3 if kind.startswith("bs60898") else None,
            poles=1,
            bidirectional="yes",
            condition="good",
        )
    rcd_word = _choice(answers, "rcd")
    rcd = None
    if rcd_word in ("a", "ac", "slow"):
        rcd = Rcd(type="ac" if rcd_word == "ac" else "a", i_dn_ma=30.0, standard="61008", place="upstream")
    earth = _choice(answers, "earthing")
    source = _choice(answers, "sources")
    shape = _choice(answers, "shape")
    method: Any = _choice(answers, "method")
    supply = Supply(
        system=_choice(answers, "system"),  # type: ignore[arg-type]
        phases=1,
        cutout_condition="good",
        looped="no",
        earthing_conductor={None: None, "absent": "absent"}.get(earth, "sound"),
        earthing_conductor_mm2=16.0 if earth == "seen" else (6.0 if earth == "small" else None),
        supply_neutral_mm2=25.0 if earth in ("seen", "small") else None,
        bonding="seen" if earth is not None else None,
        bonds=()
        if earth is None
        else (
            Bond(
                part="water",
                size_mm2={"seen": 10.0, "small": 6.0}.get(earth),
                condition="absent" if earth == "absent" else "sound",
            ),
        ),
        sources=None if source is None else ("none" if source == "none" else "some"),
        other_sources=() if source in (None, "none") else (OtherSource(kind=source),),  # type: ignore[arg-type]
    )
    two = 2 if shape == "ring" else 1
    circuit = Circuit(
        id="c1",
        board="b1",
        name="circuit checked",
        label_claims=shape or "none",  # type: ignore[arg-type]
        device=device,
        rcd_covers=None if rcd_word is None else ("none" if rcd_word == "none" else "some"),
        rcd=rcd,
        cable=_choice(answers, "cable"),
        cable_condition="sound",
        install=Install(method=method, legs_together="no"),
        line_ends=two,
        neutral_ends=two,
        cpc_ends=two,
        terminal_room="yes",
        heat_seen="no",
        back_feed="none",
        other_circuits_in_boxes="no",
        load_has_dc="a",
    )
    single = _choice(answers, "adding") == "single_to_twin"
    spur_here = _choice(answers, "spur_here")
    point = Point(
        id="p1",
        circuit="c1",
        kind="single" if single else "twin",
        name="this point",
        walk_order=1,
        cables={"no": 2 if shape == "ring" else 1, "yes": 3}.get(spur_here or ""),
        box_depth_mm=35.0,
        condition="good",
        accessible="yes",
    )
    metres = _number(answers, "metres")
    outlet = NewOutlet(
        id="w1",
        kind=_choice(answers, "what") or "twin",  # type: ignore[arg-type]
        name="new outlet",
        metres=(metres.value or 0.0) if metres is not None else 0.0,
        where=_choice(answers, "where"),  # type: ignore[arg-type]
        load_has_dc="a",
        heating_or_cooking="no",
    )
    request = Request(
        id="q1",
        circuit="c1",
        attach="end" if _choice(answers, "adding") == "radial_end" else "point",
        at=None if single else "p1",
        outlets=() if single else (outlet,),
        swap="p1" if single else None,
        route=Route(
            cable="ft_2_5" if (_choice(answers, "cable") or "ft_2_5") != "ft_4" or shape == "ring" else "ft_4",
            method=method,
            hidden=_choice(answers, "hidden"),  # type: ignore[arg-type]
            metal_partition="no",
            cutting="checked",
        ),
        chosen_way=_choice(answers, "adding"),  # type: ignore[arg-type]
    )
    return Job(
        site=Site(name="spot check", premises="dwelling", nation="england", special_place="no", asbestos="no"),
        supply=supply,
        boards=(
            Board(
                id="b1",
                name="board",
                main_switch="all_poles",
                lockable="yes",
                conditional_rating_ka=16.0,
                condition="good",
                mixed_makes="no",
            ),
        ),
        circuits=(circuit,),
        points=(point,),
        requests=(request,),
        readings=_readings(answers, now),
    )


def _readings(answers: Answers, now: datetime) -> tuple[Reading, ...]:
    out: list[Reading] = []
    taken = _choice(answers, "taken")

    def add(test: str, entry: Entry | None, **more: Any) -> None:
        if entry is not None:
            out.append(
                Reading(
                    id=f"m{len(out) + 1}",
                    test=test,  # type: ignore[arg-type]
                    value=entry.value,
                    sign=entry.sign,
                    raw=entry.raw,
                    at=now,
                    **more,
                )
            )

    dead = {"circuit": "c1", "needs_taken": True, "taken": "proved_dead" if taken == "proved_dead" else "not_sure"}
    for test in ("r1", "rn", "r2"):
        add(test, _number(answers, test), **dead)
    for test in ("ln_cross", "le_cross", "r1_r2"):
        add(test, _number(answers, test), point="p1", **dead)
    for test in ("ir_ln", "ir_le", "ir_ne"):
        add(test, _number(answers, "ir"), **dead)
    add("zs", _number(answers, "zs"), circuit="c1", point="p1", mode=_choice(answers, "mode"))
    pfc = _number(answers, "pfc")
    add("pfc", pfc, board="b1")
    if pfc is not None and pfc.value:
        out.append(
            Reading(
                id=f"m{len(out) + 1}", test="ze", board="b1", value=round(230.0 / pfc.value, 3), at=now,
                origin="calculated", mode="calculated",
            )
        )  # fmt: skip
    polarity = _choice(answers, "polarity")
    if polarity is not None:
        out.append(Reading(id=f"m{len(out) + 1}", test="polarity", circuit="c1", answer=polarity, at=now))  # type: ignore[arg-type]
    rcd = _choice(answers, "rcd")
    if rcd in ("a", "ac", "slow"):
        value = 301.0 if rcd == "slow" else 300.0
        out.append(
            Reading(
                id=f"m{len(out) + 1}",
                test="rcd_ms",
                circuit="c1",
                value=value,
                sign=">" if rcd == "slow" else "<",
                at=now,
            )
        )
    return tuple(out)


def judge_spot(answers: Answers, now: datetime) -> tuple[WayAnswer, Job]:
    """The chosen way's answer and the job behind it. Never "go ahead": at best on conditions, assumptions named."""
    from fieldtool.diagnosis.explain import explain
    from fieldtool.verdict.compare import judge
    from fieldtool.ways.way import every_way

    job = job_from(answers, now)
    request = job.requests[0]
    chosen = request.chosen_way or "spur_at_point"
    way = next(item for item in every_way() if item.key == chosen)
    answer = judge(job, request, way, explain(job, "c1"))
    if answer.verdict is None:
        return answer, job
    verdict = _named(answer.verdict, answers)
    return replace(answer, verdict=verdict), job


def _named(verdict: Verdict, answers: Answers) -> Verdict:
    """The verdict with its assumptions named; anything asked and not known keeps it from being more than "not yet"."""
    unknown = tuple(
        Missing("survey", "board", question.words, number, f"spot.{question.key}")
        for number, question in enumerate(asked(answers))
        if answers.get(question.key, UNKNOWN) == UNKNOWN
    )
    conditions = (*verdict.conditions, *(f"Prove: {line}." for line in _STOOD_FOR))
    outcome = "conditions" if verdict.outcome == "go" else verdict.outcome
    if unknown and outcome == "conditions":
        outcome = "more"
    return replace(
        verdict,
        outcome=outcome,
        conditions=tuple(dict.fromkeys(conditions)),
        missing=(*verdict.missing, *unknown) if outcome == "more" else verdict.missing,
        assumed=tuple(dict.fromkeys((*verdict.assumed, *_STOOD_FOR))),
    )
