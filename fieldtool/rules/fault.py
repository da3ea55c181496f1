"""Fault current: conductors that withstand it until the device parts it."""

from __future__ import annotations

from collections.abc import Iterable
from math import sqrt

from fieldtool.answers import Finding
from fieldtool.reference.look import OutsideTable, cable, let_through_a2s
from fieldtool.rules.engine import rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.say import breaks, holds, on_condition

_FUSE_TIME_S = 0.4
"""A fuse that meets its loop limit parts within this time [s] (411.3.2.2)."""


def _cables(facts: Facts) -> tuple[str, ...]:
    own = facts.edit is not None and facts.edit.own_circuit
    behind = facts.edit is not None and facts.edit.fuse_a is not None
    keys = [] if own or facts.circuit.cable is None else [facts.circuit.cable]
    keys += [] if behind else [run.cable for run in facts.new_runs if run.cable]
    return tuple(dict.fromkeys(keys))


@rule(
    "earth_conductor_withstands",
    "543.1.3",
    "An earth conductor, and a line conductor, that withstand a fault until the device parts it.",
    needs=("device", "circuit.cable", "read.pfc"),
)
def earth_conductor_withstands(facts: Facts) -> Iterable[Finding]:
    """k²S² against the device's let-through at the prospective current of the board (434.5.2).

    Class 3 breakers by the published classes at that current; beyond them by the maker's own figure. Fuses and
    old breakers by the adiabatic equation at the loop's own current and 0.4 s.
    """
    for key in _cables(facts):
        kind = cable(key)
        if kind.cpc_mm2 is None:
            yield on_condition(
                facts.circuit.id,
                f"{kind.words}: size of its earth not known.",
                "See the earth conductor's size, or rely on measured resistance and the maker's let-through.",
            )
            continue
        yield _withstand(facts, key, kind.cpc_mm2, kind.k)


def _withstand(facts: Facts, key: str, cpc_mm2: float, k: float) -> Finding:
    bears = (k * cpc_mm2) ** 2
    words = cable(key).words
    device, fault = facts.device, facts.pfc_a
    start = f"k²S² = {k:g}² × {cpc_mm2:g}² = {bears:.0f} A²s"
    if facts.device_type.kind in ("breaker", "rcbo") and facts.device_type.zs == "multiple":
        energy, source = device.let_through_a2s, "the maker's let-through"
        if energy is None and device.energy_class == 3:
            try:
                figure = let_through_a2s(facts.device_type.curve, device.in_a, fault)
                energy, source = figure.value, f"class 3 at {fault / 1000:.2f} kA ({figure.provenance.cite()})"
            except OutsideTable:
                energy = None
        more = {
            "measured": energy,
            "limit": bears,
            "unit": "A2s",
            "working": (start, f"{source}: {energy or 0:.0f} A²s"),
        }
        if energy is not None and energy <= bears:
            return holds(facts.circuit.id, f"{words}: earth bears {bears:.0f} A²s, {energy:.0f} come.", **more)
        if device.let_through_a2s is not None:
            return breaks(
                facts.circuit.id, f"{words}: earth bears {bears:.0f}, {energy:.0f} come.", "Another device.", **more
            )
        do = f"See that the maker's let-through at {fault / 1000:.2f} kA is below {bears:.0f} A²s."
        return on_condition(facts.circuit.id, f"{words}: its class alone does not prove the earth.", do, **more)
    current = facts.job.supply.u0_v / max(_least_loop(facts), 1e-6)
    needed = sqrt(current**2 * _FUSE_TIME_S) / k
    line = f"S = √(I²t)/k = √({current:.0f}² × {_FUSE_TIME_S:g})/{k:g} = {needed:.2f} mm²"
    more = {
        "measured": needed,
        "limit": cpc_mm2,
        "unit": "mm2",
        "working": (line, "t is the time a fuse that meets its loop limit takes"),
    }
    if needed <= cpc_mm2:
        return holds(facts.circuit.id, f"{words}: earth {cpc_mm2:g} mm², needs {needed:.2f}.", **more)
    do = "A fault near the board parts faster than this; see the fuse's own curve."
    return on_condition(facts.circuit.id, f"{words}: earth {cpc_mm2:g} mm², {needed:.2f} by 0.4 s.", do, **more)


def _least_loop(facts: Facts) -> float:
    """The loop at the end of the circuit, where the fuse takes longest [ohm]."""
    values = [facts.loop(place).value for place in facts.places]
    return max(values, default=facts.zdb.value or 1.0)
