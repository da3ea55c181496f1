"""The strip: state and circuit, next safe step, reminders. Three rows that nothing ever covers."""

from __future__ import annotations

from rich.text import Text
from textual.widget import Widget

from fieldtool.answers import NextStep, StateView
from fieldtool.quantities.show import cells, plain, shorten
from screens.theme import Palette

__all__ = ["Strip"]


class Strip(Widget, can_focus=False):
    """Rows 1 to 3 of the screen, the core's three sentences whole."""

    DEFAULT_CSS = "Strip { height: 3; width: 1fr; }"

    def __init__(self) -> None:
        super().__init__(id="strip")
        self.view: StateView | None = None
        self.step: NextStep | None = None
        self.circuit = ""
        self.saved = ""
        self.ascii = False
        self.palette: Palette | None = None

    def show(self, view: StateView, step: NextStep, circuit: str, saved: str, palette: Palette) -> None:
        """Show these three sentences; repaints only when something changed."""
        if (view, step, circuit, saved, palette) != (self.view, self.step, self.circuit, self.saved, self.palette):
            self.view, self.step, self.circuit, self.saved, self.palette = view, step, circuit, saved, palette
            self.refresh()

    def texts(self) -> tuple[str, str, str]:
        """The three rows as plain text."""
        if self.view is None or self.step is None:
            return ("", "", "")
        plate = self.view.plate_ascii if self.ascii else self.view.plate
        return (plate, self.step.sentence, self.view.mind)

    def render(self) -> Text:
        """The three rows, each filled to its end so that the plate is a plate."""
        palette, width = self.palette, max(20, self.size.width)
        if self.view is None or palette is None:
            return Text("")
        plate, step, mind = self.texts()
        front, ground = palette.hot if self.view.hot else palette.calm
        first = self._two(f" {plate}", f"│ {plain(self.circuit)} ", width)
        out = Text(no_wrap=True, overflow="crop", end="")
        out.append(first, style=f"bold {front} on {ground}")
        out.append("\n")
        why = "F9 why" if width >= 76 and self.step is not None and self.step.kind != "choose" else ""
        out.append(self._two(f" NEXT  {plain(step)}", why, width), style=f"bold {palette.text} on {palette.panel}")
        out.append("\n")
        out.append(self._two(f" MIND  {plain(mind)}", self.saved, width), style=f"{palette.text} on {palette.panel}")
        return out

    @staticmethod
    def _two(left: str, right: str, width: int) -> str:
        """Left text whole, right text at the end where there is room for it."""
        room = width - cells(left) - 1
        tail = shorten(right, room) if room >= 8 and right else (right if right and cells(right) <= room else "")
        return left + " " * max(0, width - cells(left) - cells(tail)) + tail
