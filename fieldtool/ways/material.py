"""What a way costs and what it obliges: cable and fittings for the van, tests to repeat, the paper it calls for."""

from __future__ import annotations

from fieldtool.answers import Material
from fieldtool.job.request import Request
from fieldtool.network.layout import LayoutRun
from fieldtool.reference.look import cable

__all__ = ["CERTIFICATE", "MINOR_WORKS", "RADIAL_TESTS", "RING_TESTS", "SPUR_TESTS", "material_for"]

MINOR_WORKS = "minor works form for this circuit"
CERTIFICATE = "installation certificate"

_AFTER = ("ir_live_e", "polarity", "zs", "rcd_ms", "rcd_button", "function")

SPUR_TESTS = ("r1_r2", *_AFTER)
"""A spur leaves the ring itself undisturbed only where no ring conductor was parted; its own cable is tested."""

RING_TESTS = ("r1", "rn", "r2", "ln_cross", "le_cross", *_AFTER)
"""The whole ring again, because its own conductors were disturbed (643.2.1)."""

RADIAL_TESTS = ("r1_r2", *_AFTER)

_KINDS = {
    "single": "single outlet and box",
    "twin": "twin outlet and box",
    "fcu": "fused connection unit and box",
    "appliance": "connection point and box",
    "joint": "joint box",
    "blank": "blank plate and box",
}


def material_for(
    request: Request,
    runs: tuple[LayoutRun, ...],
    *,
    fcu: int = 0,
    joint_boxes: int = 0,
    extra: tuple[str, ...] = (),
) -> tuple[Material, ...]:
    """Cable by kind [m], an accessory and box for each outlet, and what a way needs besides."""
    metres: dict[str, float] = {}
    for run in runs:
        if run.cable is not None:
            metres[run.cable] = metres.get(run.cable, 0.0) + (run.length_m or 0.0)
    out = [Material(cable(key).words, round(length, 1), "m") for key, length in metres.items()]
    count: dict[str, int] = {}
    for outlet in request.outlets:
        count[_KINDS[outlet.kind]] = count.get(_KINDS[outlet.kind], 0) + 1
    if fcu:
        count["fused connection unit and box"] = count.get("fused connection unit and box", 0) + fcu
    if joint_boxes:
        count["joint box and connectors"] = joint_boxes
    out += [Material(what, float(number)) for what, number in count.items()]
    out += [Material(what, 1.0) for what in extra]
    return tuple(out)
