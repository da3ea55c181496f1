"""The record on paper: A4, numbered, nothing cut off, in the order it is re-worked, its figures with their source."""

from __future__ import annotations

import io
import unicodedata
from functools import cache
from importlib.resources import as_file, files

import pytest
from fontTools.ttLib import TTFont
from pypdf import PdfReader

from fieldtool.job.job import Job
from fieldtool.record.contents import contents
from fieldtool.record.pdf import as_pdf
from fieldtool.record.plain_page import spelled
from fieldtool.record.plan import plan
from fieldtool.reference.edition import EDITION_SENTENCE
from tests.jobs import facts, made, sample
from tests.record.papers import NOW, SAMPLE_NAMES, html_of, pdf_of, squeezed, text_of, whole_job

A4_POINTS = (595.28, 841.89)
"""210 mm by 297 mm in points of 1/72 inch (ISO 216)."""


@cache
def advances(bold: bool) -> dict[str, float]:
    """How wide each sign of the shipped typeface is, in ems; read by fontTools, not by the writer."""
    name = "DejaVuSansCondensed-Bold.ttf" if bold else "DejaVuSansCondensed.ttf"
    with as_file(files("fieldtool.record") / "fonts" / name) as path, TTFont(path) as font:
        cmap, units = font.getBestCmap(), font["head"].unitsPerEm
        return {chr(code): font["hmtx"][glyph][0] / units for code, glyph in cmap.items()}


def right_ends(reader: PdfReader) -> list[tuple[float, float, str]]:
    """Where every drawn text ends, the page's width, and the text."""
    out: list[tuple[float, float, str]] = []
    for page in reader.pages:
        wide = float(page.mediabox.width)

        def see(
            text: str, _cm: object, tm: list[float], font: dict[str, object] | None, size: float, wide: float = wide
        ) -> None:
            if text.strip() and font is not None:
                table = advances("Bold" in str(font.get("/BaseFont", "")))
                line = max(text.split("\n"), key=len)
                out.append((tm[4] + sum(table.get(char, 0.6) for char in line) * size, wide, line))

        page.extract_text(visitor_text=see)
    return out


@pytest.mark.parametrize("name", SAMPLE_NAMES)
def test_every_page_is_a4_numbered_and_carries_something(name: str) -> None:
    reader = pdf_of(sample(name))
    count = len(reader.pages)
    assert 5 <= count <= 20
    for number, page in enumerate(reader.pages, start=1):
        assert (float(page.mediabox.width), float(page.mediabox.height)) == pytest.approx(A4_POINTS, abs=0.5)
        text = page.extract_text()
        assert f"page {number} of {count}" in text
        assert len(text) > 150


@pytest.mark.parametrize("name", SAMPLE_NAMES)
def test_nothing_runs_off_the_right_of_the_page(name: str) -> None:
    for end, wide, line in right_ends(pdf_of(sample(name))):
        assert end <= wide - 25, line


@pytest.mark.parametrize("writer", ["pdf", "html"])
def test_cautions_and_the_edition_come_first_and_the_plain_page_last(writer: str) -> None:
    job = whole_job()
    text = squeezed(text_of(pdf_of(job)) if writer == "pdf" else html_of(job))
    order = (
        EDITION_SENTENCE, "What was found: the place", ": what was found", ": map", ": readings",
        ": what the readings say", ": what was asked for", ": the verdict", ": ways compared", "designer",
        ": isolation log", ": parted and put back", ": foretold and measured", ": material, tests", ": what remains",
        "Where every published figure comes from", "Figures to copy", "For the person who ordered the work",
    )  # fmt: skip
    places = []
    for heading in order:
        wanted = squeezed(heading)
        assert wanted in text, heading
        places.append(text.index(wanted, places[-1] if places else 0))
    assert places == sorted(places)


def test_signs_of_the_trade_are_printed_from_the_typefaces_that_travel_along() -> None:
    body = facts("larch_row")
    body["circuits"][0]["note"] = "≤ 0.8 Ω, 2.5 mm², ±3 %, µA, °C, A²s, I∆n"
    reader = pdf_of(made(body))
    assert "≤ 0.8 Ω, 2.5 mm², ±3 %, µA, °C, A²s, I∆n" in " ".join(text_of(reader).split())
    for page in reader.pages:
        for font in page["/Resources"]["/Font"].values():
            inner = font.get_object()["/DescendantFonts"][0].get_object()
            assert "/FontFile2" in inner["/FontDescriptor"].get_object()


