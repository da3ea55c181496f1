"""A joint box cut into a leg of the ring, and the ways that start from it."""

from __future__ import annotations

from fieldtool.network.edits import split_run
from fieldtool.network.layout import Layout
from fieldtool.ways.material import MINOR_WORKS, RING_TESTS, material_for
from fieldtool.ways.places import need_outlets, need_ring, neighbour_run
from fieldtool.ways.way import Edit, Refusal, Setting, chain_of, way


def box_in_leg(setting: Setting) -> tuple[Layout, str] | Refusal:
    """The layout with a joint box half way along the named leg, and the box's node."""
    refusal = need_ring(setting) or need_outlets(setting)
    if refusal is not None:
        return refusal
    run = neighbour_run(setting)
    if isinstance(run, Refusal):
        return run
    box = f"jb_{setting.request.outlets[0].id}"
    return split_run(setting.layout, run.id, 0.5, box), box


@way("spur_at_joint_box", "unfused spur from a joint box in the leg", 4)
def apply(setting: Setting) -> Edit | Refusal:
    """Cut a joint box into the leg between two neighbours and hang the new outlet on it."""
    made = box_in_leg(setting)
    if isinstance(made, Refusal):
        return made
    layout, box = made
    request = setting.request
    runs = chain_of(setting, box)
    return Edit(
        layout=layout.with_runs(runs),
        shape="ring",
        role="unfused_spur",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=tuple(place for place in (request.at, request.other) if place),
        new_runs=tuple(run.id for run in runs),
        accessories_on_spur=len(request.outlets),
        joint_boxes=1,
        disturbs_ring=True,
        hung=False,
        material=material_for(request, runs, joint_boxes=1),
        repeat_tests=RING_TESTS,
        document=MINOR_WORKS,
        work=4,
        conditions=("Nothing is ever taken from the new spur.",),
        assumed=("the joint box sits half way along the leg",),
    )


@way("heavy_branch", "4 mm² branch from a joint box in the leg", 12)
def heavy(setting: Setting) -> Edit | Refusal:
    """Cut a joint box into the leg and branch off it in 4 mm², which the circuit's own device protects."""
    made = box_in_leg(setting)
    if isinstance(made, Refusal):
        return made
    layout, box = made
    request = setting.request
    runs = chain_of(setting, box, cable="ft_4")
    return Edit(
        layout=layout.with_runs(runs),
        shape="ring",
        role="radial",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=tuple(place for place in (request.at, request.other) if place),
        new_runs=tuple(run.id for run in runs),
        joint_boxes=1,
        disturbs_ring=True,
        hung=False,
        material=material_for(request, runs, joint_boxes=1),
        repeat_tests=RING_TESTS,
        document=MINOR_WORKS,
        work=5,
        assumed=("the joint box sits half way along the leg",),
    )
