"""Edits of a layout, pure and structural: split a run, take one out, ask what hangs on what."""

from __future__ import annotations

from dataclasses import replace

from fieldtool.network.grid import Groups
from fieldtool.network.layout import BOARD, Layout

__all__ = ["end_nodes", "is_bridge", "lengthen", "part", "path_to_board", "ring_runs", "split_run", "spur_nodes"]


def split_run(layout: Layout, run_id: str, fraction: float, node: str) -> Layout:
    """The layout with a new node ``fraction`` [-] of the way along a run, counted from its end ``a``.

    ValueError when the fraction is not between 0 and 1.
    """
    if not 0 < fraction < 1:
        raise ValueError(f"a place along a run is between 0 and 1, not {fraction}")
    run = layout.run(run_id)
    metres = run.length_m
    first = replace(
        run,
        id=f"{run.id}_a",
        b=node,
        ohms=run.ohms.scaled(fraction),
        length_m=None if metres is None else metres * fraction,
    )
    second = replace(
        run,
        id=f"{run.id}_b",
        a=node,
        ohms=run.ohms.scaled(1 - fraction),
        length_m=None if metres is None else metres * (1 - fraction),
    )
    return layout.with_runs((first, second), (run_id,))


def lengthen(layout: Layout, run_id: str, factor: float) -> Layout:
    """The layout with one run's length and resistances multiplied by ``factor`` [-]; below zero is a ValueError."""
    if factor < 0:
        raise ValueError(f"a run cannot be {factor} times as long")
    run = layout.run(run_id)
    metres = None if run.length_m is None else run.length_m * factor
    longer = replace(run, ohms=run.ohms.scaled(factor), length_m=metres)
    return replace(layout, runs=tuple(longer if item.id == run_id else item for item in layout.runs))


def part(layout: Layout, run_id: str) -> Layout:
    """The layout with one run taken out; its nodes stay."""
    layout.run(run_id)
    return layout.with_runs((), (run_id,))


def is_bridge(layout: Layout, run_id: str) -> bool:
    """True where taking the run out would cut something off from the board."""
    run = layout.run(run_id)
    index = {node: number for number, node in enumerate((BOARD, *layout.nodes))}
    groups = Groups(len(index))
    for item in layout.runs:
        if item.id != run_id:
            groups.join(index[item.a], index[item.b])
    return groups.find(index[run.a]) != groups.find(index[run.b])


def ring_runs(layout: Layout) -> tuple[str, ...]:
    """Ids of the runs that have another way round them: the ring itself, and any loop in it."""
    return tuple(run.id for run in layout.runs if not is_bridge(layout, run.id))


def spur_nodes(layout: Layout) -> tuple[str, ...]:
    """Nodes that no ring run touches: spur ends and what hangs beyond them."""
    on_ring = {end for run_id in ring_runs(layout) for end in (layout.run(run_id).a, layout.run(run_id).b)}
    return tuple(node for node in layout.nodes if node not in on_ring)


def end_nodes(layout: Layout) -> tuple[str, ...]:
    """Nodes at which exactly one run ends."""
    return tuple(node for node in layout.nodes if len(layout.at(node)) == 1)


def path_to_board(layout: Layout, node: str) -> tuple[str, ...]:
    """Ids of the runs on the way with fewest runs from a node to the board; empty where there is none."""
    back: dict[str, tuple[str, str]] = {}
    waiting = [node]
    seen = {node}
    while waiting:
        here = waiting.pop(0)
        if here == BOARD:
            path = []
            while here != node:
                run_id, here = back[here]
                path.append(run_id)
            return tuple(reversed(path))
        for run in layout.at(here):
            there = run.other(here)
            if there not in seen:
                seen.add(there)
                back[there] = (run.id, here)
                waiting.append(there)
    return ()
