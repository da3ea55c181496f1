"""Ring lengthened between two neighbours: out to the new outlets and on to the next point."""

from __future__ import annotations

from fieldtool.network.as_found import cable_ohms
from fieldtool.network.layout import LayoutRun, Ohms
from fieldtool.ways.material import MINOR_WORKS, RING_TESTS, material_for
from fieldtool.ways.places import need_outlets, need_ring, neighbour_run, sizes_at
from fieldtool.ways.way import Edit, Refusal, Setting, chain_of, way

__all__ = ["return_run"]


def return_run(setting: Setting, start: str, end: str) -> LayoutRun:
    """The cable from the last new outlet back to the ring; as long as the way out where it was not given [m]."""
    request = setting.request
    metres = request.back_metres
    if metres is None:
        metres = setting.first_metres() + sum(outlet.metres for outlet in request.outlets[1:])
    key = request.route.cable
    ohms = cable_ohms(key, metres) or Ohms(0.0, 0.0, 0.0)
    return LayoutRun(f"back_{start}", start, end, ohms, key, metres, "proposed", on_ring=True, new=True)


@way("ring_between", "ring longer between two neighbours", 5)
def apply(setting: Setting) -> Edit | Refusal:
    """Run new cable from one neighbour through the new outlets to the other; the old link goes unless kept."""
    refusal = need_ring(setting) or need_outlets(setting)
    if refusal is not None:
        return refusal
    run = neighbour_run(setting)
    if isinstance(run, Refusal):
        return run
    request = setting.request
    a, b = request.at or "", request.other or ""
    out = chain_of(setting, a)
    back = return_run(setting, request.outlets[-1].id, b)
    runs = (*out, back)
    keep = request.choice("old_link", "removed") == "left"
    layout = setting.layout.with_runs(runs, () if keep else (run.id,))
    cable = request.route.cable
    extra = (cable,) if keep else ()
    return Edit(
        layout=layout,
        shape="ring",
        role="ring",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=(a, b),
        new_runs=tuple(item.id for item in runs),
        opened=() if keep else (run.id,),
        keeps_old_link=keep,
        disturbs_ring=True,
        hung=False,
        terminals=(*sizes_at(setting, a, extra), *sizes_at(setting, b, extra)),
        material=material_for(request, runs),
        repeat_tests=RING_TESTS,
        document=MINOR_WORKS,
        work=6,
        conditions=("The link left in makes an interconnected ring; later ring tests no longer prove it.",)
        if keep
        else (),
    )
