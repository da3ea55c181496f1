"""Protection against shock by automatic disconnection: the loop at every place against the nearest device."""

from __future__ import annotations

from collections.abc import Iterable
from math import isfinite

from fieldtool.answers import Finding, Missing
from fieldtool.quantities.show import exceeds, round_limit_down
from fieldtool.reference.look import constant
from fieldtool.rules.engine import NotKnown, rule
from fieldtool.rules.facts import Facts, Loop
from fieldtool.rules.limits import touch_limit, zs_limit
from fieldtool.rules.needs import missing_test
from fieldtool.rules.say import breaks, holds, on_condition
from fieldtool.rules.tolerance import last_digit


def _tn(facts: Facts) -> bool:
    return facts.job.supply.system != "tt"


def _tt(facts: Facts) -> bool:
    return facts.job.supply.system == "tt"


def _says(facts: Facts, loop: Loop, limit: float) -> str:
    if not isfinite(loop.value):
        return f"Zs at {facts.name(loop.place)} is open: no earth there, or over range."
    sign = "" if loop.origin == "measured" else "="
    return f"Zs {sign}{loop.value:.2f} Ω at {facts.name(loop.place)}, most {round_limit_down(limit):.3f} (80 % in)."


@rule(
    "zs_within_limit",
    "411.4.4",
    "A loop low enough for the nearest device to part in time, at every point, spur end and new outlet (TN).",
    needs=("supply.system", "device"),
    assumes=("place on the ring",),
    applies=_tn,
)
def zs_within_limit(facts: Facts) -> Iterable[Finding]:
    """The higher of measured and worked out, at every place, against 0.8 of the book value of the nearest device.

    Inside the meters' tolerance of the limit is a condition, never a plain yes; so is a loop known only live.
    """
    gaps: list[Missing] = []
    for place in facts.places:
        try:
            loop = facts.loop(place)
        except NotKnown as gap:
            gaps.extend(gap.missing)
            continue
        yield _judge(facts, place, loop)
    if gaps:
        raise NotKnown(*dict.fromkeys(gaps))


def _judge(facts: Facts, place: str, loop: Loop) -> Finding:
    protection = facts.protection(place)
    limit = zs_limit(protection)
    live = loop.live if loop.origin == "measured" else None
    digit = last_digit(live) if live is not None else 1e-9
    working = (
        *loop.working,
        f"limit {limit.basis} = {limit.value:.4f} Ω ({limit.table})",
        f"meters can miss {loop.tol:.2f} Ω",
    )
    more = {
        "measured": loop.value,
        "limit": limit.value,
        "tol": loop.tol,
        "unit": "ohm",
        "origin": loop.origin,
        "basis": limit,
        "working": working,
        "assumed": loop.assumed,
        "limit_key": "zs",
    }
    over = exceeds(loop.value, limit.value, digit) if live is not None else loop.value > limit.value
    says = _says(facts, loop, limit.value)
    name = facts.name(place)
    if over:
        do = f"Shorten, thicken or move it, or protect it behind a fuse; Zs at {name} is over the most."
        return breaks(place, says, do, designer_may_decide=_rcd_may_do(facts), **more)
    if loop.value + loop.tol > limit.value:
        taken = "Repeat Zs with the high-current test, at front and terminals"
        near = loop.live.point if loop.live is not None and loop.live.point else place
        do = f"{taken}, at {facts.name(near)}: it is within the meter's tolerance of the most."
        return on_condition(place, says, do, merge_key=f"zs tolerance {near}", **more)
    if loop.dead is None:
        do = f"Read R1+R2 dead at {name}: parallel earth paths are not excluded."
        return on_condition(place, says, do, merge_key=f"parallel {loop.live.point if loop.live else place}", **more)
    if loop.flattered:
        return holds(place, says, do="The live reading is lower: a parallel earth path, not counted.", **more)
    return holds(place, says, **more)


def _rcd_may_do(facts: Facts) -> bool:
    """411.4.5: an RCD may do for fault protection on TN as a designer's recorded choice."""
    try:
        rcd = facts.rcd
    except NotKnown:
        return False
    return rcd is not None and rcd.standard in ("61008", "61009") and facts.maybe("rcd_ms") is not None


