"""Rules of the readings as found: what shows the circuit's shape and soundness, and whether it agrees with itself."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from math import isfinite

from fieldtool.answers import Finding
from fieldtool.job.reading import Reading
from fieldtool.reference.look import cable, constant
from fieldtool.rules.engine import NotKnown, rule
from fieldtool.rules.existing import is_ring, stands
from fieldtool.rules.facts import Facts
from fieldtool.rules.limits import insulation_limit
from fieldtool.rules.needs import missing_test
from fieldtool.rules.say import breaks, holds, on_condition


@rule(
    "ring_continuous",
    "643.2.1",
    "A ring whole in line, neutral and earth.",
    needs=("read.r1", "read.rn", "read.r2"),
    applies=is_ring,
)
def ring_continuous(facts: Facts) -> Iterable[Finding]:
    """All three read end to end; line and neutral of one size agree; the earth is in proportion to its size."""
    three = [facts.read(test) for test in ("r1", "rn", "r2")]
    names = ("line", "neutral", "earth")
    broken = [name for name, reading in zip(names, three, strict=True) if reading.sign in ("open", ">")]
    if broken:
        yield breaks(facts.circuit.id, f"Not whole end to end: {', '.join(broken)}.", "Find and mend the break first.")
        return
    r1, rn, r2 = (reading.value or 0.0 for reading in three)
    agree = max(constant("continuity.r1_rn_agree_ohm").value, facts.tol(three[0]) + facts.tol(three[1]))
    line = (f"r1 {r1:.2f}, rn {rn:.2f}, r2 {r2:.2f} Ω; r1 and rn may differ by {agree:.2f}",)
    if abs(r1 - rn) > agree:
        yield breaks(
            facts.circuit.id,
            f"r1 {r1:.2f} and rn {rn:.2f} differ by more than {agree:.2f} Ω.",
            "Find the joint or the other size of cable before anything is added.",
            measured=abs(r1 - rn),
            limit=agree,
            unit="ohm",
            working=line,
        )
        return
    yield holds(
        facts.circuit.id,
        f"Whole end to end: r1 {r1:.2f}, rn {rn:.2f}, r2 {r2:.2f} Ω.",
        measured=abs(r1 - rn),
        limit=agree,
        unit="ohm",
        working=line,
        origin="measured",
    )
    yield from _proportion(facts, r1, r2)


def _proportion(facts: Facts, r1: float, r2: float) -> Iterable[Finding]:
    kind = cable(facts.circuit.cable) if facts.circuit.cable else None
    if kind is None or kind.cpc_mm2 is None or r1 <= 0:
        return
    want = kind.line_mm2 / kind.cpc_mm2
    ratio = r2 / r1
    if abs(ratio / want - 1) > 0.12 and abs(r2 - want * r1) > 0.05:
        yield on_condition(
            facts.circuit.id,
            f"r2/r1 is {ratio:.2f}; {kind.words} would give {want:.2f}.",
            "Look at the cable: another size of earth, mixed sizes, or a joint.",
            measured=ratio,
            limit=want,
        )


@rule(
    "shown_to_be_a_ring",
    "643.2.1",
    "A ring shown by readings at every point that can be reached, not taken on trust.",
    applies=is_ring,
)
def shown_to_be_a_ring(facts: Facts) -> Iterable[Finding]:
    """Step 2 and step 3 at all accessible points; a point left out is named and limits what is claimed."""
    gaps = []
    skipped = []
    for point in facts.points.values():
        if point.behind is not None or point.kind in ("blank", "joint"):
            continue
        for test in ("ln_cross", "le_cross"):
            if facts.maybe(test, point.id) is not None:
                continue
            if point.accessible == "no" or _limited(facts, test, point.id):
                skipped.append(point.name or point.id)
            else:
                gaps.append(missing_test(facts, test, point.id))
    if gaps:
        raise NotKnown(*gaps)
    reading = facts.reading
    leading = reading.leading if reading is not None else None
    if leading is not None and (leading.stops_ring or leading.danger):
        yield breaks(facts.circuit.id, leading.sentence, "Settle what it is before anything hangs on this ring.")
    elif reading is not None and reading.nothing_fits:
        yield breaks(
            facts.circuit.id, "No shape fits these readings.", "Do not rely on them: null the leads and repeat."
        )
    elif skipped:
        names = ", ".join(dict.fromkeys(skipped))
        yield on_condition(
            facts.circuit.id,
            f"Not read: {names}. What hangs there is not known.",
            f"Nothing is claimed of {names}; read them when they can be reached.",
        )
    else:
        yield holds(facts.circuit.id, "Shown to be a ring by readings at every point.")


def _limited(facts: Facts, test: str, point: str) -> bool:
    return any(
        item.origin == "limitation" and item.test == test and item.point == point for item in facts.job.standing()
    )


@rule(
    "no_danger_in_the_readings",
    "643.2.1",
    "No explanation of the readings that means danger.",
    applies=lambda facts: facts.found.shape == "radial" and stands(facts),
)
def no_danger_in_the_readings(facts: Facts) -> Iterable[Finding]:
    """What the readings most likely are is not a danger, and is not left open where it could be."""
    leading = facts.reading.leading if facts.reading is not None else None
    if leading is not None and leading.danger:
        yield breaks(facts.circuit.id, leading.sentence, "Settle what it is before anything is added.")
    else:
        yield holds(facts.circuit.id, "No danger seen in what the readings say.")


@rule(
    "no_second_end",
    "643.2.1",
    "A radial proved to have no second end.",
    needs=("read.legs",),
    applies=lambda facts: facts.found.shape == "radial" and stands(facts),
)
def no_second_end(facts: Facts) -> Iterable[Finding]:
    """Every leg at the way is matched by measurement: no other end of it comes back to the board."""
    if facts.read("legs").answer == "right":
        yield holds(facts.circuit.id, "Legs proved by measurement: no second end.")
    else:
        yield breaks(facts.circuit.id, "The legs are not what they seem.", "Match every leg at the board first.")


@rule(
    "cpc_continuous",
    "543.2",
    "An earth conductor that reaches every point.",
    applies=lambda facts: facts.found.shape == "radial" and stands(facts),
    needs=("read.r1_r2@end", "read.r1_r2@attach"),
)
def cpc_continuous(facts: Facts) -> Iterable[Finding]:
    """R1+R2 read to the end and to the place of attachment, dead, and not believed from a live reading alone."""
    for place in facts.found.layout.nodes:
        reading = facts.maybe("r1_r2", place)
        if reading is None:
            continue
        if reading.sign in ("open", ">"):
            yield breaks(place, f"R1+R2 at {facts.name(place)} reads open.", "Find and mend the break first.")
        else:
            yield holds(place, f"R1+R2 at {facts.name(place)}: {reading.value:.2f} Ω.", origin="measured")


@rule(
    "insulation_resistance",
    "643.3.2",
    "Insulation resistance of at least 1 MΩ.",
    needs=(),
    applies=stands,
)
def insulation_resistance(facts: Facts) -> Iterable[Finding]:
    """L-N, L-E and N-E at 500 V; or line and neutral together to earth at 250 V where things are left in."""
    joined = facts.maybe("ir_live_e")
    readings: list[Reading] = [joined] if joined is not None else []
    if not readings:
        gaps = [missing_test(facts, test, None) for test in _IR if facts.maybe(test) is None]
        if gaps:
            raise NotKnown(*gaps)
        readings = [facts.read(test) for test in _IR]
    least = insulation_limit()
    look = constant("ir.look_into_mohm").value * 1e6
    for reading in readings:
        value = reading.value or 0.0
        name = reading.test.replace("ir_", "").upper().replace("_", "-")
        more = {"measured": value, "limit": least.value, "unit": "ohm", "basis": least, "origin": "measured"}
        if reading.sign == "<" or value < least.value:
            yield breaks(facts.circuit.id, f"IR {name} {value / 1e6:g} MΩ is under 1.", "Find out why first.", **more)
        elif value < look and reading.sign != ">":
            yield on_condition(
                facts.circuit.id,
                f"IR {name} {value / 1e6:g} MΩ: over 1, under 2.",
                "Look into why it is low.",
                **more,
            )
        else:
            yield holds(facts.circuit.id, f"IR {name} {reading.sign.strip('=')}{value / 1e6:g} MΩ.", **more)


_IR = ("ir_ln", "ir_le", "ir_ne")


@rule("polarity_right", "643.6", "Right polarity throughout.", needs=("read.polarity",), applies=stands)
def polarity_right(facts: Facts) -> Iterable[Finding]:
    """Line, neutral and earth each where they belong at every point."""
    if facts.read("polarity").answer == "right":
        yield holds(facts.circuit.id, "Polarity right.", origin="measured")
    else:
        yield breaks(facts.circuit.id, "Polarity wrong at some point.", "Put it right before anything is added.")


@rule("readings_agree", "643.7.3", "Readings that agree with one another.", applies=stands)
def readings_agree(facts: Facts) -> Iterable[Finding]:
    """Evidence that disagrees with itself never reaches "go"."""
    allowed = constant("loop.agree_ohm").value
    seen = 0
    for place in facts.found.layout.nodes:
        live = facts.maybe("zs", place)
        if live is None or not facts.placed(place):
            continue
        loop = facts.loop_as_found(place)
        name = facts.name(place)
        if live.sign in ("open", ">"):
            yield breaks(place, f"Zs at {name} reads open or over range.", "No earth there: find and mend it first.")
            continue
        dead, value = loop.dead or 0.0, live.value or 0.0
        band = facts.tol(live) + facts.tol(facts.zdb) + facts.dead_tol(facts.base_r.get(place, 0.0))
        excess = value - dead
        seen += 1
        line = (f"read {value:.2f}, worked out {dead:.2f}, apart {excess:+.2f} Ω; meters can miss {band:.2f}",)
        more = {"measured": excess, "limit": max(allowed, band), "unit": "ohm", "working": line}
        if excess > max(allowed, band):
            if live.mode == "no_trip":
                raise NotKnown(
                    replace(missing_test(facts, "zs", place), words=f"Zs at {name} again, high-current test")
                )
            yield breaks(
                place,
                f"Zs at {name} is {excess:.2f} Ω above what the dead readings give.",
                "A joint in the loop: find it before anything is added.",
                **more,
            )
    yield from _rings_agree(facts)
    if seen:
        yield holds(facts.circuit.id, f"Zs and the dead readings agree at {seen} points.")


def _rings_agree(facts: Facts) -> Iterable[Finding]:
    if facts.found.shape != "ring" or not facts.found.known:
        return
    ends = [facts.maybe(test) for test in ("r1", "rn", "r2")]
    if any(item is None or item.value is None for item in ends):
        return
    r1, rn, r2 = (item.value or 0.0 for item in ends if item is not None)
    for test, other in (("ln_cross", rn), ("le_cross", r2)):
        least = r1 * other / (r1 + other) if r1 + other > 0 else 0.0
        for place in facts.found.layout.nodes:
            reading = facts.maybe(test, place)
            if reading is None or reading.value is None:
                continue
            slack = facts.tol(reading) + 0.05 + 0.02 * least
            if reading.value < least - slack:
                yield breaks(
                    place,
                    f"{_WORDS[test]} at {facts.name(place)}: {reading.value:.2f}, under {least:.2f} Ω.",
                    "Wrong pairs joined, or a shorter ring: repeat steps 1 to 3.",
                    measured=reading.value,
                    limit=least - slack,
                    unit="ohm",
                )
    if isfinite(r1):
        yield holds(facts.circuit.id, "Cross readings fit the end-to-end readings.")


_WORDS = {"ln_cross": "L-N crossed", "le_cross": "L-E crossed"}
