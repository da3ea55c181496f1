"""Headroom as a bar: what is used, what the meter can miss, what is left, with the limit at a fixed place."""

from __future__ import annotations

__all__ = ["bar"]


def bar(value: float, tolerance: float, limit: float, cells: int, ascii_only: bool = False) -> str:
    """A bar of ``cells`` cells between two lines: reading, meter, left; full where the limit is met or over.

    >>> bar(0.5, 0.1, 1.0, 10, ascii_only=True)
    '|#####+....|'
    """
    full, maybe, left, edge = ("#", "+", ".", "|") if ascii_only else ("█", "▓", "░", "│")
    used = min(cells, max(0, round(cells * value / limit))) if limit > 0 else cells
    band = min(cells - used, max(0, round(cells * tolerance / limit))) if limit > 0 else 0
    return f"{edge}{full * used}{maybe * band}{left * (cells - used - band)}{edge}"
