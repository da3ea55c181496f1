"""Rules of the circuit as it was found: what cannot be relied on is not added to."""

from __future__ import annotations

from collections.abc import Iterable

from fieldtool.answers import Finding
from fieldtool.reference.look import cable
from fieldtool.rules.engine import NotKnown, rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.limits import insulation_limit
from fieldtool.rules.needs import missing_test
from fieldtool.rules.say import advise, breaks, holds, on_condition

BOARD = "board"


def stands(facts: Facts) -> bool:
    """True where the addition hangs on the circuit as found; False for a circuit of its own."""
    return facts.edit is None or not facts.edit.own_circuit


def is_ring(facts: Facts) -> bool:
    """True where the circuit as found is a ring."""
    return facts.found.shape == "ring" and stands(facts)


@rule("shape_known", "643.2.1", "A circuit whose shape is known.", applies=stands)
def shape_known(facts: Facts) -> Iterable[Finding]:
    """Neither a label nor two cables at an outlet make a ring."""
    if facts.found.shape == "unknown":
        raise NotKnown(*(missing_test(facts, test, None) for test in ("r1", "rn", "r2")))
    yield holds(facts.circuit.id, f"Judged as a {facts.found.shape}.")


@rule(
    "board_condition",
    "132.16",
    "A board without heat or damage.",
    needs=("board.condition",),
)
def board_condition(facts: Facts) -> Iterable[Finding]:
    """Heat or damage stops; obsolete gear is told in writing."""
    state = facts.board.condition
    if state in ("heat", "damaged"):
        yield breaks(BOARD, f"Board: {state.replace('heat', 'signs of heat')}.", "Have it put right before anything.")
    elif state in ("obsolete", "worn"):
        yield on_condition(BOARD, f"Board: {state}.", "Tell the client in writing that the board is old.")
    else:
        yield holds(BOARD, "Board by eye: good.")


@rule(
    "device_known",
    "432.1",
    "A device whose standard, type and rating are known.",
    needs=("device",),
)
def device_known(facts: Facts) -> Iterable[Finding]:
    """The rating is one that the device is made in; damaged or hot gear stops."""
    device, kind = facts.device, facts.device_type
    if device.in_a not in kind.ratings_a:
        made = ", ".join(f"{value:g}" for value in kind.ratings_a)
        yield breaks(BOARD, f"No {kind.words} is made for {device.in_a:g} A.", f"Look again: it is one of {made} A.")
    elif device.condition in ("heat", "damaged"):
        yield breaks(BOARD, f"The device is {device.condition}.", "Have it replaced before anything is added.")
    elif kind.kind == "rewireable":
        yield on_condition(
            BOARD, f"{kind.words} {device.in_a:g} A.", "See the right wire in the carrier; tell the client."
        )
    else:
        yield holds(BOARD, f"{kind.words} {device.in_a:g} A, {kind.standard}.")


@rule(
    "no_signs_of_heat",
    "132.16",
    "No sign of heat anywhere on the circuit.",
    needs=("circuit.heat_seen",),
    applies=stands,
)
def no_signs_of_heat(facts: Facts) -> Iterable[Finding]:
    """Browning, smell or an occupier's report stops until it is explained."""
    hot = [point.name or point.id for point in facts.points.values() if point.condition == "heat"]
    bad = [point.name or point.id for point in facts.points.values() if point.condition == "damaged"]
    if facts.circuit.heat_seen == "yes" or hot:
        where = f" at {', '.join(hot)}" if hot else ""
        yield breaks(facts.circuit.id, f"Signs of heat{where}.", "Stop until the heat is explained and put right.")
    elif bad:
        yield breaks(facts.circuit.id, f"Damaged: {', '.join(bad)}.", "Put it right before anything is added.")
    else:
        yield holds(facts.circuit.id, "No sign of heat seen or reported.")


@rule(
    "no_back_feed",
    "551.7.2",
    "Nothing on the circuit that feeds back into it.",
    needs=("circuit.back_feed",),
    applies=stands,
)
def no_back_feed(facts: Facts) -> Iterable[Finding]:
    """Plug-in solar, an inverter or a lead with two plugs keeps the circuit live when it is off."""
    found = facts.circuit.back_feed
    if found == "none":
        yield holds(facts.circuit.id, "Nothing feeds back into the circuit.")
    else:
        yield breaks(
            facts.circuit.id,
            "Something feeds back into the circuit." if found == "found" else "Not known whether something feeds back.",
            "Find it, unplug it, and settle how it is connected before any dead test.",
        )


@rule(
    "no_other_circuit_inside",
    "314.4",
    "No other circuit in its boxes, and no conductor shared with one.",
    needs=("circuit.other_circuits_in_boxes",),
    applies=stands,
)
def no_other_circuit_inside(facts: Facts) -> Iterable[Finding]:
    """A second circuit in a box is isolated too; a shared neutral stops."""
    neutrals = facts.maybe("ir_neutrals")
    if neutrals is not None and neutrals.value is not None and neutrals.value < insulation_limit().value:
        yield breaks(
            facts.circuit.id, "Its neutral meets another circuit's.", "Trace and part the shared neutral first."
        )
    elif facts.circuit.other_circuits_in_boxes == "yes":
        yield on_condition(
            facts.circuit.id,
            "Another circuit sits in one of its boxes.",
            "Isolate and prove dead both circuits before that box is opened.",
        )
    else:
        yield holds(facts.circuit.id, "No other circuit in its boxes.")


