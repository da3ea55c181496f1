"""Spur from the board's own terminals: through a fused unit first, or one accessory unfused where chosen."""

from __future__ import annotations

from fieldtool.network.layout import BOARD
from fieldtool.ways.material import MINOR_WORKS, SPUR_TESTS, material_for
from fieldtool.ways.places import need_outlets, need_ring
from fieldtool.ways.way import Edit, Refusal, Setting, chain_of, way


@way("spur_at_board", "spur from the board", 6)
def apply(setting: Setting) -> Edit | Refusal:
    """Hang the new outlets on the circuit's own terminals at the board."""
    refusal = need_ring(setting) or need_outlets(setting)
    if refusal is not None:
        return refusal
    request = setting.request
    if request.attach != "board":
        return Refusal("the metres asked for start at a point, not at the board", applies=False)
    unfused = request.choice("fuse", "fcu") == "none"
    runs = chain_of(setting, BOARD)
    return Edit(
        layout=setting.layout.with_runs(runs),
        shape="ring",
        role="unfused_spur" if unfused else "fused_spur",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=(BOARD,),
        new_runs=tuple(run.id for run in runs),
        fuse_a=None if unfused else (request.fuse_a or 13.0),
        accessories_on_spur=len(request.outlets) if unfused else 0,
        material=material_for(request, runs, fcu=0 if unfused else 1),
        repeat_tests=SPUR_TESTS,
        document=MINOR_WORKS,
        work=3,
        conditions=("The spur is identified at the board.",),
        assumed=() if unfused else ("the fused unit sits beside the board",),
    )
