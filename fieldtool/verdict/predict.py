"""What each test must read after the work, worked out before it, and what a mismatch most likely means."""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite

from fieldtool.answers import Prediction
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.network.arrangements import all_readings, crossed_right, end_to_end
from fieldtool.network.layout import BOARD
from fieldtool.quantities.show import round_prediction_up
from fieldtool.rules.engine import NotKnown
from fieldtool.rules.facts import Facts
from fieldtool.rules.tolerance import tolerance

__all__ = ["Held", "held_against", "predict"]

_CONTACT_OHM = 0.03
"""Scatter of clips and contacts between two readings of one thing [ohm]; common practice."""


@dataclass(frozen=True, slots=True)
class Held:
    """A reading taken after the work, held against its prediction."""

    prediction: Prediction
    measured: float | None
    agrees: bool | None
    reasons: tuple[str, ...] = ()


def predict(facts: Facts) -> tuple[Prediction, ...]:
    """The readings to expect after the work, in the order they are taken; empty where the network is not known.

    Values are at the temperature of the readings they come from, rounded up to the meter's hundredths [ohm]. The
    band is the meter's tolerance plus contact scatter.
    """
    edit = facts.edit
    if edit is None or edit.role in ("none",):
        return ()
    out: list[Prediction] = []
    if edit.shape == "ring" and edit.disturbs_ring and facts.found.known:
        ends = end_to_end(facts.layout)
        for test, value in zip(("r1", "rn", "r2"), (ends.line, ends.neutral, ends.cpc), strict=True):
            if isfinite(value):
                out.append(_made(facts, test, facts.circuit.id, value, 0.0, "end_to_end"))
    if edit.shape == "ring" and not edit.own_circuit and facts.found.known:
        for test, other in (("ln_cross", "neutral"), ("le_cross", "cpc")):
            values = all_readings(facts.layout, crossed_right(other))  # type: ignore[arg-type]
            for node in edit.new_nodes:
                if isfinite(values.get(node, float("inf"))):
                    out.append(_made(facts, test, node, values[node], 0.0, "crossed_right"))
    for node in edit.new_nodes:
        try:
            loop = facts.loop(node)
        except NotKnown:
            continue
        board = facts.loop_as_found(BOARD).value
        if not isfinite(loop.value) or not isfinite(board):
            # Nothing can be foretold beyond a loop that reads open: the rules stop it first.
            continue
        out.append(_made(facts, "r1_r2", node, max(0.0, loop.value - board), loop.tol, "in_service"))
        out.append(_made(facts, "zs", node, loop.value, loop.tol, "in_service"))
    order = list(TESTS)
    return tuple(sorted(out, key=lambda p: (order.index(p.test), p.place)))  # type: ignore[arg-type]


def _made(facts: Facts, test: str, place: str, value: float, tol: float, arrangement: str) -> Prediction:
    band = max(tol, 0.02 * value + 0.02) + _CONTACT_OHM
    shown = round_prediction_up(value)
    return Prediction(
        test,
        place,
        shown,
        max(0.0, round_prediction_up(value - band) - 0.01),
        round_prediction_up(value + band),
        "ohm",
        arrangement,
        f"{TESTS[test].words} at {facts.name(place)} = {value:.3f} Ω",  # type: ignore[index]
    )


def held_against(job: Job, predictions: tuple[Prediction, ...], circuit_id: str) -> tuple[Held, ...]:
    """Each prediction with the reading taken after the work: agrees, does not and why, or not taken yet."""
    out: list[Held] = []
    for item in predictions:
        point = None if item.place == circuit_id else item.place
        taken = None
        for reading in job.standing():
            if reading.cell == (circuit_id, point, item.test, "after_work") and reading.counts:
                taken = reading
        if taken is None:
            out.append(Held(item, None, None))
            continue
        value = taken.value
        if value is None:
            out.append(Held(item, None, False, ("open where a value was expected: a joint is not made",)))
            continue
        slack = tolerance(job, taken)
        agrees = item.low - slack <= value <= item.high + slack
        out.append(Held(item, value, agrees, () if agrees else _reasons(item, value, taken.mode)))
    return tuple(out)


def _reasons(item: Prediction, value: float, mode: str | None) -> tuple[str, ...]:
    if value > item.high:
        first = ["a loose or doubtful joint at the new work", "more cable than was entered, or a smaller size"]
        if item.test in ("zs", "zln") and mode == "no_trip":
            first.insert(0, "no-trip reading: repeat with the high-current test")
        return tuple(first)
    if item.test in ("zs", "r1_r2"):
        return (
            "a parallel earth path: not counted",
            "less cable than was entered",
            "the leads were not nulled alike",
        )
    return ("less cable than was entered", "a link left in that shortens the way")
