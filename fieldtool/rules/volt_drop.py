"""Voltage lost between the origin and each point, under the loads entered or the standing assumption."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import isfinite

from fieldtool.answers import Finding, Missing
from fieldtool.network.layout import BOARD, LayoutRun
from fieldtool.reference.look import cable, constant, mv_per_a_m
from fieldtool.rules.engine import NotKnown, rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.limits import volt_drop_limit
from fieldtool.rules.say import breaks, holds, on_condition

__all__ = ["Drop", "conductor_factor", "drop_at", "standing_load"]


@dataclass(frozen=True, slots=True)
class Drop:
    """Voltage lost at one place [V]: plain at 70 °C, and with the conductor-temperature correction.

    ``load_a`` is what is taken there [A], ``entered`` whether somebody entered it.
    """

    volts: float
    corrected: float
    load_a: float
    entered: bool
    working: tuple[str, ...]


def standing_load(facts: Facts, place: str) -> tuple[float, float, bool]:
    """Load at a place and spread load at its foot [A], and whether the load was entered.

    Ring: 20 A at the place and half of the rest at its foot, which together count as 26 A at a B32 ring's far
    point; a radial the same with its own device. Behind a plug fuse: its fuse, or the entered load if smaller.
    Source: Appendix 15 practice.
    """
    protection = facts.protection(place)
    device_a = facts.device.in_a
    entered = _entered(facts, place)
    far = constant("ring.far_load_a").value
    if protection.fused:
        load = min(protection.in_a, entered) if entered is not None else protection.in_a
        return load, max(0.0, (device_a - load) / 2) if facts.shape == "ring" else 0.0, entered is not None
    load = entered if entered is not None else min(far, device_a)
    return load, max(0.0, (device_a - max(load, min(far, device_a))) / 2), entered is not None


def _entered(facts: Facts, place: str) -> float | None:
    if place in facts.new_nodes:
        beyond = facts.new_nodes[facts.new_nodes.index(place) :]
        loads = [item.load_a for item in facts.outlets if item.id in beyond]
        return None if any(load is None for load in loads) or not loads else sum(load or 0.0 for load in loads)
    there = [item.amps for item in facts.job.loads if item.point == place]
    return sum(there) if there else None


def conductor_factor(load_a: float, it_a: float, factors: float = 1.0) -> float:
    """Ct: how much less a conductor loses when it carries less than it could [1]. Source: Appendix 4, 6.1.

    Ct = [230 + tp - (Ca²Cg² - Ib²/It²)(tp - 30)] / (230 + tp), tp 70 °C; for conductors up to 16 mm².
    """
    tp = constant("voltdrop.ct_conductor_c").value
    base = constant("voltdrop.ct_constant").value
    ambient = constant("voltdrop.ct_ambient_c").value
    return (base + tp - (factors**2 - (load_a / it_a) ** 2) * (tp - ambient)) / (base + tp)


def drop_at(facts: Facts, place: str) -> Drop:
    """Voltage lost at one place [V]. New cable by its mV/A/m, existing cable by its resistance at 70 °C.

    Raises NotKnown while the resistance to the place is not known.
    """
    load, foot_load, entered = standing_load(facts, place)
    factor = constant("copper.running_70").value
    tail, foot = _tail(facts, place)
    lost, lines = 0.0, []
    for run in tail:
        if run.new and run.cable is not None:
            mv = mv_per_a_m(cable(run.cable).family, cable(run.cable).rated_as_mm2)
            step = mv.value * (run.length_m or 0.0) * load / 1000
            lines.append(f"{mv.value:g} mV/A/m × {run.length_m or 0:.1f} m × {load:g} A = {step:.2f} V")
        else:
            step = (run.ohms.line + run.ohms.neutral) * factor * load
            lines.append(
                f"to {facts.name(run.b)}: {run.ohms.line + run.ohms.neutral:.3f} Ω × 1.2 × {load:g} A = {step:.2f} V"
            )
        lost += step
    if foot != BOARD:
        own = facts.edit is not None and facts.edit.own_circuit
        if not own and (not facts.found.known or (foot in facts.found.unmeasured)):
            raise NotKnown(*facts.found.missing)
        r = facts.rn.get(foot, float("inf"))
        if not isfinite(r):
            raise NotKnown(*facts.found.missing)
        step = r * factor * (load + foot_load)
        lines.append(f"at {facts.name(foot)}: R1+Rn {r:.3f} Ω × 1.2 × ({load:g} + {foot_load:g}) A = {step:.2f} V")
        lost += step
    ct = _correction(facts, load + foot_load)
    lines.append(f"with Ct {ct:.3f} for cooler conductors: {lost * ct:.2f} V; the plain value is judged")
    return Drop(lost, lost * ct, load, entered, tuple(lines))


def _correction(facts: Facts, load_a: float) -> float:
    """Ct for the circuit's cable with half the load in each leg of a ring [1]; 1 where the cable is not known."""
    key = facts.circuit.cable
    if key is None:
        return 1.0
    from fieldtool.rules.capacity import existing_capacity

    try:
        capacity = existing_capacity(facts)
    except NotKnown:
        return 1.0
    leg = load_a / 2 if facts.shape == "ring" else load_a
    return min(1.0, conductor_factor(leg, max(capacity.amps, 1e-6)))


def _tail(facts: Facts, place: str) -> tuple[list[LayoutRun], str]:
    """The hung runs between a place and its foot on the trunk, nearest the foot first, and the foot."""
    runs: list[LayoutRun] = []
    here = place
    feeding = {run.b: run for run in facts.layout.runs if not run.on_ring}
    ring_nodes = {end for run in facts.layout.runs if run.on_ring for end in (run.a, run.b)}
    while here in feeding and here not in ring_nodes and len(runs) <= len(feeding):
        if facts.shape == "radial" and not feeding[here].new and here not in facts.new_nodes:
            break
        run = feeding[here]
        runs.append(run)
        here = run.a
    return list(reversed(runs)), here


@rule(
    "volt_drop",
    "525.202",
    "No more than 5 % lost to the farthest point.",
    needs=("device", "circuit.cable"),
    assumes=("20 A at the point and the rest spread", "place on the ring"),
)
def volt_drop(facts: Facts) -> Iterable[Finding]:
    """At every place. Over the limit on an assumed load is a condition, on an entered load a stop."""
    limit = volt_drop_limit(facts.job.supply.u0_v)
    gaps: list[Missing] = []
    for place in facts.places:
        try:
            drop = drop_at(facts, place)
        except NotKnown as gap:
            gaps.extend(gap.missing)
            continue
        shown = -(-drop.volts * 10 // 1) / 10
        kind = "entered" if drop.entered else "assumed"
        more = {
            "measured": drop.volts,
            "limit": limit.value,
            "unit": "V",
            "basis": limit,
            "working": (*drop.working, f"limit {limit.basis} = {limit.value:.2f} V"),
            "limit_key": "volt_drop",
            "assumed": (
                *facts.found.assumed,
                *(() if drop.entered else (f"{drop.load_a:g} A at the point that is judged",)),
            ),
        }
        says = f"Volt drop {shown:.1f} V at {facts.name(place)} on {kind} load, most {limit.value:.1f}."
        if drop.volts <= limit.value:
            yield holds(place, says, **more)
        elif drop.entered:
            yield breaks(place, says, "Shorten or thicken the cable, or move the load.", **more)
        else:
            do = f"See what load {facts.name(place)} really takes; over 5 % at {drop.load_a:g} A."
            yield on_condition(place, says, do, merge_key="volt drop on assumed load", **more)
    if gaps:
        raise NotKnown(*dict.fromkeys(gaps))
