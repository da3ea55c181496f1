"""The grammar of what a person types: one number, one unit at most, one sign at most, or an open circuit.

Whole match or a sentence saying what to type; nothing is guessed, and pint never sees the text.
"""

from __future__ import annotations

import re
import unicodedata
from dataclasses import dataclass
from decimal import Decimal

from fieldtool.quantities.fields import NO_OPEN, SYMBOLS, Field, symbol_of_spelling
from fieldtool.quantities.show import Sign, cells, decimal_of, plain, shorten, show
from fieldtool.quantities.units import factor

__all__ = ["MOST_CELLS", "Entry", "EntryProblem", "last_digit", "parse"]

MOST_CELLS = 74
"""Width of the findings rows, which every sentence must fit [terminal cells]."""

_MOST_CHARACTERS = 40
"""Longest text read as an entry [characters]; checked first, so that the rest takes bounded time."""

_BLANKS = " \t\r\n\u00a0\u202f"
_OPEN = frozenset({"ol", "o/l", "o.l", "open"})
_ENTRY = re.compile(
    r"(?P<sign>[<>]?)[ \u00a0\u202f]*(?P<number>-?(?:[0-9]+(?:\.[0-9]+)?|\.[0-9]+))[ \u00a0\u202f]*(?P<rest>.*)",
    re.DOTALL,
)
_LEADING_NOUGHT = re.compile(r"[<>]?[ \u00a0\u202f]*-?(0[0-9]+)")
_COMMA = re.compile(r"(0|[1-9][0-9]{0,4}),([0-9]{1,4})")
_MINUSES = "-\u2010\u2011\u2012\u2013\u2014\u2212\ufe63\uff0d"
_OTHER_SIGNS = "≥≤≧≦~≈±＞＜"

_POWER = frozenset({"watt", "kilowatt"})
_MOST_AT_13_A_W = Decimal(3000)
"""Rated power up to which an appliance counts as 13 A [W]: rated power at rated voltage, common practice."""


@dataclass(frozen=True, slots=True)
class Entry:
    """What was understood.

    ``value`` is in the field's stored unit, the bound when ``sign`` is > or <, None when it is ``open``. ``raw`` is
    the text as typed, without blanks around it. ``unit`` is the sign of the unit understood. ``echo`` says it back.
    ``last_digit`` is what one step of the last figure is worth [stored unit]. ``unlikely`` and ``notice`` are
    sentences: the first marks the entry to be looked at again, the second only tells how it was taken.
    """

    value: float | None
    sign: Sign
    raw: str
    unit: str
    echo: str
    last_digit: float
    unlikely: str | None = None
    notice: str | None = None


@dataclass(frozen=True, slots=True)
class EntryProblem:
    """Why nothing was kept, and what to type instead: one sentence or two of at most 74 cells."""

    sentence: str


def parse(
    field: Field, text: str, *, only_number: bool = False, likely: tuple[float, float] | None = None
) -> Entry | EntryProblem:
    """Read one entry of ``field``.

    ``only_number`` refuses >, < and OL where a survey field needs a number. ``likely`` replaces the field's own
    plausible span [stored unit], as for a loop on a TT supply. Never raises on any text; time is bounded.

    >>> from fieldtool.quantities.fields import FIELDS
    >>> parse(FIELDS["low_ohm"], ".52").value, parse(FIELDS["low_ohm"], "530 mΩ").value
    (0.52, 0.53)
    >>> parse(FIELDS["insulation_ohm"], ">999 MΩ").echo
    '>999 MΩ'
    >>> parse(FIELDS["low_ohm"], "0,53").sentence
    "'0,53' has a comma. Type the point: 0.53. Nothing was kept."
    """
    raw = text.strip(_BLANKS)
    if len(raw) > _MOST_CHARACTERS:
        return EntryProblem(f"{_quoted(raw)} is too long. Type one number, for example {field.example}.")
    typed = unicodedata.normalize("NFC", raw)
    if not typed:
        return EntryProblem(f"Nothing was typed. Type a number, for example {field.example}.")
    if typed.casefold() in _OPEN:
        return _open(field, raw, only_number)
    match = _ENTRY.fullmatch(typed)
    if refused := _refused(field, typed, match):
        return EntryProblem(refused)
    assert match is not None  # _refused answers for a text that does not match
    sign: Sign = ">" if match["sign"] == ">" else "<" if match["sign"] == "<" else "="
    if sign != "=" and (only_number or not field.may_be_bounded):
        return EntryProblem(f"This wants the number itself. Leave off the {sign}, for example {field.example}.")
    unit = field.unit_for(match["rest"]) if match["rest"] else field.bare_unit
    if unit is None:
        return EntryProblem(_wrong_unit(field, match["rest"]))
    return _in_range(field, raw, sign, match["number"], unit, match["rest"], likely)


