"""From stored values to text a person reads: formatting, rounding towards safety, and terminal cell budgets."""

from __future__ import annotations

import math
import unicodedata
from decimal import ROUND_CEILING, ROUND_FLOOR, ROUND_HALF_UP, Decimal
from functools import lru_cache
from typing import Literal

from fieldtool.quantities.fields import Field

__all__ = [
    "NotShowable",
    "Sign",
    "cells",
    "decimal_of",
    "exceeds",
    "folded",
    "number_text",
    "plain",
    "round_headroom_down_m",
    "round_iz_down",
    "round_limit_down",
    "round_prediction_up",
    "round_reading_nearest",
    "round_volt_drop_up",
    "shorten",
    "show",
]

Sign = Literal["=", ">", "<", "open"]
"""What the meter said: the value, more than it, less than it, or an open circuit."""

_HIDDEN = frozenset({"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"})
"""Unicode categories that draw nothing, move the cursor or turn the writing direction (Unicode 15, chapter 4)."""

_NO_WIDTH = frozenset({"Mn", "Me", "Cc", "Cf"})
"""Unicode categories that take no cell of their own (Unicode standard annex 11)."""


_DRAWN_WIDE = "\ufe0f"
"""The mark that asks for the picture form of the sign before it, two cells wide."""


class NotShowable(ValueError):
    """A value that cannot be rounded or shown: not a number, or none at all where one is needed."""


def decimal_of(value: float) -> Decimal:
    """The decimal number a float stands for, cleared of binary noise beyond twelve figures; same unit.

    Raises NotShowable for a value that is not a number.

    >>> decimal_of(0.1 + 0.2)
    Decimal('0.300000000000')
    """
    if math.isnan(value):
        raise NotShowable("a value that is not a number cannot be shown or compared")
    return Decimal(f"{value:#.12g}")


def _rounded(value: float, step: str, rounding: str) -> float:
    number = decimal_of(value)
    if number.is_infinite():
        return value
    unit = Decimal(step)
    return float((number / unit).to_integral_value(rounding) * unit) + 0.0


def round_limit_down(value: float, places: int = 3) -> float:
    """A limit as shown: rounded down to ``places`` decimals, same unit. The unrounded limit is what judges.

    >>> round_limit_down(0.8 * 0.95 * 230 / 160), round_limit_down(0.8 * 0.95 * 230 / 100)
    (1.092, 1.748)
    """
    return _rounded(value, f"1e-{places}", ROUND_FLOOR)


def round_prediction_up(value: float, places: int = 2) -> float:
    """A predicted reading as shown: rounded up to ``places`` decimals, same unit.

    >>> round_prediction_up(0.701), round_prediction_up(0.35 + 0.35)
    (0.71, 0.7)
    """
    return _rounded(value, f"1e-{places}", ROUND_CEILING)


def round_reading_nearest(value: float, places: int = 2) -> float:
    """A value rounded to the nearest ``places`` decimals, half away from zero, same unit.

    >>> round_reading_nearest(1.005), round_reading_nearest(0.345)
    (1.01, 0.35)
    """
    return _rounded(value, f"1e-{places}", ROUND_HALF_UP)


def round_headroom_down_m(metres: float) -> float:
    """Metres of cable left [m], rounded down to the half metre, also below nought; without limit stays infinite.

    >>> round_headroom_down_m(3.4), round_headroom_down_m(2.9999999999999996), round_headroom_down_m(-0.2)
    (3.0, 3.0, -0.5)
    """
    return _rounded(metres, "0.5", ROUND_FLOOR)


def round_iz_down(amps: float) -> float:
    """A cable's current-carrying capacity [A], rounded down to 0.1 A.

    >>> round_iz_down(27 * 0.85)
    22.9
    """
    return _rounded(amps, "0.1", ROUND_FLOOR)


def round_volt_drop_up(volts: float) -> float:
    """A voltage drop [V], rounded up to 0.1 V.

    >>> round_volt_drop_up(4.68)
    4.7
    """
    return _rounded(volts, "0.1", ROUND_CEILING)


