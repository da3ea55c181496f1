"""Overload: cable and device matched, on radials, on rings, and behind a plug fuse."""

from __future__ import annotations

from collections.abc import Iterable

from fieldtool.answers import Finding
from fieldtool.network.loads import flows
from fieldtool.quantities.show import round_iz_down
from fieldtool.reference.look import cable, constant
from fieldtool.rules.capacity import Capacity, existing_capacity, new_capacity
from fieldtool.rules.engine import rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.say import advise, breaks, holds, on_condition


def _adds(facts: Facts) -> bool:
    return facts.edit is not None and facts.edit.role != "none"


def _ring_cable(facts: Facts) -> bool:
    """New cable that the ring rule speaks of: part of the ring, or an unfused spur of it."""
    edit = facts.edit
    return edit is not None and edit.shape == "ring" and edit.role in ("unfused_spur", "ring", "moved")


def _needed(facts: Facts) -> tuple[float, str]:
    """What a radial's cable must carry: the device, or 1/0.725 of it for a rewireable fuse (433.1.202)."""
    rated = facts.device.in_a
    if facts.device_type.kind != "rewireable":
        return rated, f"In {rated:g} A"
    factor = constant("semi_enclosed.factor").value
    return rated / factor, f"In {rated:g} / {factor:g} = {rated / factor:.1f} A (rewireable)"


def _match(place: str, capacity: Capacity, needed: float, text: str, do: str, **more: object) -> Finding:
    shown = round_iz_down(capacity.amps)
    common = {
        "measured": capacity.amps,
        "limit": needed,
        "unit": "A",
        "working": (capacity.working, f"needed: {text}"),
        "limit_key": "iz",
        **more,
    }
    if capacity.amps + 1e-9 >= needed:
        return holds(place, f"Cable carries {shown:g} A as installed, least {needed:.3g}.", **common)
    return breaks(place, f"Cable carries {shown:g} A as installed, least {needed:.3g}.", do, **common)


@rule(
    "radial_cable_carries_device",
    "433.1.1",
    "On a radial, cable that carries at least the device's rating after every factor.",
    needs=("device", "circuit.cable", "install.method"),
    applies=lambda facts: facts.shape == "radial" and not (facts.edit is not None and facts.edit.own_circuit),
)
def radial_cable_carries_device(facts: Facts) -> Iterable[Finding]:
    """In ≤ Iz for the existing cable, where it is least."""
    needed, text = _needed(facts)
    yield _match(facts.circuit.id, existing_capacity(facts), needed, text, "A smaller device, or leave it as it is.")


@rule(
    "new_cable_carries_device",
    "433.1.1",
    "New cable ahead of any plug fuse that carries at least the device's rating.",
    needs=("device", "route.method"),
    applies=lambda facts: (
        _adds(facts)
        and bool(facts.new_runs)
        and not _ring_cable(facts)
        and facts.edit is not None
        and facts.edit.fuse_a is None
    ),
)
def new_cable_carries_device(facts: Facts) -> Iterable[Finding]:
    """In ≤ Iz for new cable; a smaller tail that its load cannot overload is a designer's choice (433.3.1)."""
    needed, text = _needed(facts)
    finding = _match("route", new_capacity(facts), needed, text, "Heavier cable, or put it behind a fuse.")
    yield finding


@rule(
    "cable_behind_fuse",
    "433.1.1",
    "Cable behind a plug fuse that carries at least the fuse's rating.",
    needs=("route.method",),
    applies=lambda facts: facts.edit is not None and facts.edit.fuse_a is not None and bool(facts.new_runs),
)
def cable_behind_fuse(facts: Facts) -> Iterable[Finding]:
    """The fuse, at most 13 A, is the device of what lies beyond it; 1.5 mm² is common there."""
    fuse = (facts.edit.fuse_a if facts.edit is not None else None) or 13.0
    most = constant("fcu.most_a").value
    if fuse > most:
        yield breaks("route", f"A plug fuse is at most {most:g} A, not {fuse:g}.", "Choose 3 or 13 A.", limit=most)
        return
    yield _match("route", new_capacity(facts), fuse, f"fuse {fuse:g} A", "Heavier cable, or a smaller fuse.")


