"""A new circuit on a device of its own, when nothing that stands can carry the addition."""

from __future__ import annotations

from fieldtool.job.place import Device, Rcd
from fieldtool.network.layout import BOARD, Layout
from fieldtool.ways.material import CERTIFICATE, RADIAL_TESTS, material_for
from fieldtool.ways.places import need_outlets
from fieldtool.ways.way import Edit, Refusal, Setting, chain_of, way


@way("new_circuit", "new 20 A circuit", 17)
def apply(setting: Setting) -> Edit | Refusal:
    """Lead new cable from a spare way through the outlets, on a 20 A type B RCBO with a 30 mA type A part."""
    refusal = need_outlets(setting)
    if refusal is not None:
        return refusal
    request = setting.request
    if request.attach != "board":
        return Refusal("say how many metres from the board: the request starts at a point", applies=False)
    runs = chain_of(setting, BOARD)
    empty = Layout(setting.circuit.id, (), ())
    return Edit(
        layout=empty.with_runs(runs),
        shape="radial",
        role="new_circuit",
        device=Device(type="bs61009_b", in_a=20.0, breaking_ka=6.0, energy_class=3),
        rcd=Rcd(type="a", i_dn_ma=30.0, standard="61009"),
        rcd_covers="some",
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=(BOARD,),
        new_runs=tuple(run.id for run in runs),
        device_changed=True,
        needs_way=True,
        own_circuit=True,
        material=material_for(request, runs, extra=("20 A type B RCBO, 30 mA type A, board maker's own",)),
        repeat_tests=RADIAL_TESTS,
        document=CERTIFICATE,
        work=10,
    )