def exceeds(reading: float, limit: float, last_digit: float) -> bool:
    """True when a reading is over a limit: by more than half the reading's own last digit; all in one unit.

    A meter showing 1.75 may stand for anything from 1.745 to 1.755, so 1.75 against 1.748 is at the limit and
    1.76 is over. ``last_digit`` comes from `entry.last_digit`. Raises NotShowable for a value that is not a number,
    or for a last digit that is not a number from 0 up.

    >>> [exceeds(zs, 0.8 * 0.95 * 230 / 160, 0.01) for zs in (1.09, 1.10)]
    [False, True]
    """
    digit = decimal_of(last_digit)
    if digit < 0 or digit.is_infinite():
        raise NotShowable("the last digit of a reading is a number from 0 up")
    got, most = decimal_of(reading), decimal_of(limit)
    if most.is_infinite() or got.is_infinite():
        return got > most
    return got - most > digit / 2


def number_text(field: Field, value: float) -> str:
    """The number alone, in the field's shown unit, from a finite value in its stored unit; nearest, half up."""
    number = decimal_of(value) / decimal_of(field.scale)
    places = 0 if abs(number) >= decimal_of(field.whole_from) else field.decimals
    number = number.quantize(Decimal(1).scaleb(-places), ROUND_HALF_UP)
    text = f"{abs(number) if number == 0 else number:f}"
    if "." in text and abs(number) >= decimal_of(field.trim_from):
        text = text.rstrip("0").rstrip(".")
    return text


def show(field: Field, value: float | None, sign: Sign = "=") -> str:
    """A value as a person reads it: number, space, unit; ``>`` or ``<`` before it; ``OL`` for an open circuit.

    ``value`` is in the field's stored unit; an infinite one is an open circuit. Raises NotShowable when there is
    no number and the sign is not ``open``.

    >>> from fieldtool.quantities.fields import FIELDS
    >>> show(FIELDS["loop_ohm"], 0.53), show(FIELDS["insulation_ohm"], 200e6, ">"), show(FIELDS["fault_a"], 1250)
    ('0.53 Ω', '>200 MΩ', '1.25 kA')
    """
    if sign == "open" or value == math.inf:
        return "OL"
    if value is None or math.isinf(value):
        raise NotShowable(f"{field.a_name} without a number cannot be shown")
    return f"{'' if sign == '=' else sign}{number_text(field, value)} {field.unit}".rstrip()


def cells(text: str) -> int:
    """How many terminal cells a one-line text takes: wide characters two, combining and hidden ones none.

    >>> cells("0.53 Ω"), cells("台所"), cells("e\\u0301")
    (6, 4, 1)
    """
    return len(text) if text.isascii() and text.isprintable() else sum(_width(char) for char in text)


@lru_cache(maxsize=4096)
def _width(char: str) -> int:
    if char == _DRAWN_WIDE:
        return 1  # widens the narrow sign before it; counted too wide after a wide one, which a budget can bear
    if unicodedata.category(char) in _NO_WIDTH:
        return 0
    return 2 if unicodedata.east_asian_width(char) in ("W", "F") else 1


def shorten(text: str, most: int) -> str:
    """The text if it fits in ``most`` cells, else its beginning and an ellipsis, never wider than ``most``.

    A pile of marks without width is cut too: no more than four characters a cell are kept.

    >>> shorten("left of hob", 6), shorten("hob", 6), shorten("台所台所", 4)
    ('left …', 'hob', '台…')
    """
    if most <= 0:
        return ""
    if len(text) <= 4 * most and cells(text) <= most:
        return text
    kept: list[str] = []
    room = most - 1
    for char in text[: 4 * most - 1]:
        room -= _width(char)
        if room < 0:
            break
        kept.append(char)
    return "".join(kept) + "…"


def folded(text: str, most: int, indent: str = "") -> list[str]:
    """The text whole on as many lines of ``most`` cells as it takes, each with ``indent`` before it, broken at spaces
    and inside a word that is longer than a line.

    >>> folded("left of the hob", 9, "  "), folded("台所台所", 5)
    (['  left of', '  the hob'], ['台所', '台所'])
    """
    room = max(most - cells(indent), 2)
    lines = [""]
    for word in text.split():
        if lines[-1] and cells(lines[-1]) + 1 + cells(word) <= room:
            lines[-1] += f" {word}"
            continue
        if lines[-1]:
            lines.append("")
        for char in word:
            if cells(lines[-1] + char) > room:
                lines.append("")
            lines[-1] += char
    return [indent + line for line in lines]


def plain(text: str) -> str:
    r"""The text on one line with nothing hidden in it: controls, escape codes and direction marks written out.

    >>> print(plain("P4\x1b[31m\nhob"))
    P4\x1b[31m\nhob
    """
    if text.isascii() and text.isprintable():
        return text
    return "".join(
        char.encode("unicode_escape").decode("ascii") if unicodedata.category(char) in _HIDDEN else char
        for char in text
    )
