"""Shape 0 to 1: the earthing system was called ``earthing``, and boards had no list of their own."""

from __future__ import annotations

from typing import Any

__all__ = ["step"]


def step(body: dict[str, Any]) -> dict[str, Any]:
    """The document in shape 1; the one given is left as it was."""
    out = {name: value for name, value in body.items() if name != "board"}
    supply = dict(body.get("supply", {}))
    if "earthing" in supply:
        supply["system"] = supply.pop("earthing")
    out["supply"] = supply
    if "board" in body:
        out["boards"] = [body["board"]]
    about = dict(body.get("about", {}))
    about["schema"] = 1
    out["about"] = about
    return out
