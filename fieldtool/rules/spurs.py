"""Spurs, terminals and joints: what may hang on what, and whether it can be connected properly."""

from __future__ import annotations

from collections.abc import Iterable

from fieldtool.answers import Finding
from fieldtool.network.layout import BOARD
from fieldtool.reference.look import constant, terminals_take
from fieldtool.rules.engine import rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.needs import places_joined
from fieldtool.rules.say import breaks, holds, on_condition


def _role(*roles: str):  # type: ignore[no-untyped-def]
    return lambda facts: facts.edit is not None and facts.edit.role in roles


@rule(
    "one_accessory_per_unfused_spur",
    "433.1.204",
    "An unfused spur feeds one single or one twin outlet, or one fixed appliance.",
    applies=_role("unfused_spur"),
)
def one_accessory_per_unfused_spur(facts: Facts) -> Iterable[Finding]:
    """Guidance of Appendix 15 that the trade takes as the rule."""
    count = facts.edit.accessories_on_spur if facts.edit is not None else 0
    more = {"measured": float(count), "limit": 1.0}
    if count > 1:
        yield breaks(
            "route", f"{count} accessories on one unfused spur; one is the most.", "Put a fused unit first.", **more
        )
    else:
        yield holds("route", "One accessory on the unfused spur.", **more)


@rule(
    "spur_not_from_a_spur",
    "433.1.204",
    "A spur starts on the ring itself, never on a spur.",
    applies=lambda facts: (
        facts.edit is not None
        and facts.edit.shape == "ring"
        and facts.edit.role in ("unfused_spur", "fused_spur", "radial")
    ),
)
def spur_not_from_a_spur(facts: Facts) -> Iterable[Finding]:
    """A point behind a fused unit is under its fuse; any other point off the ring feeds no further spur."""
    edit = facts.edit
    assert edit is not None
    for place in edit.attach:
        point = facts.points.get(place)
        name = facts.name(place)
        if point is None:
            yield holds(place, f"Starts at {name}.")
        elif point.behind is not None or (point.kind == "fcu" and edit.fuse_a is not None):
            yield holds(place, f"{name} is behind a plug fuse.")
        elif point.spur_from is not None:
            yield breaks(place, f"{name} is on a spur. A spur may not feed a spur.", "Start from a point of the ring.")
        elif _reads_as_spur(facts, place):
            yield breaks(
                place, f"{name} reads as the end of a spur.", "Settle what it is: read L-E crossed there again."
            )
        else:
            yield holds(place, f"{name} is a point of the ring.")


def _reads_as_spur(facts: Facts, place: str) -> bool:
    leading = facts.reading.leading if facts.reading is not None else None
    if leading is None or leading.odds == "could_be":
        return False
    return any(item.what == "spur_length_m" and item.place == place for item in leading.inferred)


@rule(
    "radial_not_from_a_ring_spur",
    "433.1.204",
    "A swap on a spur leaves that spur with one accessory.",
    applies=_role("swap"),
)
def radial_not_from_a_ring_spur(facts: Facts) -> Iterable[Finding]:
    """A twin for a single is one accessory still; a spur that already feeds two is not added to."""
    edit = facts.edit
    assert edit is not None
    for place in edit.attach:
        others = [p.id for p in facts.points.values() if p.spur_from == place]
        point = facts.points.get(place)
        if point is not None and point.spur_from is not None and others and facts.shape == "ring":
            yield breaks(
                place, f"{facts.name(place)} sits on a spur that feeds more.", "Not to be extended as it stands."
            )
        elif point is not None and point.box_depth_mm is not None and point.box_depth_mm < 25:
            yield on_condition(place, "The box is shallow for a twin.", "Fit a box at least 35 mm deep.")
        else:
            yield holds(place, f"A twin at {facts.name(place)} is one accessory.")


@rule(
    "number_of_spurs",
    "Appendix 15",
    "No more unfused spurs than points on the ring.",
    applies=_role("unfused_spur"),
    advice=True,
)
def number_of_spurs(facts: Facts) -> Iterable[Finding]:
    """Guidance: it never blocks."""
    spurs = sum(p.spur_from is not None and p.behind is None for p in facts.points.values()) + 1
    points = sum(p.spur_from is None and p.behind is None for p in facts.points.values())
    word = "within" if spurs <= points else "over"
    do = "" if spurs <= points else "Guidance only: better to lengthen the ring."
    yield holds("route", f"{spurs} spurs with this one, {points} points: {word} guidance.", do=do)