@rule(
    "tt_touch_voltage",
    "411.5.3",
    "On TT, an RCD whose rated current times the earth loop is at most 50 V.",
    needs=("supply.system", "rcd"),
    applies=_tt,
)
def tt_touch_voltage(facts: Facts) -> Iterable[Finding]:
    """The higher of the electrode's resistance and the loop stands for RA."""
    rcd = facts.rcd
    if rcd is None:
        yield breaks("board", "TT without an RCD: no protection against shock.", "An RCD at the board comes first.")
        return
    limit = touch_limit(rcd)
    electrode = facts.maybe("ra")
    gaps: list[Missing] = []
    for place in facts.places:
        try:
            loop = facts.loop(place)
        except NotKnown as gap:
            gaps.extend(gap.missing)
            continue
        value = max(loop.value, electrode.value or 0.0) if electrode is not None else loop.value
        line = f"{value:.1f} Ω × {rcd.i_dn_ma:g} mA = {value * rcd.i_dn_ma / 1000:.2f} V, most 50 V"
        more = {
            "measured": value,
            "limit": limit.value,
            "tol": loop.tol,
            "unit": "ohm",
            "basis": limit,
            "working": (*loop.working, line),
            "assumed": loop.assumed,
            "limit_key": "zs",
            "origin": loop.origin,
        }
        says = f"Earth loop {value:.1f} Ω at {facts.name(place)}, most {limit.value:.0f}."
        if value > limit.value:
            yield breaks(place, says, "Better the electrode first.", **more)
        elif value + loop.tol > limit.value:
            yield on_condition(place, says, "Take the loop again: it is within the meter's tolerance.", **more)
        else:
            yield holds(place, says, **more)
    if gaps:
        raise NotKnown(*dict.fromkeys(gaps))


@rule(
    "electrode_steady",
    "411.5.3",
    "An electrode low enough to stay steady through the seasons.",
    needs=("supply.system",),
    applies=_tt,
)
def electrode_steady(facts: Facts) -> Iterable[Finding]:
    """Above 200 Ω an electrode may not be stable: a condition, never a stop by itself."""
    reading = facts.maybe("ra") or facts.maybe("ze")
    if reading is None:
        raise NotKnown(missing_test(facts, "ra", None))
    doubt = constant("electrode.doubtful_ohm")
    value = reading.value if reading.value is not None else float("inf")
    more = {"measured": value, "limit": doubt.value, "unit": "ohm", "origin": "measured"}
    if value > doubt.value:
        yield on_condition("board", f"Electrode {value:g} Ω is over {doubt.value:g}.", "Better the electrode.", **more)
    else:
        yield holds("board", f"Electrode {value:g} Ω.", **more)


@rule(
    "line_neutral_loop",
    "434.5.2",
    "A line-neutral loop that still operates the breaker, where the earth loop does not have to.",
    needs=("supply.system", "device"),
    applies=lambda facts: _tt(facts) and facts.edit is not None and bool(facts.new_nodes),
)
def line_neutral_loop(facts: Facts) -> Iterable[Finding]:
    """The short-circuit loop at each new outlet: from the fault current at the board and R1+Rn, or read there."""
    board = facts.job.supply.u0_v / (facts.read("pfc").value or 1e-9)
    for place in facts.new_nodes:
        r1_rn = facts.rn.get(place, float("inf"))
        if not facts.found.known and not (facts.edit is not None and facts.edit.own_circuit):
            raise NotKnown(*(facts.found.missing or (missing_test(facts, "r1_rn", place),)))
        value = board + r1_rn
        limit = zs_limit(facts.protection(place))
        line = (f"U0 / fault current {board:.3f} + R1+Rn {r1_rn:.3f} = {value:.3f} Ω, most {limit.value:.3f}",)
        more = {"measured": value, "limit": limit.value, "unit": "ohm", "basis": limit, "working": line}
        says = f"L-N loop ={value:.2f} Ω at {facts.name(place)}, most {round_limit_down(limit.value):.3f}."
        if value > limit.value:
            yield breaks(place, says, "Shorten or thicken the cable.", limit_key="zln", **more)
        else:
            yield holds(place, says, limit_key="zln", **more)
