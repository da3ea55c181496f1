"""The JSON Schema of a job file: what stands on the disk, in either of the two forms in which it is read.

Made from the job's own models, so that it cannot fall behind them. The tool asks for more than a schema can say:
that every id named is there, that a reading has one content, that the seal holds.
"""

from __future__ import annotations

from typing import Any

from fieldtool.job.job import SCHEMA, Job
from fieldtool.jobfile.rows import SINGLES, TABLES

__all__ = ["job_schema"]

_DRAFT = "https://json-schema.org/draft/2020-12/schema"


def job_schema() -> dict[str, Any]:
    """The schema of a job file of the present make, draft 2020-12.

    What the schema refuses, the tool refuses too (save ``true`` for a 1 where only some numbers may stand); what the
    tool wrote, the schema accepts.
    """
    made = Job.model_json_schema(by_alias=True)
    definitions = made["$defs"]
    definitions["About"] = _about(definitions["About"])
    properties: dict[str, Any] = {"_default": {"type": "object", "maxProperties": 0}}
    for name in TABLES:
        model = made["properties"][name]
        properties[name] = _single(_plain(model)) if name in SINGLES else _table(model["items"])
    return {
        "$schema": _DRAFT,
        "title": f"fieldtool job file, shape {SCHEMA}",
        "description": (
            "A job: tables of numbered rows as the tool writes them, or plain lists and objects as a person does. "
            "Values are SI, with the unit in the name or the test's own; times carry their zone."
        ),
        "type": "object",
        "properties": properties,
        "additionalProperties": False,
        "$defs": definitions,
    }


def _plain(model: dict[str, Any]) -> dict[str, Any]:
    """A row that stands alone, without the default that the model gives it."""
    return {key: value for key, value in model.items() if key != "default"}


def _single(row: dict[str, Any]) -> dict[str, Any]:
    table = {"type": "object", "properties": {"1": row}, "required": ["1"], "additionalProperties": False}
    return {"if": {"type": "object", "required": ["1"]}, "then": table, "else": row}


def _table(row: dict[str, Any]) -> dict[str, Any]:
    numbered = {"type": "object", "patternProperties": {"^[0-9]+$": row}, "additionalProperties": False}
    return {"if": {"type": "array"}, "then": {"items": row}, "else": numbered}


def _about(model: dict[str, Any]) -> dict[str, Any]:
    """What the file says of itself: of this make, and sealed wholly or not at all."""
    properties = {**model["properties"], "schema": {"const": SCHEMA}}
    sealed = {
        "properties": {"generation": {"type": "integer"}, "check": {"type": "string", "pattern": "^[0-9a-f]{64}$"}},
        "required": ["generation", "check"],
    }
    by_hand = {"properties": {"generation": {"type": "null"}, "check": {"enum": [None, ""]}}}
    return {**model, "properties": properties, "anyOf": [sealed, by_hand]}
