"""Several additions to one circuit: each is judged against what the others ask for, never as if it were alone."""

from __future__ import annotations

from collections.abc import Iterable

from fieldtool.answers import Finding
from fieldtool.job.request import Request
from fieldtool.rules.engine import rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.say import breaks, on_condition


def _others(facts: Facts) -> list[Request]:
    """The circuit's other additions that were asked for or made, and not given up."""
    mine = facts.request
    return [
        item
        for item in facts.job.requests
        if mine is not None
        and item.circuit == mine.circuit
        and item.id != mine.id
        and item.abandoned_at is None
        and (item.outlets or item.swap)
    ]


def _places(request: Request) -> set[str]:
    named = {place for place in (request.at, request.other, request.swap) if place is not None}
    return named or ({"board"} if request.attach == "board" else set())


@rule(
    "additions_judged_together",
    "132.16",
    "One addition to a circuit at a time, or all of them in one request.",
    applies=lambda facts: facts.edit is not None and facts.edit.role != "none" and bool(_others(facts)),
)
def additions_judged_together(facts: Facts) -> Iterable[Finding]:
    """Two additions at one place would each pass alone: two spurs on one point, one share of the headroom used twice.

    Our own reading of 132.16: the installation is adequate for everything that is added, not for each thing alone.
    """
    assert facts.request is not None
    mine = _places(facts.request)
    for other in _others(facts):
        shared = sorted(mine & _places(other))
        if shared:
            name = facts.name(shared[0]) if shared[0] != "board" else "the board"
            do = "Put both in one request, so that they are judged as one; or give one up."
            yield breaks(shared[0], f"Another addition starts at {name} too.", do)
        else:
            made = other.work_done_at is not None
            do = (
                "Add what was made to the circuit's points and read again." if made else "Judge again once one is made."
            )
            yield on_condition(facts.circuit.id, "Another addition to this circuit is not counted here.", do)
