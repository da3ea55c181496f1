"""Help by task: three lines on what to do here, then the keys; the last page says what went wrong, if anything did."""

from __future__ import annotations

from rich.text import Text

from screens.base import Line, Sheet, Target

__all__ = ["Help"]

_KEYS = (
    "Enter keeps and goes on    + skip, do not know    - back    / next missing    * is >",
    "F2 board  F3 readings  F4 proposal  F5 verdict  F7 map  F8 number pad  F9 log and why",
    "Ctrl+Z takes the last entry back, Ctrl+Y brings it again; the isolation log is only struck.",
    "Esc closes a sheet, else opens the menu: every action in large keys.",
)


class Help(Sheet):
    """What to do, then the keys. Any key goes back."""

    key = "help"
    title = "Help"

    def lines(self) -> list[Line]:
        """Three lines on the task, then the keys."""
        under = self.bench.under[-1][0] if self.bench.under else self
        palette = self.palette
        out = [Line(Text(f" {under.title}: what to do here", style=f"bold {palette.text}")), Line(Text(""))]
        out += [Line(Text(f"  {line}", style=palette.text)) for line in under.help()]
        out += [Line(Text("")), Line(Text(" Keys", style=f"bold {palette.muted}"))]
        out += [Line(Text(f"  {line}", style=palette.muted)) for line in _KEYS]
        if self.bench.field.problem:
            out += [Line(Text("")), Line(Text(" What did not work last:", style=f"bold {palette.no}"))]
            out += [Line(Text(f"  {line}", style=palette.muted)) for line in self.bench.field.problem.splitlines()[-6:]]
        return out

    def target(self) -> Target:
        """Enter goes back."""
        return Target("Enter: back", "none", lambda _: (self.bench.close_sheet(), ""))

    def back(self) -> None:
        """``-``: back."""
        self.bench.close_sheet()
