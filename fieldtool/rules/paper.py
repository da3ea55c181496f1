"""Paper and premises: which document the work needs, who must be told, what some premises require."""

from __future__ import annotations

from collections.abc import Iterable

from fieldtool.answers import Finding
from fieldtool.reference.look import constant
from fieldtool.rules.engine import rule
from fieldtool.rules.facts import Facts
from fieldtool.rules.say import advise, holds, on_condition

_ARC_FAULT = ("hmo", "high_rise", "student", "care")


def _adds(facts: Facts) -> bool:
    return facts.edit is not None and facts.edit.role != "none"


@rule("document", "644.1", "The document that this work calls for.", applies=_adds, advice=True)
def document(facts: Facts) -> Iterable[Finding]:
    """Minor works for an addition to one circuit; an installation certificate where a device or circuit is new."""
    edit = facts.edit
    assert edit is not None
    do = f"Write the {edit.document}; a landlord gets a copy." if facts.job.site.tenure in _LET else ""
    yield holds("board", f"Needs: {edit.document}.", do=do or f"Write the {edit.document}.")


_LET = ("private_rent", "social_rent")


@rule(
    "notifiable",
    "120.3",
    "Whether the work must be notified, by the rules of the nation.",
    applies=_adds,
    advice=True,
)
def notifiable(facts: Facts) -> Iterable[Finding]:
    """New circuits, boards and special places in England; more in Wales; Scotland and Northern Ireland differ."""
    nation, edit = facts.job.site.nation, facts.edit
    assert edit is not None
    where = [item.where for item in facts.outlets]
    new = edit.own_circuit or edit.needs_way
    if nation is None:
        said = "Nation not given: local building rules decide."
    elif nation == "england":
        said = (
            "England: to be notified."
            if new or "bathroom" in where
            else "England: an addition, as a rule not notified."
        )
    elif nation == "wales":
        said = "Wales: kitchens and outdoors are notified too; check."
    else:
        said = f"{nation.replace('_', ' ').title()}: its own building rules decide."
    yield advise("board", said, "Check the local building-control rules.")


@rule(
    "arc_fault_detection",
    "421.1.7",
    "Arc fault detection for socket circuits where the premises call for it.",
    needs=("site.premises",),
    applies=_adds,
)
def arc_fault_detection(facts: Facts) -> Iterable[Finding]:
    """Required in higher-risk residential buildings, shared houses, student housing and care homes."""
    premises = facts.job.site.premises
    cure = "arc_fault_device" in (facts.request.cures if facts.request is not None else ())
    if premises not in _ARC_FAULT:
        yield holds("board", "Arc fault detection: recommended here, not required.")
    elif facts.circuit.arc_fault_device == "yes":
        yield holds("board", "Arc fault detection is fitted.")
    else:
        word = "is part of the work" if cure else "is called for here"
        yield on_condition(
            "board", f"Arc fault detection {word}.", "Fit an arc fault device on this circuit before energising."
        )


@rule(
    "high_protective_current",
    "543.7",
    "Two earths, separately terminated, where much IT equipment leaks to earth.",
    advice=True,
    applies=lambda facts: (facts.circuit.it_items or 0) > 0,
)
def high_protective_current(facts: Facts) -> Iterable[Finding]:
    """By a count of items: about 1 mA each is common practice; over 10 mA in all the rule speaks."""
    most = constant("high_current.total_ma").value
    items = facts.circuit.it_items or 0
    over = items > most
    do = "Measure it with a clamp; both earth ends separately terminated." if over else ""
    yield holds(facts.circuit.id, f"{items} items of IT equipment: about {items} mA of {most:g}.", do=do)


@rule("floor_area", "Appendix 15", "Floor area within the guidance.", advice=True)
def floor_area(facts: Facts) -> Iterable[Finding]:
    """Guidance, no longer a limit: it never blocks."""
    area = facts.circuit.floor_area_m2
    ring = facts.shape == "ring"
    small = facts.circuit.device is not None and facts.circuit.device.in_a <= 20
    key = "floor_ring_m2" if ring else "floor_radial_20_m2" if small else "floor_radial_32_m2"
    most = constant(f"appendix15.{key}").value
    if area is None:
        yield holds(facts.circuit.id, "Floor area not given: guidance not judged.")
    else:
        word = "within" if area <= most else "over"
        yield holds(facts.circuit.id, f"{area:g} m², {word} the {most:g} m² of guidance.")
