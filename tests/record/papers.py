"""Records for tests: a job in which every table has a row, its record, and PDFs read back by pypdf."""

from __future__ import annotations

import io
from datetime import UTC, datetime
from typing import Any

from pypdf import PdfReader

from fieldtool.job.job import Job
from fieldtool.record.contents import contents
from fieldtool.record.html import as_html
from fieldtool.record.pdf import as_pdf
from tests.jobs import SAMPLES, Facts, facts, made

NOW = datetime(2026, 12, 1, 10, 0, tzinfo=UTC)
SAMPLE_NAMES = sorted(path.stem for path in SAMPLES.glob("*.json"))


def pdf_of(job: Job) -> PdfReader:
    return PdfReader(io.BytesIO(as_pdf(contents(job, NOW), NOW)))


def html_of(job: Job) -> str:
    return as_html(contents(job, NOW)).decode("utf-8")


def text_of(reader: PdfReader, *, foot: bool = True) -> str:
    """The text of every page; without the foot a paragraph that runs over a page is whole."""
    pages = [page.extract_text() for page in reader.pages]
    return "\n".join(page if foot else page.rpartition("\n")[0] for page in pages)


def squeezed(text: str) -> str:
    """A text without any blank, as it is whole however its lines were broken."""
    return "".join(text.split())


def whole_visit() -> Facts:
    """An invented visit with a row in every table: work done, something parted, a decision, a kept verdict."""
    body = facts("larch_row_annexe")
    at: dict[str, Any] = {"at": "2026-11-30T12:00:00Z", "by": "e1"}
    circuit = body["circuits"][0]["id"]
    points = [point["id"] for point in body["points"]]
    body["people"].append({"id": "e9", "name": "Pat Occupant", "role": "occupier"})
    body["site"] |= {"contact": "call after six", "note": "key at number four"}
    body["supply"] |= {"sources": "some", "other_sources": [{"kind": "pv", "isolated_by": "roof switch"}]}
    body["loads"] = [{"id": "l1", "circuit": circuit, "point": points[0], "name": "kettle", "amps": 12.0}]
    body["runs"] = [{"id": "r1", "circuit": circuit, "a": "board", "b": points[0], "length_m": 6.0}]
    request = body["requests"][0]
    request |= {"chosen_way": "spur_at_point", "work_done_at": "2026-11-30T15:00:00Z"}
    request["choices"] = [{"key": "box", "value": "kept"}]
    body["overrides"] = [
        {"id": "d1", "request": request["id"], "rule": "volt_drop", "place": points[0], "rule_set": "2026-12"}
        | {"figures": "none", "reason": "load is known", **at}
    ]
    body["verdicts"] = [
        {"id": "v1", "request": request["id"], "way": "spur_at_point", "at": at["at"], "why": "kept"}
        | {"rule_set": "2026-12", "edition": "BS 7671:2018+A2:2022", "figures": "none", "outcome": "more"}
        | {"findings": [{"rule": "volt_drop", "place": points[0], "outcome": "holds"}]}
    ]
    body["readings"] += [
        {"id": "m900", "test": "zs", "circuit": circuit, "point": points[1], "stage": "as_found", **at}
        | {"origin": "limitation", "why_not": "behind the cupboard"},
        {"id": "m901", "test": "zs", "circuit": circuit, "point": request["outlets"][0]["id"], "stage": "after_work"}
        | {"value": 0.61, "raw": "0.61", "note": "steady", "mode": "high_current", **at},
    ]
    body["isolation"].append({"id": "i900", "kind": "stopped", "circuit": circuit, "detail": "left for lunch", **at})
    return body


def whole_job() -> Job:
    return made(whole_visit())
