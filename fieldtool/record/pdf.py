"""The record as a PDF on A4 pages, each numbered: drawn with fpdf2, its texts never read as markup.

The typefaces travel with the tool, so that Ω, ² and ≤ print alike everywhere; a sign they lack is written out as
its Unicode number.
"""

from __future__ import annotations

from collections.abc import Sequence
from datetime import datetime
from importlib.resources import as_file, files

from fpdf import FPDF
from fpdf.enums import Align, MethodReturnValue, PageOrientation, WrapMode, XPos, YPos

from fieldtool.quantities.show import plain
from fieldtool.record.blocks import Block, Grid, Picture, Points, Record, Section, Words

__all__ = ["as_pdf"]

_FACE = "record"
_FILES = {"": "DejaVuSansCondensed.ttf", "B": "DejaVuSansCondensed-Bold.ttf"}
_SIDE, _TOP, _FOOT = 15.0, 14.0, 18.0
_TEXT, _SMALL, _CELL = 9.5, 8.0, 7.6
_LEAD = 0.46
"""Line height [mm] for each point of type size."""

_TOGETHER_MM = 40.0
"""A table lower than this is not parted [mm]."""

_LEAST_TYPE_MM = 2.2
"""Type in a drawing smaller than this turns its page on its side [mm]."""


class _Paper(FPDF):
    """A4 pages with the line of the foot and the page's number under each."""

    def __init__(self, record: Record, now: datetime, pages: int) -> None:
        super().__init__(orientation="P", unit="mm", format="A4")
        # fpdf2 would put the number of pages wherever its own mark stands, in a person's text too.
        self.alias_nb_pages("")
        self.pages_in_all = pages
        self.set_margins(_SIDE, _TOP, _SIDE)
        self.set_auto_page_break(True, _FOOT)
        for style, name in _FILES.items():
            with as_file(files("fieldtool.record") / "fonts" / name) as path:
                self.add_font(_FACE, style, path)
        self.signs = frozenset.intersection(*(frozenset(font.cmap) for font in self.fonts.values()))  # type: ignore[union-attr]
        self.foot = self.shown(record.foot)
        self.set_title(self.shown(record.title))
        self.set_creator("fieldtool")
        self.set_producer("fieldtool")
        self.set_lang("en-GB")
        self.set_creation_date(now)
        self.set_font(_FACE, "", _TEXT)

    def shown(self, text: str) -> str:
        """One line as it can be printed: nothing hidden, and a sign without a shape as its number."""
        return "".join(char if ord(char) in self.signs else f"[U+{ord(char):04X}]" for char in plain(text))

    def footer(self) -> None:
        """The line under each page."""
        self.set_y(-12)
        self.set_font(_FACE, "", 7.5)
        number = f"page {self.page_no()} of {self.pages_in_all}"
        foot = self.foot
        while self.get_string_width(foot) > self.epw - 30:
            foot = foot[: max(0, len(foot) - 4)] + "…" if len(foot) > 6 else ""
        self.cell(self.epw - 28, 4, foot)
        self.cell(28, 4, number, align=Align.R)

    def left(self) -> float:
        """What is left of this page above its foot [mm]."""
        return float(self.h - self.b_margin - self.get_y())

    def text_block(self, text: str, size: float, *, bold: bool = False, inset: float = 0.0) -> None:
        """Paragraphs over the width of the page, from one page to the next as it takes."""
        self.set_font(_FACE, "B" if bold else "", size)
        for line in text.split("\n"):
            self.set_x(self.l_margin + inset)
            self.multi_cell(
                self.epw - inset, size * _LEAD, self.shown(line), align=Align.L, new_x=XPos.LMARGIN, new_y=YPos.NEXT
            )

    def broken(self, text: str, wide: float, size: float, *, bold: bool = False) -> list[str]:
        """The lines that a text takes in a column [mm]."""
        self.set_font(_FACE, "B" if bold else "", size)
        out: list[str] = []
        for line in text.split("\n"):
            shown = self.shown(line)
            if self.get_string_width(shown) <= wide - 2 * self.c_margin:
                out.append(shown)
                continue
            found = self.multi_cell(
                wide, size * _LEAD, shown, dry_run=True, output=MethodReturnValue.LINES, align=Align.L,
                wrapmode=WrapMode.WORD,
            )  # fmt: skip
            out.extend(str(item) for item in found)  # type: ignore[union-attr]
        return out


