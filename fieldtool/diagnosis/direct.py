"""What single readings say by themselves: insulation, earth to its terminal, legs, points that read open, figures."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise
from math import inf

from fieldtool.answers import Explanation, Odds
from fieldtool.diagnosis.evidence import Evidence

__all__ = ["calculated", "contacts", "earth_off", "no_joins", "no_ring", "open_points", "radial", "too_good", "unlike"]

LOW_OHM = 1e6
"""Insulation under this is a contact [ohm]; Table 64."""

FAR_OHM = 20.0
"""A loop this far above the rest is no joint in copper: the earth comes back another way, or not at all [ohm]."""


def _said(
    key: str,
    sentence: str,
    reason: str,
    *,
    odds: Odds = "probably",
    where: tuple[str, ...] = (),
    danger: bool = False,
    stops: bool = True,
    group: str = "",
) -> Explanation:
    return Explanation(
        key, group or key, odds, sentence, where=where, reasoning=(reason,), stops_ring=stops, danger=danger
    )


def earth_off(evidence: Evidence) -> Iterator[Explanation]:
    """Both cpc ends joined to each other but off the bar: every dead ring test passes, and nothing is earthed."""
    sentence = "Earth whole round the ring, but not joined to the bar: nothing is earthed."
    bar = evidence.at_board.get("cpc_to_met")
    if bar is not None and bar > 5.0:
        reason = "this circuit's earth to the main earthing terminal reads " + (
            "open" if bar == inf else f"{bar:.0f} Ω"
        )
        yield _said("cpc_off_bar", sentence, reason, odds="almost_certainly", danger=True)
        return
    if evidence.ze is None or not evidence.zs:
        return
    over = [value - evidence.ze for value in evidence.zs.values()]
    whole = evidence.ends or (bool(evidence.r1_r2) and max(evidence.r1_r2.values()) < inf)
    if min(over) > max(FAR_OHM, 0.5 * evidence.ze) and whole:
        far = min(evidence.zs.values())
        reason = f"Zs {'open' if far == inf else f'{far:.0f} Ω or more'} everywhere, though the earth is whole dead"
        yield _said("cpc_off_bar", sentence, reason, odds="almost_certainly", danger=True)


def contacts(evidence: Evidence) -> Iterator[Explanation]:
    """Insulation that is low between some wires only says which touch, or what was left in."""
    low = {test for test, value in evidence.at_board.items() if test.startswith("ir_") and value < LOW_OHM}
    if "ir_ne" in low and "ir_le" not in low:
        yield _said(
            "neutral_earth_contact",
            "Neutral touches earth somewhere: Zs can look right with no earth.",
            "IR N-E under 1 MΩ while L-E is sound",
            odds="almost_certainly",
            danger=True,
        )
    if "ir_le" in low:
        yield _said(
            "line_earth_contact",
            "Line touches earth somewhere, or an appliance is left in: do not energise.",
            "IR L-E under 1 MΩ",
            danger=True,
        )
    if "ir_ln" in low and "ir_le" not in low:
        yield _said(
            "appliance_left_in",
            "An appliance is left plugged in or switched on, or line touches neutral.",
            "IR L-N under 1 MΩ while both are clear of earth",
        )
    if "ir_neutrals" in low:
        yield _said(
            "shared_neutral",
            "Its neutral is shared with another circuit: it can be live when lifted.",
            "IR from this neutral to the others under 1 MΩ",
            odds="almost_certainly",
            danger=True,
        )


LEAST_OHM = 0.03
"""No ring of copper reads less end to end [ohm]: 4 m of 2.5 mm² by IEC 60228."""

_WIRES = {"r1": "line", "rn": "neutral", "r2": "earth"}


def too_good(evidence: Evidence) -> Iterator[Explanation]:
    """Next to nothing between the ends of a ring: the clips touch, or sit on one end."""
    ends = {"r1": evidence.r1, "rn": evidence.rn, "r2": evidence.r2}
    near = [key for key, value in ends.items() if value is not None and value < LEAST_OHM]
    if near:
        yield _said(
            "too_good",
            f"{near[0]} reads {ends[near[0]]:.2f} Ω: no ring is that good. Are the clips touching?",
            "4 m of 2.5 mm² already reads 0.03 Ω",
        )


def no_joins(evidence: Evidence) -> Iterator[Explanation]:
    """Every crossed reading open although the ring is whole end to end: neither of the two joins is made."""
    steps = [
        step
        for values, step in ((evidence.ln, "L-N"), (evidence.le, "L-E"))
        if len(values) >= 2 and all(value == inf for value in values.values())
    ]
    if evidence.ends and steps:
        yield _said(
            "one_join_left_off",
            f"Every {' and '.join(steps)} crossed reading is open: the joins are not made.",
            "the ring is whole end to end",
            odds="almost_certainly",
        )


def unlike(evidence: Evidence, given: dict[tuple[str, str], float]) -> Iterator[Explanation]:
    """Readings that read open, or far too much, where all the others say that there is copper.

    ``given`` is what the best explanation of the rest gives for them [ohm].
    """
    for (test, point), ohm in given.items():
        value = {"r1": evidence.r1, "rn": evidence.rn, "r2": evidence.r2}.get(test)
        if point:
            of = {"ln_cross": evidence.ln, "le_cross": evidence.le, "r1_r2": evidence.r1_r2, "r1_rn": evidence.r1_rn}
            value = of[test].get(point)
        if value is None or (point and value == inf and test in ("ln_cross", "le_cross")):
            continue
        shown = "open" if value == inf else f"{value:g} Ω"
        at = f" at {evidence.names[point]}" if point else ""
        name = {"ln_cross": "L-N crossed", "le_cross": "L-E crossed", "r1_r2": "R1+R2", "r1_rn": "R1+Rn"}.get(
            test, test
        )
        slips = [times for times in (10, 100, 1000) if ohm > 0 and value < inf and 0.6 < value / ohm / times < 1.7]
        ask = f" {value / slips[0]:.2f}?" if slips else ""
        yield _said(
            "one_reading_off" if point else "end_slip",
            f"{name}{at} reads {shown}, but the rest gives {ohm:.2f} Ω:{ask or ' read it again.'}",
            f"{_WIRES[test]} is whole by the crossed readings" if test in _WIRES else "no copper reads that much",
            where=(point,) if point else (),
        )


def no_ring(evidence: Evidence) -> Iterator[Explanation]:
    """Open end to end in all three, or legs that do not match: two radials, legs in two ways, rings crossed."""
    broken = evidence.r1 == evidence.rn == evidence.r2 == inf
    if evidence.legs == "wrong":
        counted = [count for count in evidence.counts if count is not None]
        odd = len(set(counted)) > 1 or counted == [1, 1, 1]
        first, other = ("ring_in_two_ways", "crossed_rings") if odd else ("crossed_rings", "ring_in_two_ways")
        words = {
            "ring_in_two_ways": "One ring with its legs in two ways: live until BOTH are off.",
            "crossed_rings": "The legs here belong to two rings: live until BOTH ways are off.",
        }
        for key in (first, other):
            yield _said(key, words[key], "legs were matched by measurement, wrong", danger=True, group="not_a_ring")
        return
    if broken:
        several = _branches(evidence)
        yield _said(
            "not_a_ring",
            "Not a ring here: open end to end in all three. Two radials, or legs in two ways.",
            "r1, rn and r2 all read open" + (f"; R1+R2 starts again at {several}" if several else ""),
            group="not_a_ring",
        )


def _branches(evidence: Evidence) -> str:
    """The point, in walking order, at which R1+R2 falls: where the second branch begins. Empty where it only rises."""
    known = [(point, evidence.r1_r2[point]) for point in evidence.trunk if evidence.r1_r2.get(point, inf) < inf]
    for (_, before), (point, value) in pairwise(known):
        if value < before - 0.05:
            return evidence.names[point]
    return ""


def radial(evidence: Evidence) -> Iterator[Explanation]:
    """Read as a radial: R1+R2 at its points, and no end-to-end reading."""
    if evidence.r1_r2 and all(value is None for value in (evidence.r1, evidence.rn, evidence.r2)):
        worst = max(evidence.r1_r2, key=lambda point: evidence.r1_r2[point])
        value = evidence.r1_r2[worst]
        if value == inf:
            return
        yield _said(
            "radial",
            f"A radial as read: R1+R2 rises to {value:.2f} Ω at {evidence.names[worst]}.",
            "no end-to-end reading: a second end is not ruled out",
            odds="could_be",
            stops=False,
        )


def open_points(evidence: Evidence, expected: frozenset[tuple[str, str]]) -> Iterator[Explanation]:
    """Points that read open where others do not: which crossed readings are open tells which wires are changed over.

    ``expected`` are the readings that the circuit's own shape makes open.
    """
    good_ln = any(value < inf for value in evidence.ln.values())
    good_le = any(value < inf for value in evidence.le.values())
    for point in sorted({*evidence.ln, *evidence.le}):
        ln, le = evidence.ln.get(point), evidence.le.get(point)
        ln = 0.0 if ("ln_cross", point) in expected else ln
        le = 0.0 if ("le_cross", point) in expected else le
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
    return _said(key, sentence, "that point alone reads open", where=(point,), danger=True)


MANY = 6
"""Figures that must agree to the last digit before they are taken to be worked out; our assumption."""


def calculated(evidence: Evidence) -> Iterator[Explanation]:
    """Figures that could only have been worked out from one another.

    Zs equal to Ze plus R1+R2 to the last digit at every point is pointed out; where L-E crossed is moreover the same
    (r1+r2)/4 everywhere, though it must rise from the board to the middle, nothing there was read.
    """
    ze = evidence.ze
    dead = evidence.r1_r2
    both = [point for point in evidence.zs if dead.get(point, inf) < inf and evidence.zs[point] < inf]
    if ze is None or len(both) < MANY or len({round(dead[point], 2) for point in both}) < 3:
        return
    if any(abs(evidence.zs[point] - ze - dead[point]) >= 0.0051 for point in both):
        return
    low, high = evidence.hump
    crossed = {round(value, 3) for value in evidence.le.values()}
    level = evidence.ends and len(evidence.le) >= MANY and len(crossed) == 1 and high - low > 0.005
    yield _said(
        "figures_calculated",
        "Zs is Ze plus R1+R2 to the last digit throughout: worked out, not read?",
        f"{len(both)} points agree to 0.01 Ω; readings scatter more than that"
        + ("; L-E crossed never rises to the middle" if level else ""),
        odds="probably" if level else "could_be",
        stops=level,
    )