@rule(
    "spur_length_rule_of_thumb",
    "Appendix 15",
    "An unfused spur no longer than an eighth of the way to the farthest point.",
    applies=_role("unfused_spur"),
    advice=True,
)
def spur_length_rule_of_thumb(facts: Facts) -> Iterable[Finding]:
    """A rule of thumb, useless at mid ring; the loop and the volt drop decide."""
    total = sum(run.length_m or 0.0 for run in facts.found.layout.runs if run.on_ring)
    metres = sum(run.length_m or 0.0 for run in facts.new_runs)
    if not total:
        yield holds("route", "Ring length not known: the rule of thumb is not used.")
        return
    thumb = constant("appendix15.spur_share").value * total / 2
    word = "within" if metres <= thumb else "over"
    yield holds("route", f"{metres:g} m of spur, {word} the {thumb:.1f} m of the rule of thumb.")


@rule(
    "board_spur_conditions",
    "433.1.204",
    "A spur from the board's terminals: room there, and identified.",
    needs=("circuit.terminal_room",),
    applies=lambda facts: (
        facts.edit is not None
        and facts.edit.attach == (BOARD,)
        and not facts.edit.own_circuit
        and bool(facts.new_nodes)
    ),
)
def board_spur_conditions(facts: Facts) -> Iterable[Finding]:
    """The board itself is opened: its incoming terminals stay live."""
    if facts.circuit.terminal_room == "no":
        yield breaks(BOARD, "No room in the way's terminals.", "Start from a point instead.")
    else:
        yield on_condition(
            BOARD, "Starts at the board: incoming terminals stay live.", "Board dead, and mark the spur there."
        )


@rule(
    "terminals_have_room",
    "526.1",
    "Terminals that take the conductors there will be.",
    applies=lambda facts: facts.edit is not None and bool(facts.edit.terminals),
)
def terminals_have_room(facts: Facts) -> Iterable[Finding]:
    """A BS 1363 outlet takes three of 2.5, two of 4 or one of 6 mm²; a joint box solves the rest."""
    edit = facts.edit
    assert edit is not None
    for place, sizes in edit.terminals:
        if not sizes:
            continue
        largest = max(sizes)
        most = terminals_take(largest)
        count = len(sizes)
        more = {"measured": float(count), "limit": most.value}
        text = f"{facts.name(place)}: {count} conductors in a terminal, {most.value:g} of {largest:g} mm² fit."
        cure = "joint_box" in (facts.request.cures if facts.request is not None else ())
        if count <= most.value:
            yield holds(place, text, **more)
        elif cure:
            yield on_condition(place, text, "Join in a joint box beside it, accessible.", **more)
        else:
            yield breaks(place, text, "A joint box beside it, or another point.", cures=("joint_box",), **more)


@rule(
    "joints_accessible",
    "526.3",
    "Joints that can be reached, or are of a maintenance-free kind.",
    applies=lambda facts: facts.edit is not None and facts.edit.joint_boxes > 0,
)
def joints_accessible(facts: Facts) -> Iterable[Finding]:
    """In a wall or under a floor a screw joint is not; where the ring's own current passes it carries its Iz."""
    edit, request = facts.edit, facts.request
    assert edit is not None
    assert request is not None
    if "maintenance_free_joint" in request.cures:
        yield holds("route", "Joint of a maintenance-free kind (BS 5733).")
    else:
        rating = "the cable's Iz" if edit.role in ("ring", "moved") or edit.disturbs_ring else "20 A"
        do = f"The joint can be reached for inspection, and its connector is rated for {rating}."
        yield on_condition("route", "A joint box: reachable, rated connector.", do)


@rule(
    "link_left_in",
    "433.1.204",
    "A ring whose later tests still prove it.",
    applies=lambda facts: facts.edit is not None and facts.edit.keeps_old_link,
)
def link_left_in(facts: Facts) -> Iterable[Finding]:
    """A link left in makes an interconnected ring, which ring tests no longer prove: a warned choice."""
    do = "Write at the board that the ring is interconnected; ring tests no longer prove it."
    yield on_condition(facts.circuit.id, "The old link stays in: an interconnected ring.", do)


@rule(
    "attachment_measured",
    "643.1",
    "A place of attachment that was read, dead and live, before it is added to.",
    applies=lambda facts: (
        facts.edit is not None and facts.edit.role not in ("none", "new_circuit") and bool(places_joined(facts))
    ),
    needs=("read.zs@attach",),
)
def attachment_measured(facts: Facts) -> Iterable[Finding]:
    """Zs at every place the new cable joins; for cable from the board, at the circuit's furthest point."""
    for place in places_joined(facts):
        reading = facts.read("zs", place)
        shown = f"{reading.value:.2f} Ω" if reading.value is not None else "open"
        yield holds(place, f"Zs read at {facts.name(place)}: {shown}.", origin="measured")


@rule(
    "worst_place_measured",
    "643.7.3",
    "The end of a radial read live as well as dead.",
    needs=("read.zs@end",),
    applies=lambda facts: (
        facts.edit is not None and facts.found.shape == "radial" and facts.edit.role not in ("none", "new_circuit")
    ),
)
def worst_place_measured(facts: Facts) -> Iterable[Finding]:
    """Zs at each end of the radial."""
    yield holds(facts.circuit.id, "Zs read at the radial's end.", origin="measured")
