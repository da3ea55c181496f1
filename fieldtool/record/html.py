"""The record as one HTML file that asks nothing of anybody: no request, no script, the drawings inside it.

The page is built as a tree of elements by the standard library, which escapes every text; no text is ever joined
into markup.
"""

from __future__ import annotations

import xml.etree.ElementTree as ET
from collections.abc import Iterable

from fieldtool.quantities.show import plain
from fieldtool.record.blocks import Block, Grid, Picture, Points, Record, Words

__all__ = ["as_html"]

_STYLE = """
@page { size: A4; margin: 16mm 15mm 18mm; @bottom-center { content: counter(page) " / " counter(pages); font-size: 8pt; } }
body { font: 10pt/1.35 "DejaVu Sans", "Noto Sans", Arial, sans-serif; color: #000; background: #fff;
  max-width: 190mm; margin: 1em auto; padding: 0 1em; overflow-wrap: anywhere; }
h1 { font-size: 17pt; margin: 0 0 .2em; } h2 { font-size: 12.5pt; margin: 1.4em 0 .4em; border-bottom: 1px solid #000; }
h3 { font-size: 10.5pt; margin: 1em 0 .3em; } h2, h3 { break-after: avoid; }
p { margin: .3em 0; } .small { font-size: 8.5pt; } .strong { font-weight: bold; }
.caution { font-weight: bold; border: 2px solid #000; padding: .3em .5em; }
ul { margin: .3em 0; padding-left: 1.3em; }
table { border-collapse: collapse; width: 100%; table-layout: fixed; font-size: 8.5pt; margin: .3em 0 .6em; }
th, td { border-bottom: 1px solid #999; padding: .15em .35em .15em 0; text-align: left; vertical-align: top;
  white-space: pre-wrap; }
th { border-bottom: 1.5px solid #000; } thead { display: table-header-group; } tr { break-inside: avoid; }
svg { width: 100%; height: auto; max-height: 230mm; } footer { margin-top: 2em; font-size: 8.5pt; }
@media print { body { max-width: none; margin: 0; padding: 0; } .own { break-before: page; } }
"""
_POLICY = "default-src 'none'; img-src data:; style-src 'unsafe-inline'; base-uri 'none'; form-action 'none'"


def _shown(text: str) -> str:
    """A text as it may stand in the page: hidden characters written out, line breaks kept."""
    return "\n".join(plain(line) for line in text.split("\n"))


def _add(parent: ET.Element, tag: str, text: str = "", **attributes: str) -> ET.Element:
    made = ET.SubElement(parent, tag, {name.rstrip("_").replace("_", "-"): value for name, value in attributes.items()})
    made.text = _shown(text) or None
    return made


def as_html(record: Record) -> bytes:
    """The record as a whole HTML page, UTF-8."""
    page = ET.Element("html", {"lang": "en-GB"})
    head = ET.SubElement(page, "head")
    _add(head, "meta", charset="utf-8")
    ET.SubElement(head, "meta", {"http-equiv": "Content-Security-Policy", "content": _POLICY})
    _add(head, "meta", name="viewport", content="width=device-width, initial-scale=1")
    _add(head, "title", record.title)
    # An icon of nothing keeps a browser from asking for one.
    _add(head, "link", rel="icon", href="data:,")
    ET.SubElement(head, "style").text = _STYLE
    body = ET.SubElement(page, "body")
    _add(body, "h1", record.title)
    for section in record.sections:
        part = _add(body, "section", class_="own" if section.own_page else "part")
        _add(part, "h2", section.title)
        for block in section.blocks:
            _block(part, block)
    _add(body, "footer", record.foot)
    said: bytes = ET.tostring(page, encoding="utf-8", method="html")
    return b"<!DOCTYPE html>\n" + said + b"\n"


def _block(part: ET.Element, block: Block) -> None:
    if isinstance(block, Words):
        if block.kind == "under":
            _add(part, "h3", block.text)
        else:
            _lines(_add(part, "p", class_=block.kind), block.text)
    elif isinstance(block, Points):
        listed = _add(part, "ul")
        for item in block.items:
            _lines(_add(listed, "li"), item)
    elif isinstance(block, Grid):
        _grid(part, block)
    else:
        _picture(part, block)


def _lines(parent: ET.Element, text: str) -> None:
    """A text with its line breaks as line breaks."""
    first, *rest = text.split("\n")
    parent.text = _shown(first)
    for line in rest:
        ET.SubElement(parent, "br").tail = _shown(line)


def _grid(part: ET.Element, grid: Grid) -> None:
    table = _add(part, "table")
    group, whole = _add(table, "colgroup"), sum(grid.widths)
    for width in grid.widths:
        _add(group, "col", style=f"width: {100 * width / whole:.1f}%")
    if grid.head:
        _row(_add(table, "thead"), "th", grid.head)
    rows = _add(table, "tbody")
    for row in grid.rows:
        _row(rows, "td", row)


def _row(parent: ET.Element, tag: str, texts: Iterable[str]) -> None:
    row = _add(parent, "tr")
    for text in texts:
        _add(row, tag, text)


def _picture(part: ET.Element, picture: Picture) -> None:
    """The drawing as vectors inside the page, with its words for whoever cannot see it."""
    svg = _add(part, "svg", viewBox=f"0 0 {picture.wide:.1f} {picture.high:.1f}", role="img")
    _add(svg, "title", picture.says)
    for line in picture.strokes:
        drawn = _add(
            svg, "line", x1=f"{line.x1:.2f}", y1=f"{line.y1:.2f}", x2=f"{line.x2:.2f}", y2=f"{line.y2:.2f}",
            stroke="#000", stroke_width="0.16",
        )  # fmt: skip
        if line.dashed:
            drawn.set("stroke-dasharray", "0.6 0.4")
    size = f"{picture.text_high:g}"
    for box in picture.boxes:
        drawn = _add(
            svg, "rect", x=f"{box.x:.2f}", y=f"{box.y:.2f}", width=f"{box.wide:.2f}", height=f"{box.high:.2f}",
            rx="0.3", fill="#fff", stroke="#000", stroke_width="0.16",
        )  # fmt: skip
        if box.dashed:
            drawn.set("stroke-dasharray", "0.6 0.4")
        middle = f"{box.x + box.wide / 2:.2f}"
        foot = f"{box.y + box.high / 2 + picture.text_high * 0.35:.2f}"
        _add(svg, "text", box.text, x=middle, y=foot, text_anchor="middle", font_size=size)
    for label in picture.labels:
        _add(svg, "text", label.text, x=f"{label.x:.2f}", y=f"{label.y:.2f}", font_size=size)
