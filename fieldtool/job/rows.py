"""What every row of a job has in common: strict, frozen, finite, with text that can be shown anywhere."""

from __future__ import annotations

import unicodedata
from datetime import UTC, datetime
from typing import Annotated, Any

from pydantic import AfterValidator, BaseModel, ConfigDict, Field, JsonValue, StringConstraints

__all__ = ["Id", "LongText", "Moment", "Row", "Text", "ask"]

_HIDDEN = {"Cc", "Cf", "Cs", "Co", "Zl", "Zp"}
"""Unicode categories that draw nothing or redraw what is beside them: controls, bidi marks, surrogates."""


def _shown(text: str) -> str:
    if text.isascii() and text.isprintable():
        return text
    for char in text:
        if unicodedata.category(char) in _HIDDEN and char != "\n":
            raise ValueError(f"holds the hidden character U+{ord(char):04X}; type it again without it")
    return text


def _aware(moment: datetime) -> datetime:
    if moment.tzinfo is None:
        raise ValueError("has no time zone; write it like 2026-12-01T09:00:00Z")
    return moment.astimezone(UTC)


Text = Annotated[str, StringConstraints(max_length=200), AfterValidator(_shown)]
"""One line of a person's text: at most 200 characters, nothing hidden."""

LongText = Annotated[str, StringConstraints(max_length=4000), AfterValidator(_shown)]
"""A note or a reason: at most 4,000 characters, line breaks allowed."""

Id = Annotated[str, StringConstraints(pattern=r"^[a-z][a-z0-9_]{0,31}$")]
"""A short id, unique in its job, such as ``p7``."""

Moment = Annotated[datetime, AfterValidator(_aware)]
"""An instant, kept in UTC."""


class Row(BaseModel):
    """One row of a job. Rows are never edited: a change makes a new one."""

    model_config = ConfigDict(frozen=True, strict=True, extra="forbid", allow_inf_nan=False)

    id: Id
    note: LongText = ""


def ask(
    label: str,
    *,
    quantity: str | None = None,
    help: str = "",
    default: Any = None,
    optional: bool = False,
    **rules: Any,
) -> Any:
    """A survey field: its label, the quantity it is entered as, and what to look for.

    The survey's forms are made from this, so a new field needs no other place. ``optional`` marks one that most
    jobs do without; ``rules`` are pydantic's own.
    """
    extra: dict[str, JsonValue] = {"ask": label, "quantity": quantity, "help": help, "optional": optional}
    return Field(default, json_schema_extra=extra, **rules)
