"""Residual current devices: whether the new outlets and the hidden cable have one that does, and how to give one."""

from __future__ import annotations

from collections.abc import Iterable

from fieldtool.answers import Finding
from fieldtool.job.place import Rcd
from fieldtool.reference.look import constant
from fieldtool.rules.engine import NotKnown, rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.limits import rcd_time_limit
from fieldtool.rules.needs import missing_test
from fieldtool.rules.say import breaks, holds, on_condition

_PROVIDES = ("rcbo_30_type_a", "rcd_ahead")
"""Cures that bring a 30 mA RCD, in the order they are offered: at the board, then ahead of the addition."""


def _adds(facts: Facts) -> bool:
    return facts.edit is not None and facts.edit.role != "none"


def _cures(facts: Facts) -> tuple[str, ...]:
    return facts.request.cures if facts.request is not None else ()


def _covers(rcd: Rcd | None, most_ma: float) -> bool:
    return rcd is not None and rcd.i_dn_ma <= most_ma and rcd.place != "outlet" and rcd.delay == "none"


@rule(
    "rcd_for_new_outlets",
    "411.3.3",
    "A 30 mA RCD for every new socket-outlet.",
    needs=("rcd",),
    applies=lambda facts: _adds(facts) and any(item.kind in ("single", "twin") for item in facts.outlets),
)
def rcd_for_new_outlets(facts: Facts) -> Iterable[Finding]:
    """At the board, or ahead of the addition; an outlet with an RCD in it only as a recorded departure (531.3.4)."""
    most = constant("outlet.rcd_ma")
    more = {"limit": most.value, "unit": "mA", "cures": _PROVIDES}
    if _covers(facts.rcd, most.value):
        yield holds("board", f"New outlets behind {facts.rcd.i_dn_ma:g} mA." if facts.rcd else "", **more)
        return
    cures = _cures(facts)
    chosen = next((cure for cure in _PROVIDES if cure in cures), None)
    if chosen == "rcbo_30_type_a":
        do = "Fit a 30 mA type A RCBO of the board maker's own type, and test it, before energising."
        yield on_condition("board", "New outlets need 30 mA: an RCBO is part of the work.", do, **more)
    elif chosen == "rcd_ahead":
        do = "Fit a 30 mA type A RCD in an enclosure ahead of the addition, and test it, before energising."
        yield on_condition("board", "New outlets need 30 mA: an RCD ahead is part of the work.", do, **more)
    elif "bs7288_departure" in cures and facts.job.supply.system != "tt":
        do = (
            "An outlet with an RCD in it is a departure: the designer records it. What A4 says of it is not known here."
        )
        yield breaks("board", "An RCD in the outlet alone is a departure.", do, designer_may_decide=True, **more)
    else:
        do = "It would be on conditions with a 30 mA type A RCBO at the board named as part of the work."
        yield breaks("board", "No 30 mA RCD for the new outlets.", do, **more)


@rule(
    "rcd_for_hidden_cable",
    "522.6.202",
    "New cable hidden less than 50 mm deep runs in a safe zone behind a 30 mA RCD, or is protected.",
    needs=("route.hidden", "route.metal_partition", "rcd"),
    applies=lambda facts: _adds(facts) and bool(facts.new_runs),
)
def rcd_for_hidden_cable(facts: Facts) -> Iterable[Finding]:
    """Deeper than 50 mm, protected or on the surface needs none; metal in the wall needs one at any depth."""
    request = facts.request
    assert request is not None
    route = request.route
    most = constant("hidden.rcd_ma")
    clause = "522.6.203" if route.metal_partition == "yes" else ""
    if route.hidden == "off_zone":
        yield breaks("route", "New cable off the safe zones.", "Run it straight up, down or along from a point.")
        return
    if route.hidden in ("surface", "protected") or (route.hidden == "deep" and route.metal_partition == "no"):
        yield holds("route", f"New cable {route.hidden.replace('deep', 'over 50 mm deep')}: no RCD for it.")
        return
    more = {"limit": most.value, "unit": "mA", "clause": clause, "cures": _PROVIDES}
    if _covers(facts.rcd, most.value):
        yield holds("route", "Hidden cable in a safe zone behind 30 mA.", **more)
    elif "rcbo_30_type_a" in _cures(facts):
        yield on_condition(
            "route",
            "Hidden cable needs 30 mA: an RCBO is part of the work.",
            "Fit a 30 mA type A RCBO of the board maker's own type, and test it, before energising.",
            **more,
        )
    elif "rcd_ahead" in _cures(facts):
        yield on_condition(
            "route",
            "Hidden cable needs 30 mA: an RCD ahead is part of the work.",
            "Fit a 30 mA type A RCD in an enclosure ahead of the addition, and test it, before energising.",
            **more,
        )
    else:
        do = "An RCBO at the board, an RCD ahead of it, or cable over 50 mm deep or protected."
        yield breaks("route", "Hidden cable without a 30 mA RCD.", do, **more)


