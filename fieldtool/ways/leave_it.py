"""Leave it as it is, and tell the client in writing what was found: always open, and sometimes the best answer."""

from __future__ import annotations

from fieldtool.ways.way import Edit, Refusal, Setting, way


@way("leave_it", "leave it, advise", 99)
def apply(setting: Setting) -> Edit | Refusal:
    """Nothing is added; the circuit is judged as it stands."""
    if setting.found.shape == "unknown":
        return Refusal("it is not known yet whether this is a ring or a radial")
    return Edit(
        layout=setting.layout,
        shape="ring" if setting.found.shape == "ring" else "radial",
        role="none",
        device=setting.circuit.device,
        rcd=setting.circuit.rcd,
        rcd_covers=setting.circuit.rcd_covers,
        document="written advice of what was found",
        work=0,
        conditions=("What was found is told to the client in writing.",),
    )
