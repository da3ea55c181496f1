"""Unfused spur from a point on the ring: new cable hung on an existing accessory's terminals."""

from __future__ import annotations

from fieldtool.ways.material import MINOR_WORKS, SPUR_TESTS, material_for
from fieldtool.ways.places import need_outlets, need_point, need_ring, sizes_at
from fieldtool.ways.way import Edit, Refusal, Setting, chain_of, way


@way("spur_at_point", "unfused spur", 1)
def apply(setting: Setting) -> Edit | Refusal:
    """Hang the new outlets on the named point of the ring."""
    refusal = need_ring(setting) or need_outlets(setting) or need_point(setting)
    if refusal is not None:
        return refusal
    request = setting.request
    at = request.at or ""
    runs = chain_of(setting, at)
    return Edit(
        layout=setting.layout.with_runs(runs),
        shape="ring",
        role="unfused_spur",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=(at,),
        new_runs=tuple(run.id for run in runs),
        accessories_on_spur=len(request.outlets),
        terminals=sizes_at(setting, at, (request.route.cable,)),
        material=material_for(request, runs),
        repeat_tests=SPUR_TESTS,
        document=MINOR_WORKS,
        work=2,
        conditions=("Nothing is ever taken from the new spur.",),
    )
