"""The entry line: the one place where typing goes. Enter is handled here, in the key handler itself, so that a
burst of values from a meter or a paste lands in the right cells."""

from __future__ import annotations

from typing import TYPE_CHECKING

from rich.text import Text
from textual import events
from textual.widget import Widget

from fieldtool.quantities.show import plain, shorten
from screens.base import Target

if TYPE_CHECKING:
    from screens.workbench import Workbench

__all__ = ["EntryLine"]

MOST_TYPED = 400
"""More than this is not an entry; what is beyond it is left out."""


class EntryLine(Widget, can_focus=True):
    """One line: what it is for, what is typed, how it is understood, what is likely."""

    DEFAULT_CSS = "EntryLine { height: 1; width: 1fr; background: $panel; color: $foreground; }"

    def __init__(self, bench: Workbench) -> None:
        super().__init__(id="entry")
        self.bench = bench
        self.typed = ""
        self.at = 0
        self.said = ""

    @property
    def target(self) -> Target:
        """What the pane in front wants typed."""
        return self.bench.target()

    def set_text(self, text: str) -> None:
        """Put text into the line, the cursor at its end."""
        self.typed, self.at = text[:MOST_TYPED], min(len(text), MOST_TYPED)
        self.refresh()

    async def _on_key(self, event: events.Key) -> None:
        """Every key that is typed. Enter commits at once, in this handler, and stops there."""
        key = event.key
        target = self.target
        if key == "enter":
            event.stop()
            event.prevent_default()
            self.commit()
        elif key == "backspace":
            event.stop()
            if self.at:
                self.typed = self.typed[: self.at - 1] + self.typed[self.at :]
                self.at -= 1
            elif target.kind != "text":
                self.bench.front.back()
        elif key == "delete":
            event.stop()
            self.typed = self.typed[: self.at] + self.typed[self.at + 1 :]
        elif key in ("left", "right") and self.typed:
            event.stop()
            self.at = max(0, min(len(self.typed), self.at + (1 if key == "right" else -1)))
        elif key in ("home", "end") and self.typed:
            event.stop()
            self.at = 0 if key == "home" else len(self.typed)
        elif self.bench.key(key):
            event.stop()
            event.prevent_default()
        elif event.is_printable and event.character:
            event.stop()
            event.prevent_default()
            self.type(event.character)
        self.refresh()

    def type(self, character: str) -> None:
        """One character, from a key or from the pad. In number cells ``+ - * /`` are keys, not text."""
        target = self.target
        self.said = ""
        if target.kind != "text":
            if character in self.bench.SPECIAL:
                self.bench.special(character)
                return
            if character == "?":
                self.bench.open_help()
                return
            if character == "*":
                character = ">"
        if target.kind in ("choice", "none") and not self.typed:
            if self.bench.digit(character):
                return
            if target.kind == "none":
                return
        if len(self.typed) < MOST_TYPED:
            self.typed = self.typed[: self.at] + character + self.typed[self.at :]
            self.at += 1
        self.refresh()

    def commit(self) -> None:
        """Hand what is typed to the pane; what it does not take stays in the line."""
        self.said = ""
        taken, said = self.bench.commit(self.typed)
        if taken:
            self.typed, self.at = "", 0
        self.said = said
        self.refresh()

    async def _on_paste(self, event: events.Paste) -> None:
        """A pasted column: each line is one entry. One line is typed into the line, not taken yet."""
        event.stop()
        parts = [part.strip() for part in event.text.replace("\t", "\n").splitlines()]
        parts = [part for part in parts if part]
        if len(parts) <= 1:
            text = parts[0] if parts else ""
            self.set_text((self.typed + text)[:MOST_TYPED])
            return
        for part in parts[:500]:
            self.typed = part[:MOST_TYPED]
            taken, said = self.bench.commit(self.typed)
            if not taken:
                self.said, self.at = said, len(self.typed)
                break
            self.typed, self.at = "", 0
        self.refresh()

    def render(self) -> Text:
        """The line as it stands."""
        target, palette = self.target, self.bench.palette
        width = max(20, self.size.width)
        out = Text(no_wrap=True, overflow="crop", end="")
        room = max(12, width // 2 - 12) if target.kind != "none" else width - 4
        label = shorten(plain(target.label), room)
        out.append(f" {label}  ", style=palette.text)
        shown = plain(self.typed)
        if target.kind != "none" or self.typed:
            out.append(shown[: self.at], style=f"bold {palette.text}")
            out.append("_", style=f"bold {palette.cur[0]} on {palette.cur[1]}")
            out.append(shown[self.at :], style=f"bold {palette.text}")
        if self.typed:
            understood = target.preview(self.typed)
            if understood:
                out.append(f"   {understood}", style=palette.text)
        elif self.said:
            out.append(f"   {self.said}", style=palette.unk)
        elif target.choices:
            words = "  ".join(f"{digit} {word}" for digit, word in target.choices)
            out.append(f"  {words}", style=palette.muted)
        elif target.value:
            out.append(f"   now {plain(target.value)}", style=palette.muted)
        if target.expect and not self.typed:
            tail = target.expect
            room = width - out.cell_len - 1
            if room > len(tail):
                out.append(" " * (room - len(tail)) + tail, style=palette.muted)
        out.truncate(width, overflow="ellipsis")
        return out
