"""The number pad on the screen: keys three rows high for a thumb, left or right hand, never taking the focus."""

from __future__ import annotations

from typing import TYPE_CHECKING

from textual.app import ComposeResult
from textual.containers import Grid
from textual.widgets import Button

if TYPE_CHECKING:
    from screens.workbench import Workbench

__all__ = ["KEYS", "NumberPad", "big_key"]

KEYS: tuple[tuple[str, str], ...] = (
    ("7", "7"), ("8", "8"), ("9", "9"), ("<x", "backspace"),
    ("4", "4"), ("5", "5"), ("6", "6"), (">", "over"),
    ("1", "1"), ("2", "2"), ("3", "3"), ("/", "missing"),
    ("0", "0"), (".", "."), ("OL", "OL"), ("skip", "skip"),
    ("back", "back"), ("menu", "menu"), ("F6", "f6"), ("NEXT", "enter"),
)  # fmt: skip
"""Label and meaning of every key, row by row."""


class NumberPad(Grid, can_focus=False):
    """Twenty keys, 7 cells by 3 rows each."""

    DEFAULT_CSS = """
    NumberPad { width: 28; height: 15; grid-size: 4 5; grid-gutter: 0; background: $background; display: none; }
    NumberPad Button {
        width: 7; min-width: 7; height: 3; border: tall $rule; background: $key-ground; color: $key-text;
        text-style: bold; content-align: center middle;
    }
    NumberPad.-shown { display: block; }
    """

    def __init__(self, bench: Workbench) -> None:
        super().__init__(id="pad")
        self.bench = bench

    def compose(self) -> ComposeResult:
        """The keys, none of which takes the focus."""
        for label, meaning in KEYS:
            yield big_key(label, f"key-{_name(meaning)}")

    def on_button_pressed(self, event: Button.Pressed) -> None:
        """A key was touched: the same as typing it."""
        event.stop()
        meaning = next(key for _, key in KEYS if f"key-{_name(key)}" == event.button.id)
        self.bench.pad_key(meaning)


def big_key(label: str, key_id: str) -> Button:
    """A key for a thumb: never takes the focus, and shows its whole label."""
    button = Button(label, id=key_id)
    button.can_focus = False
    button.styles.line_pad = 0
    return button


def _name(meaning: str) -> str:
    return {".": "point"}.get(meaning, meaning)