def last_digit(field: Field, raw: str) -> float:
    """What one step of a reading's last figure is worth [stored unit], from its text as typed.

    Never coarser than the quantity is read to: 1.1 typed for a meter's 1.10 must not widen what meets a limit.
    Text that is no number of this field gives the field's own step.

    >>> from fieldtool.quantities.fields import FIELDS
    >>> [last_digit(FIELDS["loop_ohm"], raw) for raw in ("1.1", "1.10", "1100 mΩ", "")]
    [0.01, 0.01, 0.001, 0.01]
    """
    entry = parse(field, raw)
    return entry.last_digit if isinstance(entry, Entry) else field.resolution


def _open(field: Field, raw: str, only_number: bool) -> Entry | EntryProblem:
    if only_number or not field.may_be_open:
        reason = NO_OPEN if only_number else field.if_open
        return EntryProblem(reason.format(example=field.example))
    return Entry(None, "open", raw, field.unit, "OL", field.resolution)


def _refused(field: Field, typed: str, match: re.Match[str] | None) -> str | None:
    """The sentence for a text that is no number with at most one unit; None when it is one."""
    said = _quoted(typed)
    if "," in typed:
        return _comma(typed, said)
    minus = typed.lstrip("<> ")[:1]
    if minus and minus in _MINUSES and not (field.negative_ok and minus == "-"):
        if field.negative_ok:
            return f"{said} has a long dash. Type the short minus: -5."
        return f"{field.a_name[0].upper()}{field.a_name[1:]} cannot be below 0. {field.if_low}"
    if typed[0] in _OTHER_SIGNS:
        return f"'{typed[0]}' has no meaning here. Type > for over the range, < for under it."
    if (nought := _LEADING_NOUGHT.match(typed)) is not None:
        digits = nought[1]
        if typed == digits and len(digits) <= 5 and field.example.startswith("0."):
            return f"{said} starts with 0. Is the point missing? Type it again, as 0.{digits[1:]}."
        return f"{said} starts with 0. Type it again, for example {field.example}."
    if match is not None and match["rest"] == ".":
        return f"{said} stops at the point. Type the rest, or leave the point off."
    if match is None or (field.unit_for(match["rest"]) is None and _holds_number(match["rest"])):
        return f"{said} is not a number. Type it again, for example {field.example}."
    if field.whole and "." in match["number"]:
        return f"{said} is not a whole number. This counts things: type {field.example}, say."
    return None


def _holds_number(rest: str) -> bool:
    # Only a unit's own square may carry a figure: anything else is a second number or a broken first one.
    return any(char.isnumeric() or char == "." for char in rest) and symbol_of_spelling(rest) is None


def _comma(typed: str, said: str) -> str:
    match = _COMMA.fullmatch(typed)
    if match is None:
        return f"{said} has a comma. Type a point instead. Nothing was kept."
    whole, part = match.groups()
    if len(part) == 3 and whole != "0":
        return f"{said} has a comma. Type {whole}.{part} or {whole}{part}. Nothing was kept."
    return f"{said} has a comma. Type the point: {whole}.{part}. Nothing was kept."


def _wrong_unit(field: Field, rest: str) -> str:
    typed = shorten(plain(rest), 12)
    if not field.tokens:
        return f"This counts things. Type only the number, without '{typed}'."
    known = symbol_of_spelling(rest)
    after = "M" if field.bare_unit == "megaohm" else field.unit
    if known is None:
        return f"'{typed}' is no unit here. Type {after} after it, or only the number."
    rest_of_it = f"in {field.unit} and you typed {known}. Type {after} after it, or only the number."
    sentence = f"This is {field.a_name} {rest_of_it}"
    return sentence if cells(sentence) <= MOST_CELLS else f"This is {rest_of_it}"


