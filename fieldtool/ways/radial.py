"""Radials made longer: from the last point, by a branch, or by a second leg from the same way."""

from __future__ import annotations

from fieldtool.network.layout import BOARD
from fieldtool.ways.material import MINOR_WORKS, RADIAL_TESTS, material_for
from fieldtool.ways.places import need_outlets, need_point, need_radial, sizes_at
from fieldtool.ways.way import Edit, Refusal, Setting, chain_of, way


def _hang(setting: Setting, at: str, work: int, conditions: tuple[str, ...] = ()) -> Edit:
    request = setting.request
    runs = chain_of(setting, at)
    return Edit(
        layout=setting.layout.with_runs(runs),
        shape="radial",
        role="radial",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=(at,),
        new_runs=tuple(run.id for run in runs),
        terminals=sizes_at(setting, at, (request.route.cable,)),
        material=material_for(request, runs),
        repeat_tests=RADIAL_TESTS,
        document=MINOR_WORKS,
        work=work,
        conditions=conditions,
    )


def _ends(setting: Setting) -> tuple[str, ...]:
    fed = {run.a for run in setting.layout.runs}
    return tuple(node for node in setting.layout.nodes if node not in fed)


@way("radial_end", "radial longer from its last point", 9)
def end(setting: Setting) -> Edit | Refusal:
    """Lead on from the end of the radial."""
    refusal = need_radial(setting) or need_outlets(setting)
    if refusal is not None:
        return refusal
    ends = _ends(setting)
    at = setting.request.at or (ends[-1] if ends else None)
    if setting.request.attach == "board" or at is None:
        return Refusal("the request does not start at the radial's end", applies=False)
    if at not in ends:
        return Refusal(f"{setting.job.point_name(at)} is not the last point: a branch would start there", applies=False)
    return _hang(setting, at, 2)


@way("radial_branch", "branch off the radial", 10)
def branch(setting: Setting) -> Edit | Refusal:
    """Branch from a point that already feeds another."""
    refusal = need_radial(setting) or need_outlets(setting) or need_point(setting)
    if refusal is not None:
        return refusal
    at = setting.request.at or ""
    if at in _ends(setting):
        return Refusal(f"{setting.job.point_name(at)} is the last point: the radial is led on", applies=False)
    return _hang(setting, at, 3)


@way("second_leg", "second leg from the same way", 11)
def second_leg(setting: Setting) -> Edit | Refusal:
    """A second radial leg from the same device's terminals."""
    refusal = need_radial(setting) or need_outlets(setting)
    if refusal is not None:
        return refusal
    if setting.request.attach != "board":
        return Refusal("the metres asked for start at a point, not at the board", applies=False)
    return _hang(setting, BOARD, 4, ("Both legs are identified at the board as one circuit.",))
