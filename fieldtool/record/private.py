"""A job without its customer: what says who they are or where they live is left out before anything is written."""

from __future__ import annotations

import re
from typing import Any, get_args

from pydantic import BaseModel
from pydantic.fields import FieldInfo
from pydantic.types import StringConstraints

from fieldtool.job.job import Job

__all__ = ["LEFT_OUT", "is_free_text", "their_words", "without_customer"]

LEFT_OUT = "left out"
"""What stands where a customer's own words stood."""

_SITE = ("name", "customer", "contact", "address")
_PERMISSIONS = ("permission", "origin_permission", "handed_over")


def without_customer(job: Job) -> Job:
    """The job with the site's name, customer, contact and address left out, wherever they are repeated.

    The names of people who live there, and what they said when they gave permission, go too. The history is
    emptied: it holds everything that was ever typed. Catalogue keys and closed lists are never touched.
    """
    site = job.site.model_copy(update=dict.fromkeys(_SITE, "") | {"note": LEFT_OUT if job.site.note else ""})
    people = tuple(
        one.model_copy(update={"name": "the occupier", "note": ""}) if one.role == "occupier" else one
        for one in job.people
    )
    isolation = tuple(
        entry.model_copy(update={"detail": LEFT_OUT}) if entry.kind in _PERMISSIONS and entry.detail else entry
        for entry in job.isolation
    )
    bare = job.model_copy(update={"site": site, "people": people, "isolation": isolation, "history": ()})
    # A fresh object: what the old one had worked out of itself does not come along.
    fresh = Job.model_construct(**{name: getattr(bare, name) for name in Job.model_fields})
    found = their_words(job)
    if found is None:
        return fresh
    return Job.model_construct(**{name: _masked(getattr(fresh, name), found) for name in Job.model_fields})


def their_words(job: Job) -> re.Pattern[str] | None:
    """What names the customer, the place and who lives there, wherever it is repeated; None where nothing is known."""
    hidden = [value for name in _SITE if len(value := str(getattr(job.site, name)).strip()) >= 3]
    hidden += [line.strip() for value in hidden for line in re.split(r"[\n,]", value) if len(line.strip()) >= 4]
    occupiers = [one for one in job.people if one.role == "occupier"]
    hidden += [one.name.strip() for one in occupiers if len(one.name.strip()) >= 3]
    if not hidden:
        return None
    words = sorted(set(hidden), key=len, reverse=True)
    return re.compile("|".join(rf"(?<!\w){re.escape(word)}(?!\w)" for word in words), re.IGNORECASE)


def is_free_text(info: FieldInfo) -> bool:
    """True for a field that holds a person's own words: text with a longest length and no pattern."""
    return any(
        isinstance(item, StringConstraints) and item.max_length is not None and item.pattern is None
        for item in _metadata(info)
    )


def _metadata(info: FieldInfo) -> list[Any]:
    found = list(info.metadata)
    for part in get_args(info.annotation):
        found += list(getattr(part, "__metadata__", ()))
    return found


_KEYS = {("Device", "type"), ("Circuit", "cable"), ("Run", "cable"), ("Route", "cable"), ("Choice", "value")}
_KEYS |= {("Override", "rule"), ("Override", "rule_set"), ("Override", "figures"), ("VerdictKept", "way")}
_KEYS |= {("VerdictKept", name) for name in ("rule_set", "edition", "figures", "outcome")}
_KEYS |= {("KeptFinding", name) for name in ("rule", "place", "outcome", "unit")} | {("Parted", "conductor")}
_KEYS |= {("About", "edition"), ("About", "check"), ("Reading", "raw")}
"""Texts that are keys of ours, not a person's words."""


def _masked(value: Any, found: re.Pattern[str]) -> Any:
    if isinstance(value, tuple):
        return tuple(_masked(item, found) for item in value)
    if not isinstance(value, BaseModel):
        return value
    changed: dict[str, Any] = {}
    for name, info in type(value).model_fields.items():
        held = getattr(value, name)
        if isinstance(held, str):
            if is_free_text(info) and (type(value).__name__, name) not in _KEYS:
                changed[name] = found.sub(LEFT_OUT, held)
        elif isinstance(held, tuple | BaseModel):
            changed[name] = _masked(held, found)
    return value.model_copy(update=changed) if changed else value
