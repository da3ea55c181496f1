"""Where the new outlets and cable go: wet rooms, outdoors, walls that are cut into."""

from __future__ import annotations

from collections.abc import Iterable

from fieldtool.answers import Finding
from fieldtool.reference.look import constant
from fieldtool.rules.engine import NotKnown, rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.needs import missing_for
from fieldtool.rules.say import advise, breaks, holds, on_condition


def _has_outlets(facts: Facts) -> bool:
    return facts.edit is not None and facts.edit.role != "none" and bool(facts.outlets)


@rule(
    "place_of_outlets",
    "512.2.1",
    "Outlets that suit the place they are put in.",
    needs=("outlets.where",),
    applies=_has_outlets,
)
def place_of_outlets(facts: Facts) -> Iterable[Finding]:
    """Near a bath the distance; outdoors the enclosure; in an outbuilding the earthing; in a kitchen advice."""
    for item in facts.outlets:
        if item.where == "bathroom":
            yield _bathroom(facts, item.id, item.zone_distance_m)
        elif item.where == "outdoors":
            yield on_condition(
                item.id, f"{item.name}: outdoors.", "An enclosure that keeps water out, and a sound seal."
            )
        elif item.where == "outbuilding":
            yield on_condition(
                item.id,
                f"{item.name}: in an outbuilding.",
                "Settle how the outbuilding is earthed, with any metal there that touches the ground.",
            )
        elif item.where == "kitchen":
            yield advise(item.id, f"{item.name}: in a kitchen.", "Keep clear of sink and hob (custom: 300 mm).")
        else:
            yield holds(item.id, f"{item.name}: indoors.")


def _bathroom(facts: Facts, place: str, distance: float | None) -> Finding:
    least = constant("bath.distance_m")
    if distance is None:
        raise NotKnown(*missing_for(facts, "outlets.zone_distance_m"))
    more = {"measured": distance, "limit": least.value, "unit": "m", "clause": "701.512.3"}
    if distance < least.value:
        return breaks(place, f"{distance:g} m from zone 1; {least.value:g} m is the least.", "Farther away.", **more)
    return holds(place, f"{distance:g} m from zone 1, least {least.value:g}.", **more)


@rule(
    "cutting_checked",
    "522.6.202",
    "Nothing cut or drilled before both faces were looked over for cables and pipes.",
    needs=("route.cutting",),
    applies=lambda facts: facts.edit is not None and bool(facts.new_runs),
)
def cutting_checked(facts: Facts) -> Iterable[Finding]:
    """A thin wall has two faces, each with safe zones of its own."""
    route = facts.request.route if facts.request is not None else None
    if route is None or route.cutting == "not_checked":
        yield breaks("route", "Cutting where nobody looked.", "Look over both faces for cables and pipes first.")
    else:
        yield holds("route", "Nothing is cut." if route.cutting == "nothing" else "Both faces were looked over.")