@rule(
    "rcd_trips_in_time",
    "643.8",
    "The RCD trips within its time at its rated current.",
    needs=("rcd",),
    applies=lambda facts: facts.edit is None or not facts.edit.own_circuit,
)
def rcd_trips_in_time(facts: Facts) -> Iterable[Finding]:
    """One a.c. test at rated current: 300 ms, 500 ms where delayed. Half, five times and ramp are never missing."""
    rcd = facts.rcd
    if rcd is None:
        yield holds("board", "No RCD on the circuit as found: see the rule for new outlets.")
        return
    if facts.edit is not None and facts.edit.device_changed:
        yield on_condition("board", "The new RCD is tested after the work.", "Test the RCD at its rated current.")
        return
    reading = facts.maybe("rcd_ms")
    if reading is None:
        raise NotKnown(missing_test(facts, "rcd_ms", None))
    limit = rcd_time_limit(rcd)
    value = reading.value if reading.value is not None else float("inf")
    over = value > limit.value or (reading.sign == ">" and value >= limit.value)
    more = {"measured": value, "limit": limit.value, "unit": "ms", "basis": limit, "origin": "measured"}
    if over:
        yield breaks("board", f"RCD {value:g} ms, most {limit.value:g}.", "Replace the RCD first.", **more)
    else:
        yield holds("board", f"RCD {reading.sign.strip('=')}{value:g} ms, most {limit.value:g}.", **more)


_ORDER = {"ac": 0, "a": 1, "f": 2, "b": 3}


@rule(
    "rcd_type_fits",
    "531.3.3",
    "An RCD of a type that suits the loads.",
    needs=("rcd", "circuit.load_has_dc"),
    applies=lambda facts: _adds(facts),
)
def rcd_type_fits(facts: Facts) -> Iterable[Finding]:
    """Type AC suits only loads known to carry no d.c.; on an existing circuit it is a condition, not a stop."""
    rcd = facts.rcd
    if rcd is None:
        yield holds("board", "No RCD whose type could be judged.")
        return
    needs = [facts.circuit.load_has_dc or "a", *(item.load_has_dc or "ac" for item in facts.outlets)]
    wanted = max((item for item in needs if item in _ORDER), key=lambda item: _ORDER[item], default="a")
    if rcd.type == "unknown":
        yield on_condition(
            "board", "Type of the RCD not known.", "See the type marked on it; fit type A where it is AC."
        )
    elif _ORDER[rcd.type] >= _ORDER[wanted]:
        yield holds("board", f"RCD type {rcd.type.upper()} suits loads of type {wanted.upper()}.")
    elif wanted in ("f", "b"):
        do = f"Fit an RCD of type {wanted.upper()} before that load is connected."
        yield breaks("board", f"RCD type {rcd.type.upper()}; a load needs type {wanted.upper()}.", do)
    else:
        do = "Change the RCD for type A at the board, of the board maker's own type."
        yield on_condition("board", "RCD type AC: not for loads with d.c. in them.", do)


@rule(
    "leakage_within_share",
    "531.3.2",
    "Standing leakage at most 30 % of the RCD's rated current.",
    needs=("rcd",),
    advice=True,
)
def leakage_within_share(facts: Facts) -> Iterable[Finding]:
    """More makes unwanted tripping likely; it is judged where it was read."""
    rcd, reading = facts.rcd, facts.maybe("leakage")
    if rcd is None or reading is None or reading.value is None:
        yield holds("board", "Standing leakage not read; worth a clamp where there is much electronics.")
        return
    most = constant("rcd.leakage_share").value * rcd.i_dn_ma
    word = "within" if reading.value <= most else "over"
    more = {"measured": reading.value, "limit": most, "unit": "mA"}
    do = "" if word == "within" else "Spread the loads over more RCDs, or find the leakage."
    yield holds("board", f"Leakage {reading.value:g} mA, {word} {most:g}.", do=do, **more)


@rule(
    "rcds_in_step",
    "536.4.203",
    "An RCD ahead of another that lets the nearer one go first.",
    needs=("rcd",),
    advice=True,
)
def rcds_in_step(facts: Facts) -> Iterable[Finding]:
    """Two RCDs of one kind in series both trip: a delayed one of at least three times the current belongs ahead."""
    rcd = facts.rcd
    ahead = rcd.upstream_i_dn_ma if rcd is not None else None
    if rcd is None or ahead is None:
        yield holds("board", "No second RCD ahead of this one.")
    elif rcd.upstream_delay == "s" and ahead >= 3 * rcd.i_dn_ma:
        yield holds("board", f"RCD ahead: {ahead:g} mA, delayed. They are in step.")
    else:
        yield holds("board", f"RCD ahead: {ahead:g} mA, not in step.", do="Expect both to trip; tell the client.")
