"""Questions that several ways ask of a setting: which shape, which place, which neighbours."""

from __future__ import annotations

from dataclasses import replace

from fieldtool.job.place import Device, Rcd
from fieldtool.network.layout import BOARD, Layout, LayoutRun
from fieldtool.reference.look import cable
from fieldtool.ways.way import Refusal, Setting

__all__ = [
    "need_outlets",
    "need_point",
    "need_radial",
    "need_ring",
    "neighbour_run",
    "re_end",
    "sizes_at",
    "twenty_amp",
]

_NOT_RING = Refusal("this circuit is not a ring", "433.1.204", applies=False)
_NOT_RADIAL = Refusal("this circuit is not a radial", "433.1.1", applies=False)


def need_ring(setting: Setting) -> Refusal | None:
    """A refusal where the circuit is not a ring."""
    return None if setting.found.shape == "ring" else _NOT_RING


def need_radial(setting: Setting) -> Refusal | None:
    """A refusal where the circuit is not a radial."""
    return None if setting.found.shape == "radial" else _NOT_RADIAL


def need_outlets(setting: Setting) -> Refusal | None:
    """A refusal where nothing new is asked for, or where what is asked for is a swap."""
    if setting.request.swap is not None:
        return Refusal("a swap is asked for, not a new outlet", applies=False)
    return None if setting.request.outlets else Refusal("no outlet is asked for yet", applies=False)


def need_point(setting: Setting) -> Refusal | None:
    """A refusal where the request names no existing point to start from."""
    request = setting.request
    if request.attach == "board":
        return Refusal("the request starts at the board", applies=False)
    if request.at is None:
        return Refusal("name the point to start from")
    if request.at not in setting.layout.nodes:
        return Refusal("that point is not on this circuit's layout yet")
    return None


def neighbour_run(setting: Setting) -> LayoutRun | Refusal:
    """The one run between the request's two neighbours on the ring, or why there is none."""
    request = setting.request
    a, b = request.at, request.other
    if request.attach != "between" or a is None or b is None:
        return Refusal("name the two neighbours it goes between", applies=request.attach == "between")
    for run in setting.layout.runs:
        if {run.a, run.b} == {a, b} and run.on_ring:
            return run
    names = f"{setting.job.point_name(a)} and {setting.job.point_name(b)}"
    return Refusal(f"{names} are not neighbours on the ring")


def re_end(layout: Layout, run_id: str, old: str, new: str) -> Layout:
    """The layout with one end of a run moved from node ``old`` to node ``new``."""
    run = layout.run(run_id)
    moved = replace(run, a=new if run.a == old else run.a, b=new if run.b == old else run.b)
    return layout.with_runs((moved,), (run_id,))


def sizes_at(setting: Setting, place: str, extra: tuple[str, ...]) -> tuple[tuple[str, tuple[float, ...]], ...]:
    """Conductor sizes in one accessory's terminals after the work [mm²]; empty where the cables are not known.

    ``extra`` are the catalogue keys of the cables that join those already there.
    """
    if place == BOARD:
        return ()
    point = setting.point(place)
    found = setting.circuit.cable
    line = cable(found).line_mm2 if found else None
    if line is None:
        return ()
    there = point.cables if point is not None and point.cables is not None else len(setting.layout.at(place))
    new = tuple(cable(key).line_mm2 or 0.0 for key in extra)
    return ((place, (line,) * there + new),)


def twenty_amp(setting: Setting) -> tuple[Device, Rcd | None]:
    """A 20 A device of the board's own kind, and the RCD that covers the circuit afterwards.

    Fuses and old breakers give way to a type B RCBO; its RCD part is 30 mA, type A (531.3.3).
    """
    now = setting.circuit.device
    if now is None or not now.type.startswith(("bs60898", "bs61009")):
        made = Device(type="bs61009_b", in_a=20.0, breaking_ka=6.0, energy_class=3)
        return made, Rcd(type="a", i_dn_ma=30.0, standard="61009")
    return now.model_copy(update={"in_a": 20.0}), setting.circuit.rcd
