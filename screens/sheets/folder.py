"""Another folder for the job, while its own cannot be written: nothing typed is lost meanwhile."""

from __future__ import annotations

from pathlib import Path

from rich.text import Text

from fieldtool.quantities.show import plain
from screens.base import Line, Sheet, Target

__all__ = ["Folder"]


class Folder(Sheet):
    """The path of a folder is typed; the job goes on there."""

    key = "folder"
    title = "Another folder"

    def lines(self) -> list[Line]:
        """What is wrong, and what can be done."""
        visit, palette = self.bench.visit, self.palette
        said = visit.save_problem if visit is not None else ""
        where = plain(str(visit.path.parent)) if visit is not None else ""
        return [
            Line(Text("")),
            Line(Text(f"  {said or 'Everything is saved.'}", style=palette.no if said else palette.text)),
            Line(Text(f"  The job's folder is {where}. It is tried again all the time.", style=palette.text)),
            Line(Text("  Type another folder to go on there, for example a card or your home.", style=palette.text)),
        ]

    def target(self) -> Target:
        """The folder's path."""
        return Target("folder", "text", self._move)

    def _move(self, typed: str) -> tuple[bool, str]:
        visit = self.bench.visit
        if visit is None or not typed.strip():
            return False, "Type the path of a folder, or Esc goes back."
        said = visit.move_to(Path(typed.strip()).expanduser())
        if said:
            return False, said
        self.bench.close_sheet()
        return True, f"Saved; the job goes on in {plain(str(visit.path.parent))[:40]}."
