"""What every pane and sheet is: lines with a cursor, one target for the entry line, two rows of notes, hints.

There is one screen and one place where typing goes. A pane draws lines and says what the entry line is for; it
never takes the focus, so no key is ever lost between widgets.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal

from rich.text import Text
from textual import events
from textual.widget import Widget

from screens.theme import Palette

if TYPE_CHECKING:
    from screens.workbench import Workbench

__all__ = ["Action", "Line", "Pane", "Sheet", "Target"]

Kind = Literal["number", "text", "choice", "none"]


@dataclass(frozen=True, slots=True)
class Target:
    """What the entry line is for now.

    ``commit`` takes the typed text and gives a sentence to show (empty for nothing to say) and whether it was
    taken. ``choices`` are (digit, words); a choice is taken at once by its digit.
    """

    label: str
    kind: Kind = "none"
    commit: Callable[[str], tuple[bool, str]] = lambda _: (False, "")
    preview: Callable[[str], str] = lambda _: ""
    choices: tuple[tuple[str, str], ...] = ()
    expect: str = ""
    value: str = ""


@dataclass(frozen=True, slots=True)
class Action:
    """One thing that can be done here: its digit in the menu, its words, and what does it."""

    key: str
    words: str
    do: Callable[[], None]


@dataclass(slots=True)
class Line:
    """One drawn line; ``index`` is the cursor place it belongs to, None for a line that cannot be chosen."""

    text: Text
    index: int | None = None
    spans: tuple[tuple[int, int, int], ...] = field(default=())
    """Cells (from, to, index) of a line with several places."""


class Pane(Widget, can_focus=False):
    """A pane of the workbench."""

    DEFAULT_CSS = """
    Pane { width: 1fr; height: 1fr; background: $background; color: $foreground; }
    """
    key = ""
    title = ""

    def __init__(self, bench: Workbench, **more: str) -> None:
        super().__init__(id=f"pane-{self.key}", **more)  # type: ignore[arg-type]
        self.bench = bench
        self.cursor = 0
        self.top = 0
        self._drawn: list[Line] = []

    @property
    def palette(self) -> Palette:
        """The colours in force."""
        return self.bench.palette

    # to be given by each pane --------------------------------------------------------------------------------
    def lines(self) -> list[Line]:
        """Every line of the pane, from the first to the last."""
        return []

    def count(self) -> int:
        """How many places the cursor can be at."""
        return 0

    def target(self) -> Target:
        """What the entry line is for at the cursor."""
        return Target("")

    def notes(self) -> tuple[str, str]:
        """The two rows under the pane, each with its mark in front."""
        return ("", "")

    def hints(self) -> str:
        """The keys that matter here."""
        return "Enter next   - back   F1 help   F8 pad   Esc menu"

    def help(self) -> tuple[str, ...]:
        """What to do here, in three lines."""
        return ("Up and down choose; Enter takes.",)

    def actions(self) -> tuple[Action, ...]:
        """What else can be done here, for the menu."""
        return ()

    def shown(self) -> None:
        """Called each time the pane comes to the front."""

    def do_f6(self) -> None:
        """What row 24 offers on F6 here."""

    def skip(self) -> None:
        """``+``: leave this one out, or do not know."""
        self.move(1)

    def back(self) -> None:
        """``-``: back one."""
        self.move(-1)

    def next_missing(self) -> None:
        """``/``: the next missing entry, or the question that waits."""

    # cursor --------------------------------------------------------------------------------------------------
    def move(self, step: int) -> None:
        """Move the cursor; it stops at both ends."""
        if self.count():
            self.cursor = max(0, min(self.count() - 1, self.cursor + step))
        self.bench.refresh_all()

    def choose(self, index: int) -> None:
        """Put the cursor somewhere, as a touch does. It only selects; it never writes."""
        if 0 <= index < self.count():
            self.cursor = index
            self.bench.refresh_all()

    # drawing -------------------------------------------------------------------------------------------------
    def render(self) -> Text:
        """The visible lines, the current one always among them."""
        try:
            return self._rendered()
        except Exception as problem:
            self.bench.field.note_problem(problem)
            return Text(" This page cannot be shown now. What you entered is kept. Esc: menu; details: F1.")

    def _rendered(self) -> Text:
        self.cursor = max(0, min(self.cursor, max(0, self.count() - 1)))
        every = self.lines()
        height = max(1, self.size.height)
        here = next((n for n, line in enumerate(every) if self._holds(line, self.cursor)), 0)
        wanted = self.wanted_top(every)
        if wanted is not None and here - wanted < height:
            self.top = wanted
        elif here < self.top:
            self.top = max(0, here - 1)
        elif here >= self.top + height:
            self.top = here - height + 1
        self.top = max(0, min(self.top, max(0, len(every) - height)))
        if wanted is None and here < height and self.top <= 2:
            self.top = 0
        self._drawn = every[self.top : self.top + height]
        out = Text(no_wrap=True, overflow="crop", end="")
        for number, line in enumerate(self._drawn):
            if number:
                out.append("\n")
            text = line.text.copy()
            text.truncate(max(1, self.size.width), overflow="ellipsis")
            out.append_text(text)
        return out

    def wanted_top(self, every: list[Line]) -> int | None:
        """The line that should stand first, where a pane knows better than the cursor; None where it does not."""
        del every
        return None

    @staticmethod
    def _holds(line: Line, index: int) -> bool:
        return line.index == index or any(span[2] == index for span in line.spans)

    def on_click(self, event: events.Click) -> None:
        """A touch on a line selects what is there."""
        self.bench.guarded(lambda: self._touched(event))

    def _touched(self, event: events.Click) -> None:
        self.bench.touched()
        if 0 <= event.y < len(self._drawn):
            line = self._drawn[event.y]
            for start, end, index in line.spans:
                if start <= event.x < end:
                    self.tap(index)
                    return
            if line.index is not None:
                self.tap(line.index)

    def tap(self, index: int) -> None:
        """A touch on one place: choose it; panes of choices take it at once."""
        self.choose(index)

    def on_mouse_scroll_down(self) -> None:
        """The wheel moves the cursor."""
        self.move(1)

    def on_mouse_scroll_up(self) -> None:
        """The wheel moves the cursor."""
        self.move(-1)


class Sheet(Pane):
    """A pane that lies over another for a moment; Esc goes back to where one was, the half-typed entry kept."""

    def closed(self) -> None:
        """Called when the sheet goes away."""
