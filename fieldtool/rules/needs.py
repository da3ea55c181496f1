"""What a rule can ask for by name, and the sentence that says what is missing.

A need is ``supply.system`` (a question of the survey), ``read.pfc`` (a test at the board or of the circuit),
``read.zs@attach`` (a test at each place of a kind), ``rcd``, ``device`` or ``layout``.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

from fieldtool.answers import Missing
from fieldtool.job.kinds import TESTS, words

if TYPE_CHECKING:
    from fieldtool.rules.facts import Facts

__all__ = ["asked", "missing_for", "missing_test", "places_joined"]

_SURVEY_ORDER = ("site", "supply", "board", "circuit", "device", "rcd", "install", "route", "outlets", "request")


def missing_test(facts: Facts, test: str, place: str | None) -> Missing:
    """What to say of one reading that is missing, in the order a visit takes it."""
    spec = TESTS[test]  # type: ignore[index]
    where = {"board": "at the board", "circuit": ""}.get(spec.where, f"at {facts.name(place or '')}")
    if spec.where == "point" and place is None:
        where = ""
    return Missing(
        test,
        place or ("board" if spec.where == "board" else facts.circuit.id),
        f"{spec.words} {where}".strip(),
        200 + list(TESTS).index(spec.key),
    )


def missing_for(facts: Facts, need: str) -> tuple[Missing, ...]:
    """What is missing of one need; empty when it is known. ValueError for a need that nobody knows."""
    if need.startswith("read."):
        test, _, where = need.removeprefix("read.").partition("@")
        if not where:
            return () if facts.maybe(test) is not None else (missing_test(facts, test, None),)
        return tuple(
            missing_test(facts, test, place) for place in _PLACES[where](facts) if facts.maybe(test, place) is None
        )
    if need == "layout":
        if facts.found.known:
            return ()
        return facts.found.missing or (missing_test(facts, "r1_r2", None),)
    if need == "device":
        present = facts.edit.device if facts.edit is not None else facts.circuit.device
        return () if present is not None else (_gap(facts, "circuit", "device", "the circuit's device"),)
    if need == "rcd":
        covers = facts.edit.rcd_covers if facts.edit is not None else facts.circuit.rcd_covers
        found = facts.edit.rcd if facts.edit is not None else facts.circuit.rcd
        if covers is None or (covers == "some" and found is None):
            return (_gap(facts, "circuit", "rcd_covers", "whether an RCD covers it"),)
        return ()
    return _missing_survey(facts, need)


def _missing_survey(facts: Facts, need: str) -> tuple[Missing, ...]:
    root, _, field = need.partition(".")
    owners: dict[str, Any] = {
        "site": facts.job.site,
        "supply": facts.job.supply,
        "board": facts.board,
        "circuit": facts.circuit,
        "device": facts.edit.device if facts.edit is not None else facts.circuit.device,
        "install": facts.circuit.install,
        "route": facts.request.route if facts.request is not None else None,
        "request": facts.request,
    }
    if root == "outlets":
        return tuple(
            Missing("survey", outlet.id, f"{asked(outlet, field)} of {outlet.name}", 180, need)
            for outlet in facts.outlets
            if getattr(outlet, field) is None
        )
    if root not in owners:
        raise ValueError(f"no rule can ask for {need}")
    owner = owners[root]
    if owner is not None and getattr(owner, field) is not None:
        return ()
    label = asked(owner, field) if owner is not None else words(field)
    return (_gap(facts, root, field, label),)


def _gap(facts: Facts, root: str, field: str, label: str) -> Missing:
    order = 10 * _SURVEY_ORDER.index(root)
    place = "board" if root in ("site", "supply", "board") else facts.circuit.id
    return Missing("survey", place, label, order, f"{root}.{field}")


def asked(owner: Any, field: str) -> str:
    """The question a survey field asks, as its form shows it."""
    info = type(owner).model_fields[field]
    extra = info.json_schema_extra
    label = extra.get("ask") if isinstance(extra, dict) else None
    return str(label) if label else words(field)


def places_joined(facts: Facts) -> tuple[str, ...]:
    """The existing points that new cable joins; from the board, the point of the circuit furthest by resistance."""
    edit, nodes = facts.edit, facts.found.layout.nodes
    if edit is None:
        return ()
    joined = tuple(place for place in edit.attach if place in nodes)
    if joined or edit.own_circuit or not nodes:
        return joined
    return (max(nodes, key=lambda place: facts.base_r.get(place, 0.0)),)


def _end(facts: Facts) -> tuple[str, ...]:
    used = {run.a for run in facts.found.layout.runs}
    return tuple(node for node in facts.found.layout.nodes if node not in used)


def _every(facts: Facts) -> tuple[str, ...]:
    return facts.found.layout.nodes


_PLACES: dict[str, Callable[[Facts], tuple[str, ...]]] = {"attach": places_joined, "end": _end, "every": _every}
