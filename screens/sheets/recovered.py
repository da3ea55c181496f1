"""What was recovered when a damaged job was opened: which copy is open, and exactly which entries differ."""

from __future__ import annotations

from rich.text import Text

from fieldtool.quantities.show import plain
from screens.base import Line, Sheet, Target

__all__ = ["Recovered"]


class Recovered(Sheet):
    """The notes of the opening, then each entry that differs."""

    key = "recovered"
    title = "Recovered"

    def lines(self) -> list[Line]:
        """Every note and every difference."""
        visit, palette = self.bench.visit, self.palette
        if visit is None:
            return []
        out = [Line(Text(f"  {plain(note)}", style=palette.text)) for note in visit.notes]
        if visit.file.differences:
            out.append(
                Line(Text("  In the damaged file and not here, or otherwise there:", style=f"bold {palette.muted}"))
            )
            out += [Line(Text(f"    {plain(line)}", style=palette.no)) for line in visit.file.differences]
        return out or [Line(Text("  Nothing was recovered: the file was sound.", style=palette.text))]

    def target(self) -> Target:
        """Enter goes on."""
        return Target("Enter: go on", "none", lambda _: (self.bench.close_sheet(), ""))

    def back(self) -> None:
        """``-``: go on."""
        self.bench.close_sheet()
