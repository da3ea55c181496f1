"""The three themes: daylight, night, and plain for terminals without colour. Colour only; words carry the meaning."""

from __future__ import annotations

import os
from dataclasses import dataclass

from textual.theme import Theme

__all__ = ["PALETTES", "Palette", "contrast", "default_theme", "textual_theme"]


@dataclass(frozen=True, slots=True)
class Palette:
    """The colours of one theme. Outcome colours keep away from the conductors' own brown, blue and green-yellow."""

    name: str
    dark: bool
    bg: str
    panel: str
    text: str
    muted: str
    rule: str
    ok: str
    iff: str
    no: str
    unk: str
    new: str
    hot: tuple[str, str]
    calm: tuple[str, str]
    cur: tuple[str, str]
    stop: tuple[str, str]

    def mark(self, mark: str) -> str:
        """The style of a two-letter mark."""
        return {"ok": self.ok, "if": self.iff, "NO": f"reverse bold {self.no}", "??": f"bold {self.unk}"}.get(
            mark, self.muted
        )


PALETTES: dict[str, Palette] = {
    "day": Palette(
        "day", False, "#FFFFFF", "#EDEDED", "#000000", "#3D3D3D", "#6E6E6E", "#00483F", "#5C3300", "#8A0020",
        "#38206E", "#7A0F5C", ("#000000", "#FFD400"), ("#FFFFFF", "#101010"), ("#FFFFFF", "#00304F"),
        ("#FFFFFF", "#8A0020"),
    ),
    "night": Palette(
        "night", True, "#12161A", "#1D2329", "#EDE6D6", "#B4B0A6", "#7C8288", "#7FD1BE", "#F0B860", "#FF9C8F",
        "#C3B2F5", "#F3A6DB", ("#000000", "#E0A800"), ("#F4F0E6", "#2B3238"), ("#06121A", "#CFE3EE"),
        ("#1A0303", "#FF9C8F"),
    ),
    "plain": Palette(
        "plain", True, "#000000", "#000000", "#FFFFFF", "#C8C8C8", "#9A9A9A", "#FFFFFF", "#FFFFFF", "#FFFFFF",
        "#FFFFFF", "#FFFFFF", ("#000000", "#FFFFFF"), ("#FFFFFF", "#000000"), ("#000000", "#FFFFFF"),
        ("#000000", "#FFFFFF"),
    ),
}  # fmt: skip
"""Every theme by name; each text and ground pair has a contrast of at least 7:1."""


def default_theme() -> str:
    """Plain where the user asks for no colour, the named one where FIELDTOOL_THEME says so, else daylight."""
    if os.environ.get("NO_COLOR"):
        return "plain"
    named = os.environ.get("FIELDTOOL_THEME", "day")
    return named if named in PALETTES else "day"


def textual_theme(palette: Palette) -> Theme:
    """The palette as the framework takes it, so that its own widgets match."""
    return Theme(
        name=f"fieldtool-{palette.name}",
        primary=palette.cur[1],
        secondary=palette.muted,
        foreground=palette.text,
        background=palette.bg,
        surface=palette.bg,
        panel=palette.panel,
        warning=palette.iff,
        error=palette.no,
        success=palette.ok,
        accent=palette.new,
        dark=palette.dark,
        variables={"rule": palette.rule, "key-text": palette.text, "key-ground": palette.panel},
    )


def contrast(first: str, second: str) -> float:
    """Contrast of two colours [1], from 1 to 21, by relative luminance (WCAG 2)."""

    def luminance(colour: str) -> float:
        parts = [int(colour[n : n + 2], 16) / 255 for n in (1, 3, 5)]
        linear = [part / 12.92 if part <= 0.03928 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
        return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]

    high, low = sorted((luminance(first), luminance(second)), reverse=True)
    return (high + 0.05) / (low + 0.05)