def as_pdf(record: Record, now: datetime) -> bytes:
    """The record as a PDF file; ``now`` is its date of making."""
    # Drawn twice: how many pages there are is known only after the first time.
    return bytes(_pages(record, now, _pages(record, now, 0).page_no()).output())


def _pages(record: Record, now: datetime, count: int) -> _Paper:
    paper = _Paper(record, now, count)
    paper.add_page()
    paper.text_block(record.title, 17, bold=True)
    for section in record.sections:
        _section(paper, section)
    return paper


def _section(paper: _Paper, section: Section) -> None:
    first = section.blocks[0] if section.blocks else Words("")
    if isinstance(first, Picture) and _scale(paper, first, upright=True) * first.text_high < _LEAST_TYPE_MM:
        paper.add_page(orientation="L")
    elif section.own_page or paper.left() < _first_needs(paper, section):
        paper.add_page()
    paper.ln(3)
    paper.text_block(section.title, 12, bold=True)
    y = paper.get_y() + 0.4
    paper.set_line_width(0.3)
    paper.line(paper.l_margin, y, paper.w - paper.r_margin, y)
    paper.set_y(y + 1.4)
    for block in section.blocks:
        _block(paper, block)
    if paper.cur_orientation == PageOrientation.LANDSCAPE:
        paper.add_page()


def _first_needs(paper: _Paper, section: Section) -> float:
    """What a section's heading and what follows take together at least [mm]; a heading never stands alone."""
    first = section.blocks[0] if section.blocks else None
    if isinstance(first, Picture):
        return max(30.0, first.high * _scale(paper, first) + 18)
    return 48.0 if any(isinstance(block, Grid) for block in section.blocks[1:2]) else 30.0


def _block(paper: _Paper, block: Block) -> None:
    if isinstance(block, Grid):
        _grid(paper, block)
    elif isinstance(block, Picture):
        _picture(paper, block)
    elif isinstance(block, Points):
        for item in block.items:
            _point(paper, item)
    else:
        _words(paper, block)


def _words(paper: _Paper, words: Words) -> None:
    if words.kind == "under":
        if paper.left() < 22:
            paper.add_page()
        paper.ln(1.6)
        paper.text_block(words.text, 9.5, bold=True)
        paper.ln(0.6)
    elif words.kind == "caution":
        if paper.left() < 14:
            paper.add_page()
        page, top = paper.page, paper.get_y()
        paper.set_y(top + 1.2)
        paper.text_block(words.text, _TEXT, bold=True, inset=1.5)
        if paper.page == page:
            paper.set_line_width(0.5)
            paper.rect(paper.l_margin, top, paper.epw, paper.get_y() - top + 1.2)
        paper.set_y(paper.get_y() + 2.4)
    else:
        paper.text_block(words.text, _SMALL if words.kind == "small" else _TEXT, bold=words.kind == "strong")
        paper.ln(0.8)


def _point(paper: _Paper, text: str) -> None:
    if paper.left() < 6:
        paper.add_page()
    paper.set_font(_FACE, "", _TEXT)
    paper.set_x(paper.l_margin + 1)
    paper.cell(4, _TEXT * _LEAD, "•")
    first, *rest = text.split("\n")
    paper.multi_cell(
        paper.epw - 5, _TEXT * _LEAD, paper.shown(first), align=Align.L, new_x=XPos.LMARGIN, new_y=YPos.NEXT
    )
    for line in rest:
        paper.text_block(line, _TEXT, inset=5)
    paper.ln(0.4)