@rule(
    "special_place",
    "Part 7",
    "Not in or near a place that has rules of its own.",
    needs=("site.special_place",),
)
def special_place(facts: Facts) -> Iterable[Finding]:
    """Pools, boats, caravans, farms and medical places are outside what this tool judges."""
    site = facts.job.site
    if site.special_place == "yes" or site.premises == "special":
        yield breaks(BOARD, "A special place: outside what this tool judges.", "Refer it to somebody who knows Part 7.")
    else:
        yield holds(BOARD, "No special place.")


@rule(
    "no_asbestos",
    "132.16",
    "No suspicion of asbestos where it will be opened or drilled.",
    needs=("site.asbestos",),
)
def no_asbestos(facts: Facts) -> Iterable[Finding]:
    """Old flash guards, boards and textured coatings: do not open, do not drill."""
    if facts.job.site.asbestos == "yes":
        yield breaks(BOARD, "Asbestos suspected: do not open, do not drill.", "Have it surveyed first.")
    else:
        yield holds(BOARD, "No suspicion of asbestos.")


@rule(
    "cable_fit_to_extend",
    "134.1.1",
    "Cable of a kind, and in a state, that can be extended.",
    needs=("circuit.cable", "circuit.cable_condition"),
    applies=stands,
)
def cable_fit_to_extend(facts: Facts) -> Iterable[Finding]:
    """Rubber, lead, aluminium and cable without an earth are not extended as they stand."""
    kind = cable(facts.circuit.cable or "unknown")
    state = facts.circuit.cable_condition
    if not kind.extendable:
        yield breaks(facts.circuit.id, f"{kind.words}: not to be extended as it stands.", "Advise a new circuit.")
    elif state in ("crumbling", "damaged"):
        yield breaks(facts.circuit.id, f"The cable is {state}.", "Do not move it; advise a new circuit.")
    elif state == "mixed_colours":
        yield on_condition(
            facts.circuit.id,
            "Old and new conductor colours together.",
            "Put the two-colours notice at the board.",
            clause="514.14",
        )
    else:
        yield holds(facts.circuit.id, f"{kind.words}, sound.")


@rule(
    "conductors_at_the_way",
    "643.2.1",
    "As many conductors at the way as the shape has.",
    needs=("circuit.line_ends", "circuit.neutral_ends", "circuit.cpc_ends"),
    applies=stands,
)
def conductors_at_the_way(facts: Facts) -> Iterable[Finding]:
    """A ring has two of each at one way; an odd count means two ways, a shared neutral or a spur at the board."""
    circuit = facts.circuit
    counts = (circuit.line_ends, circuit.neutral_ends, circuit.cpc_ends)
    text = f"{counts[0]} line, {counts[1]} neutral, {counts[2]} earth"
    least = 2 if facts.found.shape == "ring" else 1
    if len(set(counts)) != 1:
        yield breaks(circuit.id, f"At the way: {text}. They do not match.", "Match every leg by measurement first.")
    elif (counts[0] or 0) < least:
        yield breaks(circuit.id, f"At the way: {text}; a ring has two of each.", "The other leg may be in another way.")
    elif (counts[0] or 0) > least and facts.found.shape == "ring":
        yield on_condition(circuit.id, f"At the way: {text}: a spur from the board?", "Prove each leg by measurement.")
    else:
        yield holds(circuit.id, f"At the way: {text}.")


@rule(
    "old_spur_not_to_be_extended",
    "433.1.204",
    "A spur that already feeds more than one accessory is not added to as it stands.",
    applies=is_ring,
)
def old_spur_not_to_be_extended(facts: Facts) -> Iterable[Finding]:
    """Right by old rules; not to be extended. Elsewhere on the ring it is told to the client."""
    fed: dict[str, list[str]] = {}
    for point in facts.points.values():
        root = point
        while root.spur_from is not None and root.behind is None:
            parent = facts.points[root.spur_from]
            if parent.spur_from is None:
                break
            root = parent
        if point.spur_from is not None and point.behind is None and point.kind != "joint":
            fed.setdefault(root.id, []).append(point.id)
    long = {root: ids for root, ids in fed.items() if len(ids) > 1}
    attach = facts.edit.attach if facts.edit is not None else ()
    if not long:
        yield holds(facts.circuit.id, "No spur feeds more than one accessory.")
    for start, ids in long.items():
        name = facts.name(start)
        if any(place in ids for place in attach):
            yield breaks(
                start, f"Two outlets on the old spur at {name}: not to be extended.", "Choose a point of the ring."
            )
        else:
            yield advise(start, f"The spur at {name} feeds {len(ids)}: right once.", "Tell the client in writing.")
