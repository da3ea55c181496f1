"""Words that several panes use."""

from __future__ import annotations

from typing import Any, get_args

from pydantic.fields import FieldInfo

from fieldtool.job.kinds import words
from fieldtool.quantities.show import cells

__all__ = ["POINT_MARK", "choice_words", "members_of", "show_value", "wrapped"]

POINT_MARK = {"twin": "(2)", "single": "(1)", "fcu": "(F)", "appliance": "(A)", "joint": "(J)", "blank": "( )"}
"""How each kind of point is drawn, on the rail and on the map."""


def choice_words(member: object) -> str:
    """A member of a closed list as it is offered."""
    text = str(int(member)) if isinstance(member, float) and member.is_integer() else str(member)
    return words(text)


def members_of(info: FieldInfo) -> tuple[object, ...]:
    """The members of a field's closed list; empty where it is not one."""
    return tuple(_literals(info.annotation))


def _literals(annotation: Any) -> list[object]:
    found: list[object] = []
    for part in get_args(annotation):
        if isinstance(part, str | int) and not isinstance(part, bool):
            found.append(part)
        elif part is not type(None):
            found.extend(_literals(part))
    return found


def show_value(value: object) -> str:
    """A survey value as a row shows it."""
    if value is None or value == "":
        return ""
    if isinstance(value, float):
        return f"{value:g}"
    return choice_words(value) if isinstance(value, str) else str(value)


def wrapped(text: str, width: int) -> list[str]:
    """A sentence over as many lines of ``width`` cells as it takes; nothing of it is cut."""
    out, line = [], ""
    for word in text.split():
        if line and cells(line) + 1 + cells(word) > width:
            out.append(line)
            line = word
        else:
            line = f"{line} {word}".strip()
    return [*out, line] if line else out or [""]
