"""Spurs behind a plug fuse: a new unit at a point, a fixed appliance with its own, or beyond one that stands."""

from __future__ import annotations

from fieldtool.network.layout import BOARD
from fieldtool.ways.material import MINOR_WORKS, SPUR_TESTS, material_for
from fieldtool.ways.places import need_outlets, need_point, sizes_at
from fieldtool.ways.way import Edit, Refusal, Setting, chain_of, way


def _fused(setting: Setting, fuse_a: float, work: int, *, fcu: int, conditions: tuple[str, ...] = ()) -> Edit:
    request = setting.request
    at = request.at or BOARD
    runs = chain_of(setting, at)
    shape = "ring" if setting.found.shape == "ring" else "radial"
    return Edit(
        layout=setting.layout.with_runs(runs),
        shape=shape,  # type: ignore[arg-type]
        role="fused_spur",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=(at,),
        new_runs=tuple(run.id for run in runs),
        fuse_a=fuse_a,
        terminals=sizes_at(setting, at, ("ft_2_5",)) if fcu else (),
        material=material_for(request, runs, fcu=fcu),
        repeat_tests=SPUR_TESTS,
        document=MINOR_WORKS,
        work=work,
        conditions=conditions,
        assumed=("the fused unit sits beside the point it is fed from",) if fcu else (),
    )


@way("fused_spur", "fused spur", 2)
def apply(setting: Setting) -> Edit | Refusal:
    """A fused connection unit beside the named point, and any number of outlets beyond it."""
    refusal = need_outlets(setting) or need_point(setting)
    if refusal is not None:
        return refusal
    if _behind(setting):
        return Refusal("that point is already behind a plug fuse", applies=False)
    return _fused(setting, setting.request.fuse_a or 13.0, 3, fcu=1)


@way("fixed_appliance", "fixed appliance through its own FCU", 3)
def appliance(setting: Setting) -> Edit | Refusal:
    """One fixed appliance on its own fused unit, fused for its load where that is known."""
    refusal = need_outlets(setting) or need_point(setting)
    if refusal is not None:
        return refusal
    outlets = setting.request.outlets
    if len(outlets) != 1 or outlets[0].kind != "appliance":
        return Refusal("one fixed appliance is what this way is for", applies=False)
    if _behind(setting):
        return Refusal("that point is already behind a plug fuse", applies=False)
    load = outlets[0].load_a
    fuse = setting.request.fuse_a or (3.0 if load is not None and load <= 3.0 else 13.0)
    return _fused(setting, fuse, 3, fcu=1)


@way("beyond_fcu", "more outlets beyond an FCU that stands", 13)
def beyond(setting: Setting) -> Edit | Refusal:
    """New outlets hung on the load side of an existing fused unit, whose fuse then carries them too."""
    refusal = need_outlets(setting) or need_point(setting)
    if refusal is not None:
        return refusal
    if not _behind(setting):
        return Refusal("no fused unit stands ahead of that point", applies=False)
    at = setting.request.at or ""
    fuses, behind = dict(setting.layout.fuses), dict(setting.layout.behind)
    fuse = fuses.get(at) or fuses.get(behind.get(at, ""), 13.0)
    return _fused(setting, fuse, 2, fcu=0)


def _behind(setting: Setting) -> bool:
    at = setting.request.at or ""
    return at in dict(setting.layout.fuses) or at in dict(setting.layout.behind)
