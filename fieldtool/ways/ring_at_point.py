"""Ring lengthened at one point: one leg lifted there, out through the new outlets and back to meet it."""

from __future__ import annotations

from typing import Literal

from fieldtool.network.layout import BOARD
from fieldtool.ways.material import MINOR_WORKS, RING_TESTS, material_for
from fieldtool.ways.places import need_outlets, need_point, need_radial, need_ring, re_end
from fieldtool.ways.ring_between import return_run
from fieldtool.ways.way import Edit, Refusal, Setting, chain_of, way


def _loop_out(setting: Setting, at: str, role: Literal["ring", "moved"], *, box_kept: bool) -> Edit | Refusal:
    ring = [run for run in setting.layout.at(at) if run.on_ring]
    if len(ring) < 2:
        return Refusal("that point is not on the ring itself", "433.1.204")
    request = setting.request
    lifted = ring[-1]
    joint = f"jb_{request.outlets[0].id}"
    out = chain_of(setting, at)
    back = return_run(setting, request.outlets[-1].id, joint)
    layout = re_end(setting.layout, lifted.id, at, joint).with_runs((*out, back))
    runs = (*out, back)
    return Edit(
        layout=layout,
        shape="ring",
        role=role,
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=(at,),
        new_runs=tuple(run.id for run in runs),
        opened=(lifted.id,),
        joint_boxes=1,
        disturbs_ring=True,
        hung=False,
        material=material_for(request, runs, joint_boxes=1, extra=() if box_kept else ("blank plate",)),
        repeat_tests=RING_TESTS,
        document=MINOR_WORKS,
        work=5,
        conditions=(
            "The connector carries the ring's own current: rated for the cable's Iz, and accessible.",
            *(() if box_kept else ("The old box becomes a blanked joint box, marked.",)),
        ),
    )


@way("ring_at_point", "ring longer at one point", 7)
def apply(setting: Setting) -> Edit | Refusal:
    """Lift one leg at the point and lead the ring out through the new outlets and back into the same box."""
    refusal = need_ring(setting) or need_outlets(setting) or need_point(setting)
    if refusal is not None:
        return refusal
    kept = setting.request.choice("box", "kept") == "kept"
    return _loop_out(setting, setting.request.at or "", "ring", box_kept=kept)


@way("outlet_moved", "outlet moved", 8)
def moved(setting: Setting) -> Edit | Refusal:
    """Take an outlet to a new place: its old box becomes a joint box and the circuit is led on to it."""
    request = setting.request
    if request.moved_to_m is None or not request.outlets or request.at is None:
        return Refusal("no outlet is asked to be moved", applies=False)
    if request.at not in setting.layout.nodes:
        return Refusal("that point is not on this circuit's layout yet")
    if need_ring(setting) is None:
        return _loop_out(setting, request.at, "moved", box_kept=False)
    refusal = need_radial(setting)
    if refusal is not None:
        return refusal
    runs = chain_of(setting, request.at)
    return Edit(
        layout=setting.layout.with_runs(runs),
        shape="radial",
        role="moved",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=(request.at,) if request.at != BOARD else (),
        new_runs=tuple(run.id for run in runs),
        joint_boxes=1,
        material=material_for(request, runs, joint_boxes=1, extra=("blank plate",)),
        repeat_tests=RING_TESTS[5:],
        document=MINOR_WORKS,
        work=4,
        conditions=("The old box becomes a blanked joint box, marked and accessible.",),
    )
