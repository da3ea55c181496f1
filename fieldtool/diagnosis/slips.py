"""Slips of the test itself, and points that read open: what the hand did, before what the circuit is."""

from __future__ import annotations

from collections.abc import Iterator
from math import inf

from fieldtool.answers import Explanation
from fieldtool.diagnosis.evidence import Evidence

__all__ = ["slip_explanations"]


def slip_explanations(evidence: Evidence) -> Iterator[Explanation]:
    """Wrong pairs, one join left off, leads not nulled, polarity at a point, and a loop that does not add up."""
    if evidence.ends:
        yield from _wrong_pairs(evidence)
        yield from _join_off(evidence)
        yield from _leads(evidence)
    yield from _open_points(evidence)
    yield from _loop(evidence)


def _ring_values(evidence: Evidence, values: dict[str, float]) -> dict[str, float]:
    return {point: value for point, value in values.items() if point in evidence.trunk and value < inf}


def _wrong_pairs(evidence: Evidence) -> Iterator[Explanation]:
    """Readings that climb from near nothing by the board to a quarter in the middle; said from the third one on."""
    values = _ring_values(evidence, evidence.ln) or _ring_values(evidence, evidence.le)
    top = evidence.flat if _ring_values(evidence, evidence.ln) else evidence.hump[1]
    low = [value for value in values.values() if value < 0.82 * top - 0.02]
    if len(values) < 3 or len(low) < 2 or any(value > top + evidence.slack(top) for value in values.values()):
        return
    yield Explanation(
        "ends_joined_wrongly",
        "ends_joined_wrongly",
        "almost_certainly" if len(low) >= 3 else "probably",
        "Readings climb from the board: each leg is joined to itself, not crossed.",
        where=tuple(values),
        reasoning=(f"a crossed ring reads {top:.2f} Ω everywhere; these start far below it",),
        stops_ring=True,
    )


def _join_off(evidence: Evidence) -> Iterator[Explanation]:
    """Flat at twice the quarter: only one of the two cross joins is made, since step 1 is whole."""
    values = list(_ring_values(evidence, evidence.ln).values())
    double = 2 * evidence.flat
    if len(values) >= 3 and all(abs(value - double) <= evidence.slack(double) for value in values):
        yield Explanation(
            "one_join_left_off",
            "one_join_left_off",
            "almost_certainly",
            "Level at twice the quarter, and step 1 is whole: one of the two joins is off.",
            where=tuple(evidence.ln),
            reasoning=(f"L-N crossed reads {double:.2f} Ω everywhere, (r1+rn)/2",),
            stops_ring=True,
        )


def _leads(evidence: Evidence) -> Iterator[Explanation]:
    """All crossed readings above the ring by one and the same amount: the leads are in them."""
    values = list(_ring_values(evidence, evidence.ln).values())
    if len(values) < 3:
        return
    over = [value - evidence.flat for value in values]
    level = max(over) - min(over) <= 0.03
    middle = sum(over) / len(over)
    if level and 0.05 <= middle <= 0.5 and middle < 0.8 * evidence.flat:
        yield Explanation(
            "leads_not_nulled",
            "leads_not_nulled",
            "probably",
            f"Every crossed reading is {middle:.2f} Ω high: are the leads nulled?",
            reasoning=("the same amount at every point is in the leads, not in the ring",),
            stops_ring=True,
        )


def _open_points(evidence: Evidence) -> Iterator[Explanation]:
    """A point that reads open while others do not: which crossed readings are open tells which wires are swapped."""
    good_ln = any(value < inf for value in evidence.ln.values())
    good_le = any(value < inf for value in evidence.le.values())
    for point in sorted({*evidence.ln, *evidence.le}):
        ln, le = evidence.ln.get(point), evidence.le.get(point)
        name = evidence.names[point]
        if ln == inf and le == inf and good_ln and good_le:
            yield _at_point(
                "neutral_earth_swapped", point, f"{name} reads open both ways: neutral and earth swapped there?"
            )
        elif ln == inf and good_ln and le is not None:
            yield _at_point("line_earth_swapped", point, f"{name}: line and earth swapped? Metal could be live. Stop.")
        elif le == inf and good_le and ln is not None:
            yield _at_point("line_neutral_swapped", point, f"{name}: line and neutral swapped, or no earth there.")


def _at_point(key: str, point: str, sentence: str) -> Explanation:
    return Explanation(
        key,
        key,
        "probably",
        sentence,
        where=(point,),
        reasoning=("that point alone reads open",),
        stops_ring=True,
        danger=True,
    )


def _loop(evidence: Evidence) -> Iterator[Explanation]:
    """Zs far above the board's loop and R1+R2, where both are known: a joint in the loop."""
    if evidence.ze is None:
        return
    for point, value in sorted(evidence.zs.items()):
        dead = evidence.r1_r2.get(point)
        if dead is None and evidence.ends:
            extra = max(0.0, (evidence.le.get(point) or 0.0) - evidence.hump[1])
            dead = evidence.hump[1] + (extra if extra < inf else 0.0)
        if dead is None or dead == inf:
            continue
        over = value - evidence.ze - dead
        if over > max(0.35, 0.05 * evidence.ze):
            yield Explanation(
                "high_loop",
                "high_loop",
                "probably",
                f"Zs at {evidence.names[point]} is {over:.2f} Ω above Ze and R1+R2: a joint in the loop, or no-trip.",
                where=(point,),
                reasoning=(f"{value:.2f} read, {evidence.ze + dead:.2f} Ω worked out",),
            )
            return
