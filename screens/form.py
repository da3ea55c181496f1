"""Forms made from the models: a field's label, quantity and choices stand beside the field itself, nowhere else."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from pydantic import BaseModel
from rich.text import Text

from fieldtool.quantities.entry import EntryProblem, parse
from fieldtool.quantities.fields import field as quantity_field
from fieldtool.quantities.show import plain, shorten, show
from screens.base import Line, Pane, Target
from screens.words import choice_words, members_of, show_value

__all__ = ["FieldRow", "Form", "fields_of"]


@dataclass(frozen=True, slots=True)
class FieldRow:
    """One question of a form: what it asks, what stands there, and what takes an answer.

    ``put`` takes the value (None for not known) and gives a sentence when it cannot be taken.
    """

    section: str
    label: str
    value: str
    put: Callable[[Any], str]
    quantity: str = ""
    choices: tuple[tuple[str, Any], ...] = ()
    help: str = ""
    needed: bool = True
    opens: Callable[[], None] | None = None

    @property
    def known(self) -> bool:
        """True where it is answered."""
        return self.value != ""


def fields_of(
    section: str, model: BaseModel, put: Callable[[str, Any], str], *, skip: tuple[str, ...] = ()
) -> list[FieldRow]:
    """A row for every field of a model that asks something, in the model's order.

    ``put`` takes the field's name and its value.
    """
    rows: list[FieldRow] = []
    for name, info in type(model).model_fields.items():
        extra = info.json_schema_extra
        if not isinstance(extra, dict) or name in skip:
            continue
        value = getattr(model, name)
        quantity = str(extra.get("quantity") or "")
        members = members_of(info) if not quantity else ()
        shown = show_value(value)
        if quantity and isinstance(value, int | float):
            shown = show(quantity_field(quantity), float(value))
        rows.append(
            FieldRow(
                section,
                str(extra["ask"]),
                shown,
                lambda given, name=name: put(name, given),  # type: ignore[misc]
                quantity,
                tuple((choice_words(member), member) for member in members),
                str(extra.get("help") or ""),
                needed=info.default is None and not extra.get("optional"),
            )
        )
    return rows


def number_of(row: FieldRow, typed: str) -> tuple[float | None, str]:
    """A typed number in the stored unit, or one sentence saying what is wrong."""
    entry = parse(quantity_field(row.quantity), typed, only_number=True)
    if isinstance(entry, EntryProblem):
        return None, entry.sentence
    return entry.value, entry.unlikely or ""


class Form(Pane):
    """A pane of questions, one on a line. A digit answers a choice at once; a number or a text waits for Enter."""

    def rows(self) -> list[FieldRow]:
        """Every question."""
        return []

    def head(self) -> list[Line]:
        """Lines above the questions."""
        return []

    def count(self) -> int:
        """As many places as questions."""
        return len(self.rows())

    def lines(self) -> list[Line]:
        """The questions by section."""
        palette, out, section = self.palette, self.head(), ""
        width = max(40, self.size.width)
        for number, row in enumerate(self.rows()):
            if row.section != section:
                section = row.section
                out.append(Line(Text(f" {section}", style=f"bold {palette.muted}")))
            here = number == self.cursor
            mark = "ok" if row.known else ("??" if row.needed else "  ")
            line = Text(no_wrap=True, overflow="crop")
            line.append(f"{'>' if here else ' '} ", style=f"bold {palette.text}")
            line.append(mark, style=palette.mark(mark))
            label = f" {shorten(row.label, 34):<35}"
            value = shorten(plain(row.value), width - 44) if row.known else "[ ]" if here else "·"
            style = f"bold {palette.cur[0]} on {palette.cur[1]}" if here else palette.text
            line.append(label, style=style)
            line.append(f" {value}", style=f"bold {palette.text}" if row.known else palette.muted)
            out.append(Line(line, number))
        return out

    def current(self) -> FieldRow | None:
        """The question at the cursor."""
        rows = self.rows()
        return rows[self.cursor] if 0 <= self.cursor < len(rows) else None

    def target(self) -> Target:
        """The entry line takes the answer to the question at the cursor."""
        row = self.current()
        if row is None:
            return Target("")
        if row.opens is not None:
            return Target(row.label, "none", lambda _: (row.opens() or True, ""))  # type: ignore[misc]
        if row.choices:
            digits = tuple((str((n + 1) % 10), words) for n, (words, _) in enumerate(row.choices[:10]))
            return Target(row.label, "choice", lambda typed: self._choice(row, typed), choices=digits)
        kind = "number" if row.quantity else "text"
        return Target(
            row.label,
            kind,  # type: ignore[arg-type]
            lambda typed: self._typed(row, typed),
            lambda typed: self._preview(row, typed),
            value=row.value,
        )

    def _choice(self, row: FieldRow, typed: str) -> tuple[bool, str]:
        if not typed:
            self.move(1)
            return True, ""
        place = (int(typed) - 1) % 10 if typed.isdecimal() and len(typed) == 1 else -1
        if not 0 <= place < len(row.choices):
            return False, f"Type 1 to {len(row.choices)}, or + where you do not know."
        return self._put(row, row.choices[place][1])

    def _typed(self, row: FieldRow, typed: str) -> tuple[bool, str]:
        if not typed.strip():
            self.move(1)
            return True, ""
        if not row.quantity:
            return self._put(row, typed.strip())
        value, said = number_of(row, typed)
        if value is None:
            return False, said
        taken, why = self._put(row, value)
        return taken, why or said

    def _put(self, row: FieldRow, value: Any) -> tuple[bool, str]:
        problem = row.put(value)
        if problem:
            return False, shorten(problem, 74)
        self.move(1)
        return True, ""

    def _preview(self, row: FieldRow, typed: str) -> str:
        if not row.quantity:
            return ""
        entry = parse(quantity_field(row.quantity), typed, only_number=True)
        return entry.sentence if isinstance(entry, EntryProblem) else f"= {entry.echo.lstrip('= ')}"

    def skip(self) -> None:
        """``+``: do not know. What stood there is taken back; the verdict will say that it waits."""
        row = self.current()
        if row is not None and row.known and row.needed and row.opens is None:
            self.bench.say(row.put(None) or f"{row.label}: not known now.")
        self.move(1)

    def next_missing(self) -> None:
        """``/``: the next question without an answer."""
        rows = self.rows()
        for step in range(1, len(rows) + 1):
            place = (self.cursor + step) % len(rows)
            if not rows[place].known and rows[place].needed:
                self.choose(place)
                return
        self.bench.say("Nothing is missing here.")

    def notes(self) -> tuple[str, str]:
        """What to look for at this question."""
        row = self.current()
        left = sum(not item.known and item.needed for item in self.rows())
        first = f"{row.help}" if row is not None and row.help else ""
        return (
            first,
            f"??  {left} questions to go; / jumps to the next." if left else "ok  Every question is answered.",
        )

    def hints(self) -> str:
        """The keys that matter here."""
        return "digit or Enter answers  + do not know  - back  / missing  F1 help  F8 pad  Esc menu"
