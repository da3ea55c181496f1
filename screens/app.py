"""The app: one screen, its themes and settings, and the doors to panes and sheets."""

from __future__ import annotations

import importlib
import os
import traceback
from collections.abc import Callable
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, Any

from textual.app import App
from textual.screen import Screen

from fieldtool.mishap import keep
from screens.base import Pane, Sheet
from screens.theme import PALETTES, Palette, default_theme, textual_theme
from screens.workbench import Workbench

if TYPE_CHECKING:
    from fieldtool.visit import Visit

__all__ = ["FieldApp", "run"]

PANES = {"shelf": "Shelf", "survey": "Survey", "readings": "Readings", "proposal": "Proposal", "verdict": "VerdictPane"}
SHEETS = {
    "menu": "Menu",
    "more": "More",
    "help": "Help",
    "isolation": "Isolation",
    "map": "MapSheet",
    "question": "TakenQuestion",
    "parted": "PartedSheet",
    "explanations": "Explanations",
    "spot": "SpotCheck",
    "points": "Points",
    "circuits": "Circuits",
    "leave": "Leave",
    "folder": "Folder",
    "recovered": "Recovered",
    "reach": "ReachSheet",
    "decide": "Decide",
}


class FieldApp(App[None]):
    """The app. Every screen it shows carries the strip."""

    ENABLE_COMMAND_PALETTE = False
    TITLE = "fieldtool"
    strict = False
    """True in tests: an unforeseen error fails the test instead of being kept for later."""
    CSS = "Screen { background: $background; }"

    def __init__(self, visit: Visit | None = None, *, clock: Callable[[], datetime] | None = None) -> None:
        super().__init__()
        self.palette: Palette = PALETTES[default_theme()]
        self.clock: Callable[[], datetime] = clock or (lambda: datetime.now(UTC))
        self.left_handed = os.environ.get("FIELDTOOL_HAND") == "left"
        self.ascii = os.environ.get("FIELDTOOL_ASCII") == "1"
        self.bell_on = os.environ.get("FIELDTOOL_SOUND", "on") != "off"
        self.last_state = ""
        self.pad_seen = False
        self.problem = ""
        self._visit = visit
        self.bench: Workbench | None = None

    def on_mount(self) -> None:
        """Themes, then the one screen."""
        for palette in PALETTES.values():
            self.register_theme(textual_theme(palette))
        self.theme = f"fieldtool-{self.palette.name}"
        self.bench = Workbench(self)
        if self._visit is not None:
            self.bench.take(self._visit)
        self.push_screen(self.bench)

    def push_screen(self, screen: Any, *args: Any, **more: Any) -> Any:
        """Only a screen that carries the strip may come to the front."""
        if isinstance(screen, Screen) and not isinstance(screen, Workbench):
            raise TypeError("every screen carries the strip: open a sheet of the workbench instead")
        return super().push_screen(screen, *args, **more)

    def switch_screen(self, screen: Any) -> Any:
        """Only a screen that carries the strip may come to the front."""
        if isinstance(screen, Screen) and not isinstance(screen, Workbench):
            raise TypeError("every screen carries the strip: open a sheet of the workbench instead")
        return super().switch_screen(screen)

    # doors ---------------------------------------------------------------------------------------------------
    def pane(self, key: str, bench: Workbench) -> Pane:
        """A pane by its name, made when it is first asked for."""
        found = bench.panes.get(key)
        if found is None:
            module = importlib.import_module(f"screens.{key}")
            made: Pane = getattr(module, PANES[key])(bench)
            bench.panes[key] = found = made
        return found

    def sheet(self, key: str, bench: Workbench) -> Sheet:
        """A sheet by its name, always new."""
        module = importlib.import_module(f"screens.sheets.{key}")
        made: Sheet = getattr(module, SHEETS[key])(bench)
        return made

    def drop_panes(self, bench: Workbench) -> None:
        """Another job: panes of the old one go."""
        for key, pane in list(bench.panes.items()):
            if key != "shelf":
                bench.panes.pop(key)
                pane.remove()

    def counts(self, bench: Workbench) -> dict[str, str]:
        """What each step says of itself."""
        from screens.counts import counts

        return counts(bench)

    def next_theme(self) -> None:
        """Daylight, night, plain, and round again."""
        names = list(PALETTES)
        self.palette = PALETTES[names[(names.index(self.palette.name) + 1) % len(names)]]
        self.theme = f"fieldtool-{self.palette.name}"
        if self.bench is not None:
            self.bench.refresh_all()

    def note_problem(self, problem: Exception) -> None:
        """Keep the details of something unexpected, for the last page of the help and for the log."""
        if self.strict:
            raise problem
        self.problem = "".join(traceback.format_exception(problem))[-2000:]
        keep(problem)

    def _handle_exception(self, error: Exception) -> None:
        """The framework's end of an error that nothing caught: one sentence and the log, not a traceback."""
        if self.strict:
            super()._handle_exception(error)
            return
        kept = keep(error)
        where = f" Details: {kept}" if kept is not None else ""
        said = f"fieldtool had to stop: an error in the tool itself. What was accepted is saved; start again.{where}"
        self.exit(return_code=1, message=said)

    def leave(self) -> None:
        """Leave; with something parted, joined or off, say so first."""
        bench = self.bench
        if bench is not None and bench.visit is not None and bench.front.key != "leave":
            from fieldtool.safety.parting import outstanding

            view, _ = bench.core()
            if outstanding(bench.visit.job) or view.state not in ("not_known", "live"):
                bench.open_named("leave")
                return
        self.go()

    def go(self) -> None:
        """Let the job go and end."""
        if self.bench is not None and self.bench.visit is not None:
            self.bench.visit.close()
        self.exit()

    async def action_quit(self) -> None:
        """The framework's own way out asks too."""
        self.leave()


def run(path: Path | None) -> int:
    """Open the app, on one job where a path is given; returns the exit code."""
    import sys

    visit = None
    if path is not None:
        from fieldtool.jobfile.problems import JobFileProblem, SaveProblem
        from fieldtool.visit import Visit

        try:
            visit = Visit.open(_copied(path))
        except (JobFileProblem, SaveProblem) as problem:
            sys.stderr.write(f"fieldtool: {problem}\n")
            return 2
    app = FieldApp(visit)
    app.run()
    return 0 if app.return_code is None else int(app.return_code)


def _copied(path: Path) -> Path:
    """An invented sample opens as a copy in the job folder; any other job opens where it is."""
    from fieldtool.jobfile.opening import load
    from fieldtool.jobfile.problems import JobFileProblem
    from fieldtool.jobfile.shelf import job_folder, open_sample

    if path.resolve().parent.name != "sample_jobs":
        return path
    try:
        if load(path).generation:
            return path
    except JobFileProblem:
        return path
    folder = job_folder()
    kept = folder / f"{path.stem.replace('_', '-')}.json"
    return kept if kept.exists() else open_sample(path, folder)
