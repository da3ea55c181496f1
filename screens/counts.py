"""What each step says of itself in row 4: done, how many to go, or the verdict's mark."""

from __future__ import annotations

from typing import TYPE_CHECKING

from fieldtool.answers import MARKS

if TYPE_CHECKING:
    from screens.workbench import Workbench

__all__ = ["counts"]


def counts(bench: Workbench) -> dict[str, str]:
    """A word for each pane; cheap, because it is painted after every key."""
    visit, circuit = bench.visit, bench.circuit
    if visit is None:
        return {}
    from screens.survey import unanswered

    left = unanswered(bench)
    out = {"survey": f"{left} to go" if left else "ok"}
    if circuit is None:
        return out
    cells = (*visit.board_cells(), *visit.walk(circuit))
    empty = sum(visit.standing(cell) is None for cell in cells)
    waiting = sum(1 for reading in visit.waiting_taken(circuit))
    out["readings"] = f"{waiting} ask" if waiting else (f"{empty} to go" if empty else "ok")
    asked = [request for request in visit.job.requests if request.circuit == circuit]
    out["proposal"] = str(len(asked)) if asked else "--"
    verdict = bench.verdict()
    out["verdict"] = MARKS[verdict.outcome].upper() if verdict is not None and asked else "??"
    return out
