"""How far a way reaches: metres of new cable before each limit that grows with length is met.

Metres exist only for limits whose growth is ``rises``. The search asks the one checker's own rules at other lengths,
so a metre shown here and a verdict can never disagree.
"""

from __future__ import annotations

from collections.abc import Callable
from math import inf

from fieldtool.answers import Finding, Headroom
from fieldtool.quantities.show import round_headroom_down_m
from fieldtool.rules.engine import catalogue, run_rule
from fieldtool.rules.facts import Facts
from fieldtool.ways.way import Refusal

__all__ = ["FAR_M", "governing", "headroom"]

FAR_M = 500.0
"""Beyond this many metres a limit is taken not to bite [m]."""

FactsAt = Callable[[float], Facts | Refusal]


def headroom(facts: Facts, at_metres: FactsAt, findings: tuple[Finding, ...]) -> tuple[Headroom, ...]:
    """Metres left for each limit that rises with the first new run, tightest first.

    ``at_metres`` gives the facts with that many metres of new cable [m]. Metres are of cable beyond what is asked
    for; a limit already over gives 0. Rounded down to half a metre.
    """
    if not facts.new_runs:
        return ()
    asked = facts.new_runs[0].length_m or 0.0
    keys = _keys(findings)
    judged = {f.rule for f in findings if f.limit_key in keys}
    rules = [rule for rule in catalogue() if rule.id in judged]
    seen: dict[float, list[Finding]] = {asked: [f for f in findings if f.limit_key in keys]}

    def at(metres: float) -> list[Finding]:
        if metres not in seen:
            there = at_metres(metres)
            seen[metres] = [] if isinstance(there, Refusal) else [f for rule in rules for f in run_rule(rule, there)]
        return seen[metres]

    hung = facts.edit is not None and facts.edit.hung
    out = [_room(key, at, asked, hung) for key in keys]
    return tuple(sorted(out, key=lambda h: (h.metres is None, h.metres or 0.0, h.limit_key)))


def governing(rooms: tuple[Headroom, ...]) -> str:
    """The limit that stops it first; empty where none grows with length."""
    return next((room.limit_key for room in rooms if room.metres is not None), "")


def _keys(findings: tuple[Finding, ...]) -> tuple[str, ...]:
    return tuple(
        dict.fromkeys(
            f.limit_key
            for f in findings
            if f.limit_key and f.limit is not None and f.basis is not None and f.basis.growth == "rises"
        )
    )


At = Callable[[float], list[Finding]]


def _room(key: str, at: At, asked: float, hung: bool) -> Headroom:
    def margin(clear: bool) -> Callable[[float], float]:
        def worst(metres: float) -> float:
            """How far the worst place is over its limit; below zero while all are within."""
            over = [
                (f.measured or 0.0) + (f.tol if clear else 0.0) - f.limit
                for f in at(metres)
                if f.limit_key == key and f.limit is not None
            ]
            return max(over, default=inf)

        return worst

    plain, clear = (_reach(margin(which), asked, hung) for which in (False, True))
    now = [f for f in at(asked) if f.limit_key == key and f.limit]
    tight = max(now, key=lambda f: (f.measured or 0.0) / (f.limit or 1.0))
    return Headroom(
        limit_key=key,
        place=tight.place,
        metres=None if plain is None else round_headroom_down_m(plain),
        metres_clear=None if clear is None else round_headroom_down_m(clear),
        spare=(tight.limit or 0.0) - (tight.measured or 0.0),
        unit=tight.unit,
        why="" if plain is not None else f"does not bite within {FAR_M:.0f} m",
    )


def _reach(worst: Callable[[float], float], asked: float, hung: bool) -> float | None:
    """Metres beyond those asked until the first place meets its limit [m]; None where none does within FAR_M.

    By false position (the Illinois form) on the worst place's margin, which rises with length: a place on hung
    cable rises in a straight line, a lengthened ring in a shallow curve.
    """
    low, at_low = 0.0, worst(asked)
    if at_low > 0:
        return 0.0
    high = _STEP_M if hung else FAR_M
    at_high = worst(asked + high)
    while at_high <= 0:
        if high >= FAR_M:
            return None
        low, at_low = high, at_high
        high = min(FAR_M, high * 8)
        at_high = worst(asked + high)
    while high - low > _CLOSE_M:
        here = high - at_high * (high - low) / (at_high - at_low)
        here = min(max(here, low + _CLOSE_M / 2), high - _CLOSE_M / 2)
        at_here = worst(asked + here)
        if at_here > 0:
            high, at_high, at_low = here, at_here, at_low / 2
        else:
            low, at_low, at_high = here, at_here, at_high / 2
    return low


_STEP_M = 16.0
"""First step of the search along hung cable [m]."""

_CLOSE_M = 0.01
"""How near the search comes to the limit [m]; what is shown is rounded down to half a metre."""
