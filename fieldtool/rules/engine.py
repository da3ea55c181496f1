"""The catalogue of rules and the one place that says "cannot tell yet".

A rule declares what it needs and what it may assume. The engine asks for every need first and answers "cannot
tell yet" itself, naming what is missing; the rule's body never sees an unknown.
"""

from __future__ import annotations

import hashlib
import importlib
import pkgutil
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from functools import cache
from typing import TYPE_CHECKING

from fieldtool.answers import Finding, Missing, worst_first

if TYPE_CHECKING:
    from fieldtool.rules.facts import Facts

__all__ = ["CATALOGUE", "NotKnown", "Rule", "catalogue", "rule", "run", "run_rule"]


class NotKnown(Exception):
    """Raised by the facts when a rule reaches for something that was not read or seen yet."""

    def __init__(self, *missing: Missing) -> None:
        super().__init__(", ".join(item.words for item in missing))
        self.missing = missing


Body = Callable[["Facts"], Iterable[Finding]]
Applies = Callable[["Facts"], bool]


@dataclass(frozen=True, slots=True)
class Rule:
    """One rule: a permanent id in plain words, its regulation, one paraphrase, and what it needs and assumes."""

    id: str
    clause: str
    title: str
    needs: tuple[str, ...]
    assumes: tuple[str, ...]
    designer_may_decide: bool
    family: str
    advice: bool
    applies: Applies
    body: Body


CATALOGUE: dict[str, Rule] = {}
"""Every rule that has been imported, by id; ask ``catalogue`` for the whole list."""


def _always(facts: Facts) -> bool:  # noqa: ARG001 - the shape of an Applies
    return True


def rule(
    rule_id: str,
    clause: str,
    title: str,
    *,
    needs: Iterable[str] = (),
    assumes: Iterable[str] = (),
    designer_may_decide: bool = False,
    advice: bool = False,
    applies: Applies = _always,
) -> Callable[[Body], Body]:
    """Register a rule's body. ValueError when its id is taken or it lacks a clause or a paraphrase."""

    def register(body: Body) -> Body:
        if rule_id in CATALOGUE:
            raise ValueError(f"the rule {rule_id} is registered twice")
        if not clause or not title:
            raise ValueError(f"the rule {rule_id} needs a clause and a paraphrase")
        family = body.__module__.rsplit(".", 1)[-1]
        CATALOGUE[rule_id] = Rule(
            rule_id, clause, title, tuple(needs), tuple(assumes), designer_may_decide, family, advice, applies, body
        )
        return body

    return register


@cache
def catalogue() -> tuple[Rule, ...]:
    """Every rule in the package, in order of its id. A new rule is one new function."""
    package = importlib.import_module("fieldtool.rules")
    for module in pkgutil.iter_modules(package.__path__):
        importlib.import_module(f"fieldtool.rules.{module.name}")
    return tuple(CATALOGUE[key] for key in sorted(CATALOGUE))


def run(facts: Facts) -> tuple[Finding, ...]:
    """Every rule's answers for one circuit as edited, worst first."""
    found: list[Finding] = []
    for item in catalogue():
        found.extend(run_rule(item, facts))
    return worst_first(tuple(found))


def run_rule(item: Rule, facts: Facts) -> tuple[Finding, ...]:
    """One rule's answers: "does not apply", "cannot tell yet" with what is missing, or what its body finds."""
    try:
        if not item.applies(facts):
            return (_bare(item, facts, "not_applicable", "does not apply here"),)
        missing = tuple(gap for need in item.needs for gap in facts.missing(need))
        if missing:
            return (_cannot_tell(item, facts, missing),)
        return tuple(
            replace(
                finding,
                rule=item.id,
                clause=finding.clause or item.clause,
                designer_may_decide=item.designer_may_decide or finding.designer_may_decide,
                advice=finding.advice or item.advice,
                figures=_digest(item.id, finding),
            )
            for finding in item.body(facts)
        ) or (_bare(item, facts, "not_applicable", "nothing here that it speaks of"),)
    except NotKnown as gap:
        return (_cannot_tell(item, facts, gap.missing),)


def _digest(rule_id: str, finding: Finding) -> str:
    """A short digest of a finding's figures: a designer's decision is bound to it."""
    text = f"{rule_id}|{finding.place}|{finding.outcome}|{finding.measured!r}|{finding.limit!r}|{finding.says}"
    return hashlib.sha1(text.encode(), usedforsecurity=False).hexdigest()[:10]


def _bare(item: Rule, facts: Facts, outcome: str, says: str) -> Finding:
    return Finding(item.id, outcome, item.clause, facts.circuit.id, says)  # type: ignore[arg-type]


def _cannot_tell(item: Rule, facts: Facts, missing: tuple[Missing, ...]) -> Finding:
    unique = tuple(dict.fromkeys(missing))
    names = ", ".join(gap.words for gap in unique)
    return Finding(
        rule=item.id,
        outcome="cannot_tell",
        clause=item.clause,
        place=unique[0].place if unique else facts.circuit.id,
        says=f"not known yet: {names}",
        do=f"Take or see: {names}.",
        missing=unique,
        designer_may_decide=False,
        advice=item.advice,
    )
