"""The menu: every other action in keys three rows high; nothing needs an F-key."""

from __future__ import annotations

from textual.app import ComposeResult
from textual.containers import Grid
from textual.widgets import Button

from screens.base import Action, Sheet, Target
from screens.widgets.number_pad import big_key

__all__ = ["Menu"]


class Menu(Sheet):
    """Twelve large keys. A digit or a touch does it; Esc goes back to the cell."""

    key = "menu"
    title = "Menu"
    DEFAULT_CSS = """
    Menu { layout: vertical; }
    Menu Grid { grid-size: 3 5; grid-gutter: 0 1; height: 1fr; }
    Menu Button { width: 1fr; height: 3; min-width: 12; border: tall $rule; background: $key-ground; color: $key-text; text-style: bold; }
    """

    def _every(self) -> tuple[Action, ...]:
        return (*self.bench.menu_actions(), *(self._after(action) for action in self._own()))

    def _own(self) -> tuple[Action, ...]:
        """What the verdict leads to, where the verdict lies under the menu."""
        under = self.bench.under[-1][0] if self.bench.under else None
        return under.actions()[:2] if under is not None and under.key == "verdict" else ()

    def _after(self, action: Action) -> Action:
        return Action("", action.words, lambda: self._then(action))

    def _then(self, action: Action) -> None:
        self.bench.close_sheet()
        action.do()
        self.bench.refresh_all()

    def compose(self) -> ComposeResult:
        """The keys."""
        with Grid():
            for number, action in enumerate(self._every()):
                yield big_key(f"{action.key} {action.words}".strip(), f"menu-{number}")
            for name, words in (("theme", "light, dark, plain"), ("pad", "number pad"), ("leave", "leave")):
                yield big_key(words, f"menu-{name}")

    def on_button_pressed(self, event: Button.Pressed) -> None:
        """A key was touched."""
        event.stop()
        name = (event.button.id or "").removeprefix("menu-")
        if name == "theme":
            self.bench.field.next_theme()
        elif name == "pad":
            self.bench.close_sheet()
            self.bench.toggle_pad()
        elif name == "leave":
            self.bench.close_sheet()
            self.bench.field.leave()
        elif self.bench.visit is None and name not in ("4",):
            self.bench.close_sheet()
            self.bench.say("Choose a job first, or 7 for a new one.")
        else:
            self._every()[int(name)].do()

    def render(self) -> str:  # type: ignore[override]
        """The keys draw themselves."""
        return ""

    def actions(self) -> tuple[Action, ...]:
        """Digits do the same as the keys."""
        if self.bench.visit is None:
            return tuple(action for action in self.bench.menu_actions() if action.key == "0")
        return self.bench.menu_actions()

    def target(self) -> Target:
        """A digit acts."""
        return Target("a digit, or touch", "none", lambda _: (self.bench.close_sheet(), ""))

    def back(self) -> None:
        """``-``: back to where one was."""
        self.bench.close_sheet()

    def notes(self) -> tuple[str, str]:
        """That nothing is at risk here."""
        return ("", "ok  Nothing here changes a reading. The cell you were in is kept.")

    def hints(self) -> str:
        """The keys that matter here."""
        return "digit or touch   . number pad   - or Esc back to the cell"
