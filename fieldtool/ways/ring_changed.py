"""A ring given up: made one 20 A radial, its loop left joined or opened, or parted into two radials."""

from __future__ import annotations

from dataclasses import replace

from fieldtool.network.layout import LayoutRun
from fieldtool.ways.material import CERTIFICATE, MINOR_WORKS, RADIAL_TESTS, material_for
from fieldtool.ways.places import need_outlets, need_point, need_ring, sizes_at, twenty_amp
from fieldtool.ways.way import Edit, Refusal, Setting, chain_of, way


def _opening(setting: Setting) -> LayoutRun | Refusal:
    """The run to open: the one chosen, else the middle run of the ring."""
    ring = [run for run in setting.layout.runs if run.on_ring]
    if not ring:
        return Refusal("the ring's runs are not known yet")
    chosen = setting.request.choice("open_run", ring[len(ring) // 2].id)
    found = next((run for run in ring if run.id == chosen), None)
    return found if found is not None else Refusal(f"{chosen} is not a run of the ring")


def _radial(setting: Setting, opened: LayoutRun | None) -> Edit:
    request = setting.request
    at = request.at or ""
    made, rcd = twenty_amp(setting)
    runs = chain_of(setting, at)
    layout = setting.layout.with_runs(runs, (opened.id,) if opened is not None else ())
    return Edit(
        layout=layout,
        shape="radial",
        role="radial",
        device=made,
        rcd=rcd,
        rcd_covers="some" if rcd is not None else setting.circuit.rcd_covers,
        new_nodes=tuple(outlet.id for outlet in request.outlets),
        attach=(at,),
        new_runs=tuple(run.id for run in runs),
        opened=(opened.id,) if opened is not None else (),
        device_changed=True,
        disturbs_ring=True,
        hung=opened is None,
        terminals=sizes_at(setting, at, (request.route.cable,)),
        material=material_for(request, runs, extra=("20 A device of the board maker's own type",)),
        repeat_tests=RADIAL_TESTS,
        document=MINOR_WORKS,
        work=6,
        conditions=("The circuit is marked at the board as a 20 A radial.",),
    )


@way("ring_to_radial", "ring made a 20 A radial", 14)
def to_radial(setting: Setting) -> Edit | Refusal:
    """Change the device to 20 A; the loop stays joined, or is opened at a chosen run."""
    refusal = need_ring(setting) or need_outlets(setting) or need_point(setting)
    if refusal is not None:
        return refusal
    if setting.request.choice("loop", "joined") == "joined":
        return _radial(setting, None)
    opened = _opening(setting)
    return opened if isinstance(opened, Refusal) else _radial(setting, opened)


@way("ring_to_two", "ring parted into two 20 A radials", 15)
def to_two(setting: Setting) -> Edit | Refusal:
    """Open the ring at a run and give each leg a 20 A device of its own."""
    refusal = need_ring(setting) or need_outlets(setting) or need_point(setting)
    if refusal is not None:
        return refusal
    opened = _opening(setting)
    if isinstance(opened, Refusal):
        return opened
    made = _radial(setting, opened)
    return replace(
        made,
        needs_way=True,
        document=CERTIFICATE,
        work=9,
        material=material_for(
            setting.request,
            tuple(run for run in made.layout.runs if run.new),
            extra=("20 A device of the board maker's own type", "second 20 A device, same"),
        ),
        conditions=(
            "Line and neutral of the second leg move together to its own way and bar.",
            "Both radials are marked at the board.",
        ),
    )