# fpdf2's own tables refuse a row higher than a page; a person's note can be that long, so rows are drawn here.
def _grid(paper: _Paper, grid: Grid) -> None:
    share = paper.epw / sum(grid.widths)
    wide = [width * share for width in grid.widths]
    high = _CELL * _LEAD
    head = [paper.broken(text, column, _CELL, bold=True) for text, column in zip(grid.head, wide, strict=False)]
    rows = [[paper.broken(text, column, _CELL) for text, column in zip(row, wide, strict=True)] for row in grid.rows]
    deep = max((len(cell) for cell in head), default=0)
    every = [deep, *(max(len(cell) for cell in row) for row in rows)]
    whole = sum(every) * high + len(every) * 1.0
    # A short table stays together; a long one starts where at least its first row finds room.
    if paper.left() < (
        whole + 2 if whole < _TOGETHER_MM else (deep + min(every[-1] if len(every) < 2 else every[1], 12)) * high + 3
    ):
        paper.add_page()
    _drawn(paper, head, wide, bold=True)
    for row in rows:
        lines = max(len(cell) for cell in row)
        if lines * high + 1 > paper.left() and lines * high < 60:
            _next_page(paper, head, wide)
        while lines:
            room = max(0, int((paper.left() - 1) / high))
            if room < min(2, lines):
                _next_page(paper, head, wide)
                room = max(2, int((paper.left() - 1) / high))
            _drawn(paper, [cell[:room] for cell in row], wide)
            row = [cell[room:] for cell in row]
            lines = max(len(cell) for cell in row)
    paper.ln(1.6)


def _next_page(paper: _Paper, head: Sequence[Sequence[str]], wide: Sequence[float]) -> None:
    paper.add_page()
    _drawn(paper, head, wide, bold=True)


def _drawn(paper: _Paper, cells: Sequence[Sequence[str]], wide: Sequence[float], *, bold: bool = False) -> None:
    """One row of cells, already broken into lines, with a rule under it."""
    if not cells:
        return
    high, top = _CELL * _LEAD, paper.get_y()
    paper.set_font(_FACE, "B" if bold else "", _CELL)
    x = paper.l_margin
    for lines, column in zip(cells, wide, strict=True):
        for number, line in enumerate(lines):
            paper.set_xy(x, top + 0.5 + number * high)
            paper.cell(column, high, line)
        x += column
    low = top + max(len(lines) for lines in cells) * high + 1.0
    paper.set_line_width(0.3 if bold else 0.1)
    paper.set_draw_color(0 if bold else 150)
    paper.line(paper.l_margin, low, paper.w - paper.r_margin, low)
    paper.set_draw_color(0)
    paper.set_xy(paper.l_margin, low)


def _picture(paper: _Paper, picture: Picture) -> None:
    """The drawing as vectors, as large as the page's width and a readable type allow."""
    scale = _scale(paper, picture)
    x0, y0 = paper.l_margin, paper.get_y() + 1
    size = picture.text_high * scale * 72 / 25.4
    paper.set_font(_FACE, "", size)
    for line in picture.strokes:
        paper.set_line_width(0.3)
        paper.set_dash_pattern(*((1.2, 0.9) if line.dashed else (0, 0)))
        paper.line(x0 + line.x1 * scale, y0 + line.y1 * scale, x0 + line.x2 * scale, y0 + line.y2 * scale)
    for box in picture.boxes:
        paper.set_dash_pattern(*((1.2, 0.9) if box.dashed else (0, 0)))
        paper.set_fill_color(255, 255, 255)
        left, top = x0 + box.x * scale, y0 + box.y * scale
        paper.rect(left, top, box.wide * scale, box.high * scale, style="DF")
        text = paper.shown(box.text)
        middle = left + (box.wide * scale - paper.get_string_width(text)) / 2
        paper.text(middle, top + (box.high / 2 + picture.text_high * 0.35) * scale, text)
    paper.set_dash_pattern()
    for label in picture.labels:
        paper.text(x0 + label.x * scale, y0 + label.y * scale, paper.shown(label.text))
    paper.set_xy(paper.l_margin, y0 + picture.high * scale + 2)


def _scale(paper: _Paper, picture: Picture, *, upright: bool = False) -> float:
    """Millimetres for one picture unit, so that the drawing fits below a heading on this page, or on an upright one."""
    wide, high = (210.0, 297.0) if upright else (paper.w, paper.h)
    most = high - _TOP - _FOOT - 32
    return float(min((wide - 2 * _SIDE) / picture.wide, most / picture.high, 1.9))