def test_every_finding_stands_with_its_working_and_its_regulation() -> None:
    text = squeezed(text_of(pdf_of(sample("larch_row"))))
    # Re-worked by hand: 0.8 × 0.95 × 230 / (5 × 32) = 1.0925 (411.4.4, Table 41.3; App. 3's 80 %).
    assert squeezed("1.366 × 0.8, Cmin in, 80 % in = 1.0925 Ω (Table 41.3") in text
    assert squeezed("Z at board 0.18 + R1+R2 0.410 = 0.590 Ω") in text
    assert "411.4.4" in text
    assert "525.202" in text


def test_the_same_record_is_written_twice_and_its_figures_do_not_depend_on_what_was_asked_before() -> None:
    job = sample("larch_row")
    first = contents(job, NOW)
    contents(sample("quarry_yard"), NOW)
    assert contents(job, NOW) == first
    assert as_pdf(first, NOW) == as_pdf(first, NOW)


def test_the_provenance_names_the_tables_that_the_verdict_stands_on_and_no_others() -> None:
    def figures(job: Job) -> str:
        section = next(s for s in contents(job, NOW).sections if s.title.startswith("Where every"))
        return str(section)

    ring, tt = figures(sample("larch_row")), figures(sample("quarry_yard"))
    for wanted in ("Table 41.3", "Table 64", "IEC 60228", "0.00741 Ω/m", "27 A"):
        assert wanted in ring, wanted
    assert "touch" in tt
    assert "touch" not in ring


def test_figures_to_copy_are_on_one_page_and_each_says_where_it_comes_from() -> None:
    reader = pdf_of(whole_job())
    pages = [page.extract_text() for page in reader.pages if "Figures to copy" in page.extract_text()]
    assert len(pages) == 1
    section = next(s for s in contents(whole_job(), NOW).sections if s.title.startswith("Figures to copy"))
    rows = section.blocks[1].rows  # type: ignore[union-attr]
    assert {row[2] for row in rows} <= {"measured", "calculated", "limitation", "seen", "distributor's figure"}
    named = {row[0]: row for row in rows}
    assert named["Zs, highest read"][1:3] == ("0.61 Ω", "measured")
    assert named["Zs to expect"][2] == "calculated"
    assert named["Polarity"][2] == "limitation"


@pytest.mark.parametrize("name, most", [("larch_row", "1.092 Ω"), ("quarry_yard", "1666 Ω")])
def test_a_limit_is_copied_rounded_down(name: str, most: str) -> None:
    """0.8 × 0.95 × 230 / 160 = 1.0925 (411.4.4, Appendix 3); 50 V / 30 mA = 1666.7 (411.5.3)."""
    section = next(s for s in contents(sample(name), NOW).sections if s.title.startswith("Figures to copy"))
    row = next(row for row in section.blocks[1].rows if row[0].startswith("Largest Zs"))  # type: ignore[union-attr]
    assert row[1:3] == (most, "calculated")


def test_a_value_read_as_calculated_is_never_copied_as_measured() -> None:
    body = facts("larch_row")
    for reading in body["readings"]:
        if reading["test"] == "ze":
            reading |= {"mode": "enquiry"}
    section = next(s for s in contents(made(body), NOW).sections if s.title.startswith("Figures to copy"))
    row = next(row for row in section.blocks[1].rows if row[0] == "Ze")  # type: ignore[union-attr]
    assert row[2] == "distributor's figure"


@pytest.mark.parametrize("name", [*SAMPLE_NAMES, "whole"])
def test_the_plain_page_is_one_page_of_words_without_symbols(name: str) -> None:
    job = whole_job() if name == "whole" else sample(name)
    reader = pdf_of(job)
    pages = [
        page.extract_text() for page in reader.pages if "For the person who ordered the work" in page.extract_text()
    ]
    assert len(pages) == 1
    section = contents(job, NOW).sections[-1]
    text = " ".join(
        block.text if hasattr(block, "text") else " ".join(block.items)  # type: ignore[union-attr]
        for block in section.blocks
    )
    odd = {char for char in text if unicodedata.category(char) in ("Sm", "Sk", "So", "No")}
    assert not odd
    assert not any(sign in text for sign in ("Zs", "Ze", "R1", "Ω", "mm²", "%"))
    assert " safe" not in text.lower()
    for wanted in ("What was found", "What was proved"):
        assert wanted in text


