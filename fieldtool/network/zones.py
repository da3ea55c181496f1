"""Protective zones: which device is the nearest upstream of each point."""

from __future__ import annotations

from dataclasses import dataclass

from fieldtool.network.layout import BOARD, Layout
from fieldtool.network.problems import NoSuchNode

__all__ = ["Zone", "zone_of", "zones"]


@dataclass(frozen=True, slots=True)
class Zone:
    """Points behind one device: ``head`` is the board or a fused unit, ``fuse_a`` its plug fuse [A] or None."""

    head: str
    fuse_a: float | None
    nodes: tuple[str, ...]
    parent: str | None


def zone_of(layout: Layout, node: str) -> Zone:
    """The zone that protects a node: of the nearest fused unit it hangs behind, else of the board. NoSuchNode."""
    if node != BOARD and node not in layout.nodes:
        raise NoSuchNode(f"{node} is not a point of this circuit")
    return next(zone for zone in zones(layout) if node in zone.nodes or (node == BOARD and zone.head == BOARD))


def zones(layout: Layout) -> tuple[Zone, ...]:
    """Every zone of a layout, the board's first. A fused unit itself lies in the zone that feeds it."""
    behind = dict(layout.behind)
    fuses = dict(layout.fuses)
    heads = [BOARD, *dict.fromkeys(head for head in behind.values() if head in layout.nodes)]
    out = []
    for head in heads:
        inside = tuple(node for node in layout.nodes if behind.get(node, BOARD) == head)
        parent = None if head == BOARD else behind.get(head, BOARD)
        out.append(Zone(head, None if head == BOARD else fuses.get(head, 13.0), inside, parent))
    return tuple(out)