@rule(
    "load_behind_fuse",
    "433.1.1",
    "A load that the plug fuse carries.",
    applies=lambda facts: facts.edit is not None and facts.edit.fuse_a is not None,
)
def load_behind_fuse(facts: Facts) -> Iterable[Finding]:
    """Entered loads beyond one fuse, existing ones behind it included, add up to no more than its rating."""
    edit = facts.edit
    assert edit is not None
    fuse = edit.fuse_a or 13.0
    heads = {*edit.attach, *(head for node, head in facts.layout.behind if node in edit.attach)}
    behind = {node for node, head in facts.layout.behind if head in heads}
    there = [item for item in facts.job.loads if item.point in behind]
    load = sum(item.load_a or 0.0 for item in facts.outlets) + sum(item.amps for item in there)
    known = any(item.load_a is not None for item in facts.outlets) or bool(there)
    more = {"measured": load, "limit": fuse, "unit": "A", "limit_key": "fuse"}
    if not known:
        yield holds("route", f"No load entered: the {fuse:g} A fuse is the most it can take.", limit=fuse, unit="A")
    elif load > fuse:
        yield breaks("route", f"Load {load:.1f} A is over the {fuse:g} A fuse.", "Not behind one plug fuse.", **more)
    else:
        yield holds("route", f"Load {load:.1f} A of the {fuse:g} A fuse.", **more)


@rule(
    "ring_device",
    "433.1.204",
    "A ring behind a 30 or 32 A device.",
    needs=("device",),
    applies=lambda facts: facts.shape == "ring",
)
def ring_device(facts: Facts) -> Iterable[Finding]:
    """Another rating makes it no ring of this rule."""
    low, high = constant("ring.device_a").value, constant("ring.device_most_a").value
    rated = facts.device.in_a
    more = {"measured": rated, "limit": high, "unit": "A"}
    if low <= rated <= high:
        yield holds("board", f"Ring device {rated:g} A.", **more)
    elif rated < low:
        yield on_condition(
            "board", f"Ring behind {rated:g} A: less than usual.", "Tell the client what it can carry.", **more
        )
    else:
        yield breaks("board", f"Ring behind {rated:g} A; 30 or 32 is the most.", "Change the device first.", **more)


@rule(
    "ring_cable",
    "433.1.204",
    "Ring cable of at least 2.5 mm² that carries at least 20 A as installed.",
    needs=("circuit.cable", "install.method"),
    applies=lambda facts: facts.shape == "ring",
)
def ring_cable(facts: Facts) -> Iterable[Finding]:
    """Size and Iz of the existing ring where it is least; 1.5 mm² only in mineral cable."""
    kind = cable(facts.circuit.cable or "unknown")
    least = constant("ring.least_area_mm2").value
    if kind.rated_as_mm2 < least and not kind.key.startswith("mineral"):
        yield breaks(
            facts.circuit.id,
            f"{kind.words} on a ring; {least:g} mm² is the least.",
            "Not to be added to as a ring.",
            measured=kind.rated_as_mm2,
            limit=least,
            unit="mm2",
        )
        return
    floor = constant("ring.least_iz_a")
    yield _match(facts.circuit.id, existing_capacity(facts), floor.value, "ring, 20 A", "Better how it lies first.")