def test_signs_are_spelled_out() -> None:
    assert (
        spelled("at least 1 MΩ and 2.5 mm² ≤ 30 %")
        == "at least 1 million ohms and 2.5 square millimetres at most 30 per cent"
    )


def test_a_corrected_reading_stays_in_view_and_says_what_it_became() -> None:
    body = facts("larch_row")
    old = next(item for item in body["readings"] if item["test"] == "zs" and item["point"] == "p1")
    body["readings"].append({**old, "id": "m800", "value": 0.33, "raw": "0.33", "replaces": old["id"]})
    text = squeezed(text_of(pdf_of(made(body))))
    assert squeezed("no: corrected to 0.33 Ω") in text


def test_what_is_parted_and_a_struck_step_stand_out() -> None:
    body = facts("larch_row_annexe")
    circuit, first = body["circuits"][0]["id"], body["isolation"][0]["id"]
    body["isolation"].append(
        {"id": "i800", "kind": "struck", "circuit": circuit, "strikes": first, "at": "2026-11-30T13:00:00Z"}
    )
    text = squeezed(text_of(pdf_of(made(body))))
    assert squeezed("STILL OUT: line legs A and B (parted)") in text
    assert squeezed("STRUCK THROUGH LATER") in text


def test_a_job_of_which_nothing_is_known_has_a_record_too() -> None:
    reader = pdf_of(Job())
    assert len(reader.pages) >= 2
    assert "No circuit was entered yet" in text_of(reader)


def test_a_large_ring_is_drawn_on_a_page_on_its_side_and_every_point_is_listed() -> None:
    body = facts("larch_row")
    body["readings"], body["requests"], body["runs"] = [], [], []
    body["points"] = [
        {"id": f"p{n}", "circuit": "c3", "kind": "twin", "name": f"place {n}", "walk_order": n} for n in range(1, 41)
    ]
    body["circuits"][0]["label_claims"] = "ring"
    for test in ("r1", "rn", "r2"):
        body["readings"].append(
            {"id": f"m{test}", "test": test, "circuit": "c3", "value": 0.5, "at": "2026-11-30T12:00:00Z"}
        )
    reader = pdf_of(made(body))
    sides = {(round(float(p.mediabox.width)), round(float(p.mediabox.height))) for p in reader.pages}
    assert sides == {(595, 842), (842, 595)}
    assert all(f"place {n}" in text_of(reader) for n in range(1, 41))
    for end, wide, line in right_ends(reader):
        assert end <= wide - 20, line


def test_the_pdf_opens_without_a_word_of_complaint(caplog: pytest.LogCaptureFixture) -> None:
    PdfReader(io.BytesIO(as_pdf(contents(whole_job(), NOW), NOW)), strict=True).pages[0].extract_text()
    assert not caplog.records


def test_the_map_draws_ring_spurs_and_what_is_proposed_in_its_own_place() -> None:
    picture = plan(sample("larch_row"), "c3", ring=True, values={"p1": "0.30 Ω"})
    assert picture is not None
    words = [label.text for label in picture.labels]
    assert {"by door", "0.30 Ω", "larder", "utility", "island", "A", "B"} <= set(words)
    assert [box.text for box in picture.boxes if box.dashed] == ["2"]
    # Ten points, one proposed, the board; every box inside the picture.
    assert len(picture.boxes) == 12
    for box in picture.boxes:
        assert 0 <= box.x <= picture.wide - box.wide
        assert 0 <= box.y <= picture.high - box.high


def test_a_second_new_outlet_hangs_on_the_first_not_on_the_point() -> None:
    picture = plan(sample("mill_cottages"), "c5", ring=False, values={})
    assert picture is not None
    first, second = (box for box in picture.boxes if box.dashed)
    stems = [s for s in picture.strokes if s.dashed and s.x1 == s.x2]
    # The second's stem starts at the first's box: at its middle, from its edge.
    assert any(
        s.x1 == pytest.approx(first.x + first.wide / 2) and s.y1 in (first.y, first.y + first.high) for s in stems
    )
    assert second.x > first.x
