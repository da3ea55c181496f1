"""How the record says things: values with their units, moments, survey answers, who and with what."""

from __future__ import annotations

from datetime import datetime
from math import isfinite

from pydantic import BaseModel

from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS, words
from fieldtool.job.reading import Reading
from fieldtool.quantities.fields import FIELDS
from fieldtool.quantities.show import NotShowable, show
from fieldtool.reference.look import OutsideTable, cable, device

__all__ = [
    "amount", "answers_of", "cable_words", "device_words", "instrument_words", "moment", "origin_words", "outcome_words",
    "person", "place", "unit_sign", "value_of",
]  # fmt: skip

_SIGNS = {"ohm": "Ω", "Mohm": "MΩ", "A2s": "A²s", "mm2": "mm²", "m2": "m²", "ohm/km": "Ω/km", "degC": "°C"}
_SIGNS |= {"ohm/m": "Ω/m", "1/degC": "1/°C", "text": "", "1": "", "yes/no": ""}
_STATES = {
    "holds": "holds",
    "condition": "holds on a condition",
    "broken": "does not hold",
    "cannot_tell": "cannot tell yet",
    "not_applicable": "does not apply",
}


def unit_sign(unit: str) -> str:
    """The sign of a unit as it is printed."""
    return _SIGNS.get(unit, unit)


def amount(value: float | None, unit: str) -> str:
    """A value with its unit to five significant figures; a dash where there is none; ``open`` where it is infinite."""
    if value is None:
        return "–"
    if not isfinite(value):
        return "open"
    if unit == "ohm" and abs(value) >= 1e5:
        value, unit = value / 1e6, "Mohm"
    if unit == "A" and abs(value) >= 1000:
        value, unit = value / 1000, "kA"
    text = (
        f"{value:.2f}" if unit == "ohm" and 0 < value < 10 and abs(value - round(value, 2)) < 1e-9 else f"{value:.5g}"
    )
    return f"{text} {unit_sign(unit)}".rstrip()


def moment(at: datetime | None) -> str:
    """A moment in this machine's own time; a dash where there is none."""
    return f"{at.astimezone():%d %b %Y %H:%M}" if at is not None else "–"


def value_of(reading: Reading) -> str:
    """What a reading said: its value, ``OL``, right or wrong, or that it was not taken."""
    if reading.origin == "limitation":
        return "not taken"
    key = TESTS[reading.test].field
    if key is None:
        return reading.answer or "–"
    try:
        return show(FIELDS[key], reading.value, reading.sign)
    except NotShowable:
        return "–"


def origin_words(reading: Reading) -> str:
    """Measured, calculated, given by the distributor, or a limitation."""
    if reading.origin == "measured" and reading.mode in ("enquiry", "calculated"):
        return "distributor's figure" if reading.mode == "enquiry" else "calculated"
    return str(reading.origin)


def person(job: Job, person_id: str | None) -> str:
    """A person's name; the id where nobody has it; a dash where nobody is named."""
    return next((one.name for one in job.people if one.id == person_id), person_id or "–")


def place(job: Job, place_id: str | None, circuit_id: str | None = None) -> str:
    """What a person calls a point, a new outlet, a circuit or the board."""
    if place_id is not None and place_id == circuit_id:
        return job.circuit(place_id).name or place_id
    return job.point_name(place_id)


def instrument_words(job: Job, reading: Reading) -> str:
    """The instrument that a reading was taken with; a dash where none was named."""
    tool = next((one for one in job.instruments if one.id == reading.instrument), None)
    return tool.name if tool is not None else "–"


def cable_words(key: str | None) -> str:
    """A cable of the catalogue in words; its key where it is not in it."""
    if not key:
        return "not known"
    try:
        return cable(key).words
    except OutsideTable:
        return key


def device_words(key: str, in_a: float) -> str:
    """A protective device in words: kind, rating, standard."""
    try:
        kind = device(key)
    except OutsideTable:
        return f"{key} {in_a:g} A"
    return f"{kind.words} {in_a:g} A, {kind.standard}"


def answers_of(row: BaseModel) -> list[tuple[str, str]]:
    """Every answer of a survey form: its question's label and the answer. An optional one unanswered is left out."""
    out = []
    for name, info in type(row).model_fields.items():
        extra = info.json_schema_extra
        if not isinstance(extra, dict) or "ask" not in extra:
            continue
        value = getattr(row, name)
        if value in (None, ""):
            if not extra.get("optional") and value is None:
                out.append((str(extra["ask"]), "not known"))
            continue
        out.append((str(extra["ask"]), _answer(name, extra.get("quantity"), value, typed=info.annotation is str)))
    return out


def _answer(name: str, quantity: object, value: object, *, typed: bool) -> str:
    if name == "cable":
        return cable_words(str(value))
    if isinstance(quantity, str) and isinstance(value, int | float):
        return show(FIELDS[quantity], float(value))
    if typed:
        return str(value)
    return words(f"{value:g}" if isinstance(value, float) else str(value))


def outcome_words(outcome: str) -> str:
    """A rule's outcome as the record says it."""
    return _STATES[outcome]