@rule(
    "new_ring_cable",
    "433.1.204",
    "New cable of the ring, or of an unfused spur, of at least 2.5 mm² and 20 A as installed.",
    needs=("route.method",),
    applies=lambda facts: _ring_cable(facts) and bool(facts.new_runs),
)
def new_ring_cable(facts: Facts) -> Iterable[Finding]:
    """The unfused spur is under the same rule as the ring itself."""
    least = constant("ring.least_area_mm2").value
    for key in dict.fromkeys(run.cable for run in facts.new_runs if run.cable):
        kind = cable(key)
        if kind.rated_as_mm2 < least:
            yield breaks(
                "route",
                f"{kind.words}: {least:g} mm² is the least here.",
                "2.5 mm², or put it behind a plug fuse.",
                measured=kind.rated_as_mm2,
                limit=least,
                unit="mm2",
            )
            return
    floor = constant("ring.least_iz_a")
    yield _match("route", new_capacity(facts), floor.value, "ring, 20 A", "Another route, or heavier cable.")


@rule(
    "ring_share",
    "433.1.204",
    "No run of the ring carries more than its Iz for long under the loads entered.",
    needs=("circuit.cable", "install.method", "layout"),
    applies=lambda facts: facts.shape == "ring",
)
def ring_share(facts: Facts) -> Iterable[Finding]:
    """Lasting loads entered at points share between the legs as the network gives it; without any it is advice."""
    loads: dict[str, float] = {}
    names = []
    for load in facts.job.loads:
        if load.circuit == facts.circuit.id and load.lasting and load.point in facts.layout.nodes:
            loads[load.point] = loads.get(load.point, 0.0) + load.amps
            names.append(f"{load.name or load.id} {load.amps:g} A")
    for item in facts.outlets:
        if item.load_a and item.lasting and item.id in facts.layout.nodes:
            loads[item.id] = loads.get(item.id, 0.0) + item.load_a
            names.append(f"{item.name} {item.load_a:g} A")
    capacity = existing_capacity(facts)
    if not loads:
        yield advise(
            facts.circuit.id,
            "No lasting load entered: the legs' shares are not judged.",
            "Enter heavy loads near one end of the ring, where there are any.",
        )
        return
    shown = flows(facts.grid, loads)
    ring = {run.id: abs(shown.run_a[run.id]) for run in facts.layout.runs if run.on_ring}
    worst = max(ring, key=lambda run_id: ring[run_id])
    run = facts.layout.run(worst)
    where = f"{facts.name(run.a)} to {facts.name(run.b)}"
    more = {
        "measured": ring[worst],
        "limit": capacity.amps,
        "unit": "A",
        "working": (capacity.working, f"loads {', '.join(names)}; {where} carries {ring[worst]:.1f} A"),
        "limit_key": "leg",
    }
    if ring[worst] > capacity.amps:
        do = "Move the load towards the middle of the ring, or give it a circuit of its own."
        yield breaks(worst, f"{where} carries {ring[worst]:.1f} A of {capacity.amps:.1f}.", do, **more)
    else:
        yield holds(worst, f"{where} carries most: {ring[worst]:.1f} A of {capacity.amps:.1f}.", **more)


@rule(
    "own_circuit_for_heavy_load",
    "433.1.204",
    "Heating of whole rooms, large water heaters, cookers and vehicle charging on circuits of their own.",
    needs=("outlets.heating_or_cooking",),
    applies=lambda facts: (
        _adds(facts) and bool(facts.outlets) and facts.edit is not None and not facts.edit.own_circuit
    ),
)
def own_circuit_for_heavy_load(facts: Facts) -> Iterable[Finding]:
    """Not on a socket ring (common practice, from memory); other fixed loads over 2 kW are advice."""
    line = constant("fixed_load.advice_w").value / facts.job.supply.u0_v
    for item in facts.outlets:
        if item.heating_or_cooking == "yes":
            yield breaks(
                item.id,
                f"{item.name}: heating, cooking or charging.",
                "Give it a circuit of its own.",
                designer_may_decide=True,
            )
        elif item.kind == "appliance" and (item.load_a or 0.0) > line:
            yield advise(item.id, f"{item.name}: {item.load_a:.1f} A, over 2 kW.", "Better on a circuit of its own.")
        else:
            yield holds(item.id, f"{item.name}: no load that needs its own circuit.")
