"""Leaving with something parted, joined or off: said in one line first."""

from __future__ import annotations

from rich.text import Text

from fieldtool.quantities.show import plain
from fieldtool.safety.parting import outstanding
from screens.base import Action, Line, Sheet, Target

__all__ = ["Leave"]


class Leave(Sheet):
    """What is left as it is, and the two ways on."""

    key = "leave"
    title = "Leave"

    def lines(self) -> list[Line]:
        """What is left."""
        palette = self.palette
        rows = outstanding(self.bench.job)
        out = [Line(Text("")), Line(Text("  You leave with:", style=f"bold {palette.text}"))]
        out += [Line(Text(f"    {row.sort}: {plain(row.what)}", style=palette.no)) for row in rows]
        if not rows:
            out.append(Line(Text("    the circuit off. Reopened, it is NOT KNOWN.", style=palette.no)))
        out += [
            Line(Text("")),
            Line(Text("  Blank it, insulate, label, lock; tell the user in writing.", style=palette.text)),
            Line(Text("")),
            Line(Text("  1  leave now", style=palette.text)),
            Line(Text("  2  stay", style=palette.text)),
        ]
        return out

    def actions(self) -> tuple[Action, ...]:
        """Leave or stay."""
        return (
            Action("1", "leave now", self.bench.field.go),
            Action("2", "stay", self.back),
        )

    def target(self) -> Target:
        """A digit decides."""
        return Target("1 leave, 2 stay", "none")

    def back(self) -> None:
        """``-``: stay."""
        self.bench.close_sheet()
