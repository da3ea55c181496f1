"""How many cells each row of the strip has, and the cutting of words to them."""

from __future__ import annotations

from fieldtool.job.job import Job
from fieldtool.quantities.show import cells, shorten

__all__ = ["MIND_CELLS", "NAME_CELLS", "NEXT_CELLS", "fit", "name_of"]

NEXT_CELLS = 66
MIND_CELLS = 58
NAME_CELLS = 15


def fit(sentence: str, most: int = NEXT_CELLS) -> str:
    """A sentence within its row."""
    return sentence if cells(sentence) <= most else shorten(sentence, most)


def name_of(job: Job, place: str | None) -> str:
    """A person's name for a place, short enough to leave room for what is said of it."""
    return shorten(job.point_name(place), NAME_CELLS)
