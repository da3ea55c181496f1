"""Whatever a person types anywhere in a job is printed as text: markup, scripts, escapes, turned writing, endless words.

The text fields are found by walking the model, so that a new one is covered without a line here.
"""

from __future__ import annotations

from html.parser import HTMLParser
from typing import Any, get_args

import pytest
from pydantic import BaseModel
from pydantic.fields import FieldInfo
from pydantic.types import StringConstraints

from fieldtool.job.job import Job
from fieldtool.quantities.show import plain
from tests.record.papers import html_of, pdf_of, squeezed, text_of, whole_job
from tests.record.test_record_paper import right_ends

KEYS = {
    "Device.type", "Circuit.cable", "Run.cable", "Route.cable", "Override.rule", "Override.rule_set",
    "Override.figures", "VerdictKept.figures", "KeptFinding.rule", "KeptFinding.place", "KeptFinding.outcome",
    "KeptFinding.unit", "About.edition", "About.check", "HistoryEntry.by", "HistoryEntry.what", "Choice.value", "VerdictKept.way", "HistoryEntry.why",
}  # fmt: skip
"""Texts that choose something, or that the record has no place for: they may be hostile, but need not be printed."""

SHORT, LONG = 200, 4000


def most(info: FieldInfo) -> int | None:
    """The longest text a field takes; None for a field that is not a person's text."""
    found = list(info.metadata)
    for part in get_args(info.annotation):
        found += list(getattr(part, "__metadata__", ()))
    lengths = [i.max_length for i in found if isinstance(i, StringConstraints) and i.pattern is None and i.max_length]
    return lengths[0] if lengths else None


class Filler:
    """Puts a text of its own into every text field of a job, past the checks that would refuse some of them."""

    def __init__(self, text: str, *, long: bool = False) -> None:
        self.text, self.long, self.used = text, long, {}

    def fill(self, value: Any) -> Any:
        if isinstance(value, tuple):
            return tuple(self.fill(item) for item in value)
        if not isinstance(value, BaseModel):
            return value
        changed: dict[str, Any] = {}
        for name, info in type(value).model_fields.items():
            field = f"{type(value).__name__}.{name}"
            length = most(info)
            if length is None:
                changed[name] = self.fill(getattr(value, name))
            elif field not in ("Device.type", "Circuit.cable", "Run.cable", "Route.cable"):
                changed[name] = self._own(field, length)
        return value.model_copy(update=changed)

    def _own(self, field: str, length: int) -> str:
        token = f"Q{len(self.used)}q"
        made = f"{token}{self.text}"
        if self.long:
            made = (token + "".join(f"{n:05d}" for n in range(1000)))[: LONG if length > SHORT else SHORT]
        self.used.setdefault(made, field)
        return made

    def job(self, job: Job) -> Job:
        return Job.model_construct(**{name: self.fill(getattr(job, name)) for name in Job.model_fields})


class Page(HTMLParser):
    """The tags, their attributes and the text of a page, as a browser would part them."""

    def __init__(self, page: str) -> None:
        super().__init__(convert_charrefs=True)
        self.tags: set[str] = set()
        self.attributes: list[tuple[str, str | None]] = []
        self.texts: list[str] = []
        self.feed(page)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.add(tag)
        self.attributes += attrs

    def handle_data(self, data: str) -> None:
        self.texts.append(data)


OURS = {
    "html", "head", "meta", "title", "link", "style", "body", "h1", "h2", "h3", "section", "p", "br", "ul", "li", "table",
    "colgroup", "col", "thead", "tbody", "tr", "th", "td", "svg", "line", "rect", "text", "footer",
}  # fmt: skip
HOSTILE = (
    "<script>alert(1)</script>",
    '"><img src=http://outside.example/x onerror=alert(1)>',
    "</style></title></svg><iframe src=//outside.example></iframe>",
    "&lt;b&gt; &amp; ]]> <!-- -->",
    "**bold** __under__ ~~struck~~ [link](http://outside.example)",
    "\x1b[31mred\x1b[0m \x1b]8;;http://outside.example\x07link",
    "\u202egnihtyna\u202c \u2066x\u2069 \u200b",
    "one\ntwo",
    "{nb} {{nb}} %s {0} {text}",
)


@pytest.mark.parametrize("hostile", HOSTILE)
def test_html_shows_every_text_as_text(hostile: str) -> None:
    filler = Filler(hostile)
    page = html_of(filler.job(whole_job()))
    read = Page(page)
    assert read.tags <= OURS
    assert not any(name.startswith("on") or (value or "").startswith("http") for name, value in read.attributes)
    assert not any(name in ("src", "srcset", "action") for name, _ in read.attributes)
    shown = squeezed(" ".join(read.texts))
    for text, field in filler.used.items():
        if field not in KEYS:
            assert squeezed("".join(plain(line) for line in text.split("\n"))) in shown, field
    for hidden in ("\x1b", "\u202e", "\u2066", "\u200b", "\x07"):
        assert hidden not in page


@pytest.mark.parametrize("hostile", HOSTILE)
def test_the_pdf_shows_every_text_as_text(hostile: str) -> None:
    filler = Filler(hostile)
    reader = pdf_of(filler.job(whole_job()))
    shown = squeezed(text_of(reader, foot=False))
    for text, field in filler.used.items():
        if field not in KEYS:
            for line in text.split("\n"):
                assert squeezed(plain(line)) in shown, field
    assert all("/Annots" not in page for page in reader.pages)
    assert "/JavaScript" not in str(reader.trailer["/Root"])


def test_every_text_field_of_the_model_was_reached() -> None:
    reached = set(Filler("x").job(whole_job()).model_fields_set)
    assert reached >= {"site", "readings", "isolation", "overrides", "verdicts"}
    filler = Filler("x")
    filler.job(whole_job())
    fields = set(filler.used.values())
    assert {"Site.customer", "Reading.why_not", "Reading.note", "IsolationEntry.detail", "Override.reason"} <= fields
    assert {"OtherSource.note", "NewOutlet.name", "Choice.value", "Instrument.serial", "Parted.what"} <= fields
    assert len(fields) >= 50


def test_endless_words_are_broken_not_cut_and_stay_on_the_page() -> None:
    filler = Filler("", long=True)
    reader = pdf_of(filler.job(whole_job()))
    for end, wide, line in right_ends(reader):
        assert end <= wide - 25, line
    shown = squeezed(text_of(reader))
    whole = 0
    for text, field in filler.used.items():
        if len(text) <= SHORT and field not in KEYS:
            whole += text in shown
        if field not in KEYS:
            # Long texts run over pages; each piece of them is there.
            token = text[: text.index("q") + 1]
            assert token in shown, field
    assert whole >= 20


def test_a_sign_without_a_shape_is_written_as_its_number() -> None:
    job = whole_job()
    named = job.model_copy(update={"site": job.site.model_copy(update={"customer": "台所 \U0001f50c"})})
    fresh = Job.model_construct(**{name: getattr(named, name) for name in Job.model_fields})
    assert "[U+53F0][U+6240] [U+1F50C]" in " ".join(text_of(pdf_of(fresh)).split())
    assert "台所 \U0001f50c" in html_of(fresh)
