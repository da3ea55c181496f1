"""The record as plain sections: what the writers draw, and nothing about how."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

__all__ = ["Block", "Box", "Grid", "Label", "Picture", "Points", "Record", "Section", "Stroke", "Words"]

Kind = Literal["plain", "strong", "small", "caution", "under"]


@dataclass(frozen=True, slots=True)
class Words:
    """One paragraph. ``under`` is a heading inside a section."""

    text: str
    kind: Kind = "plain"


@dataclass(frozen=True, slots=True)
class Points:
    """A list of short lines."""

    items: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Grid:
    """A table of texts. ``widths`` are the columns' shares of the page; an empty ``head`` draws no head row."""

    head: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    widths: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Stroke:
    """A straight line between two places of a picture [picture units]."""

    x1: float
    y1: float
    x2: float
    y2: float
    dashed: bool = False


@dataclass(frozen=True, slots=True)
class Box:
    """A box with a short text in its middle [picture units]; dashed for what is only proposed."""

    x: float
    y: float
    wide: float
    high: float
    text: str
    dashed: bool = False


@dataclass(frozen=True, slots=True)
class Label:
    """A text that starts at a place, its base line at ``y`` [picture units]."""

    x: float
    y: float
    text: str


@dataclass(frozen=True, slots=True)
class Picture:
    """A drawing of lines, boxes and texts in units of its own, from (0, 0) at the top left."""

    wide: float
    high: float
    strokes: tuple[Stroke, ...]
    boxes: tuple[Box, ...]
    labels: tuple[Label, ...]
    says: str
    text_high: float = 1.7


Block = Words | Points | Grid | Picture


@dataclass(frozen=True, slots=True)
class Section:
    """One headed part of the record; ``own_page`` starts on a page of its own."""

    title: str
    blocks: tuple[Block, ...]
    own_page: bool = False


@dataclass(frozen=True, slots=True)
class Record:
    """The whole record: its title, the line under every page, and its sections in order."""

    title: str
    foot: str
    sections: tuple[Section, ...]