def _in_range(
    field: Field, raw: str, sign: Sign, number: str, unit: str, rest: str, likely: tuple[float, float] | None
) -> Entry | EntryProblem:
    typed = Decimal(number)
    worth = _worth(field, unit)
    exact = typed * worth
    is_13_a = unit in _POWER and exact > 13 and typed * decimal_of(factor(unit, "watt")) <= _MOST_AT_13_A_W
    if is_13_a:
        exact = Decimal(13)
    said = f"{_tidy(number)} {SYMBOLS[unit]}".rstrip()
    if not decimal_of(field.low) <= exact <= decimal_of(field.high):
        return EntryProblem(_out_of_range(field, unit, said, too_high=exact > decimal_of(field.high)))
    shown = said if unit == field.bare_unit else _converted(field, unit, exact)
    echo = shorten(shown if sign == "=" else f"{sign}{shown}", 24)
    step = Decimal(1).scaleb(min(0, int(typed.as_tuple().exponent))) * worth
    low, high = likely if likely is not None else (field.likely_low, field.likely_high)
    return Entry(
        value=float(exact) + 0.0,
        sign=sign,
        raw=raw,
        unit=SYMBOLS[unit],
        echo=echo,
        last_digit=min(float(step), field.resolution),
        unlikely=_unlikely(field, exact, sign, echo, low, high),
        notice=_notice(field, unit, number, rest, shown, is_13_a),
    )


def _converted(field: Field, unit: str, exact: Decimal) -> str:
    """What a number typed in another unit comes to in the field's own; watts to the field's decimals only."""
    if unit in _POWER:
        return show(field, float(exact))
    return f"{_full(exact / decimal_of(field.scale))} {field.unit}"


def _worth(field: Field, unit: str) -> Decimal:
    """What one typed unit is worth [stored units]; the unit of a bare number needs no look-up."""
    if unit == field.bare_unit:
        return decimal_of(field.scale)
    if field.at_volts is not None and unit in _POWER:
        return decimal_of(factor(unit, "watt")) / decimal_of(field.at_volts)
    return decimal_of(factor(unit, field.si))


def _out_of_range(field: Field, unit: str, said: str, *, too_high: bool) -> str:
    if too_high and unit == "megaohm" and field.unit_for("m") == "milliohm":
        return f"M is a million, m a thousandth: {shorten(said, 12)} is too much. Type it again."
    if too_high:
        hint = field.if_high if unit == field.bare_unit else "Type it again."
        return _fitted(said, f" is over {show(field, field.high)}, the most taken here. {hint}")
    return _fitted(said, f" is under {show(field, field.low)}, the least taken here. {field.if_low}")


def _unlikely(field: Field, exact: Decimal, sign: Sign, said: str, low: float, high: float) -> str | None:
    # An upper bound cannot be too high nor a lower bound too low: neither says where the value is.
    subject = "this reading" if field.may_be_bounded else field.a_name
    if exact > decimal_of(high) and sign != "<":
        return _fitted(said, f" is high for {subject}. Kept, marked to look at again.")
    if exact < decimal_of(low) and sign != ">":
        return _fitted(said, f" is low for {subject}. Kept, marked to look at again.")
    return None


def _notice(field: Field, unit: str, number: str, rest: str, shown: str, is_13_a: bool) -> str | None:
    typed, amount = shorten(_tidy(number), 6), shorten(shown, 10)
    if is_13_a:
        return f"{typed} {SYMBOLS[unit]} is taken as {amount}: up to 3 kW counts as 13 A."
    if unit in _POWER:
        return f"{typed} {SYMBOLS[unit]} at {field.at_volts:g} V is {amount}."
    if rest == "m" and unit == "milliohm":
        return f"{typed} m is {typed} mΩ, that is {amount}. M is a million, m a thousandth."
    return None


def _full(number: Decimal) -> str:
    """All figures of a number, up to twelve, without trailing noughts."""
    text = f"{decimal_of(float(number)):f}"
    return text.rstrip("0").rstrip(".") if "." in text else text


def _tidy(number: str) -> str:
    """The figures as typed, with the nought before a leading point."""
    return number.replace(".", "0.", 1) if number.lstrip("-").startswith(".") else number


def _fitted(said: str, rest: str) -> str:
    return f"{shorten(said, MOST_CELLS - cells(rest))}{rest}"


def _quoted(text: str) -> str:
    cut = "…" if len(text) > _MOST_CHARACTERS else ""
    return f"'{shorten(plain(text[:_MOST_CHARACTERS]) + cut, 14)}'"
