"""Single outlet swapped for a twin in the same place: no new cable, one more outlet."""

from __future__ import annotations

from fieldtool.answers import Material
from fieldtool.ways.material import MINOR_WORKS
from fieldtool.ways.places import sizes_at
from fieldtool.ways.way import Edit, Refusal, Setting, way


@way("single_to_twin", "single swapped for a twin", 16)
def apply(setting: Setting) -> Edit | Refusal:
    """Swap the accessory; the network stays as it was found."""
    swap = setting.request.swap
    if swap is None:
        return Refusal("no swap is asked for", applies=False)
    point = setting.point(swap)
    if point is None or point.kind != "single":
        return Refusal(f"{setting.job.point_name(swap)} is not a single outlet", applies=False)
    if setting.found.shape == "unknown":
        return Refusal("it is not known yet whether this is a ring or a radial")
    return Edit(
        layout=setting.layout,
        shape="ring" if setting.found.shape == "ring" else "radial",
        role="swap",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        attach=(swap,),
        accessories_on_spur=1 if point.spur_from is not None else 0,
        terminals=sizes_at(setting, swap, ()),
        material=(Material("twin outlet", 1.0),),
        repeat_tests=("polarity", "zs", "rcd_ms", "rcd_button", "function"),
        document=MINOR_WORKS,
        work=1,
    )
