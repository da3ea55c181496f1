"""A circuit's shape as runs of three conductors between points, each length carrying where it came from."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from typing import Literal

__all__ = ["BOARD", "Conductor", "Layout", "LayoutRun", "Ohms", "Origin"]

BOARD = "board"
"""Node id of the circuit's own terminals at the board."""

Origin = Literal["traced", "measured", "inferred", "assumed", "proposed"]
"""Where a length or resistance came from, best first."""

Conductor = Literal["line", "neutral", "cpc"]


@dataclass(frozen=True, slots=True)
class Ohms:
    """Resistance of the three conductors of one run at 20 °C [ohm]; ``inf`` is an open conductor."""

    line: float
    neutral: float
    cpc: float

    def scaled(self, factor: float) -> Ohms:
        """The same three conductors over ``factor`` times the length [-]."""
        return Ohms(self.line * factor, self.neutral * factor, self.cpc * factor)


@dataclass(frozen=True, slots=True)
class LayoutRun:
    """One length of cable between two nodes.

    ``length_m`` [m] is None where only resistances are known; ``cable`` is a key of the cable catalogue.
    ``fused_a`` [A] is set on the first run behind a fused connection unit: the unit sits at end ``a``.
    """

    id: str
    a: str
    b: str
    ohms: Ohms
    cable: str | None = None
    length_m: float | None = None
    origin: Origin = "assumed"
    on_ring: bool = False
    new: bool = False

    def other(self, node: str) -> str:
        """The node at the other end of this run."""
        return self.b if node == self.a else self.a


@dataclass(frozen=True, slots=True)
class Layout:
    """Nodes and runs of one circuit as it stands or as a way would leave it.

    The board is always the node ``BOARD``; runs may be parallel (each has its own id). ``fuses`` gives for each
    node that is a fused connection unit its fuse [A]: everything beyond the runs in ``behind`` lies behind it.
    ``behind`` maps a node to the fused node it hangs behind (nearest first by following the map).
    """

    circuit: str
    nodes: tuple[str, ...]
    runs: tuple[LayoutRun, ...]
    fuses: tuple[tuple[str, float], ...] = ()
    behind: tuple[tuple[str, str], ...] = ()
    assumed: tuple[str, ...] = ()

    def run(self, run_id: str) -> LayoutRun:
        """The run with this id; KeyError when the layout has none."""
        for run in self.runs:
            if run.id == run_id:
                return run
        raise KeyError(run_id)

    def at(self, node: str) -> tuple[LayoutRun, ...]:
        """Every run that ends at this node, in the layout's order."""
        return tuple(run for run in self.runs if node in (run.a, run.b))

    def with_runs(self, added: Iterable[LayoutRun], removed: Iterable[str] = ()) -> Layout:
        """The same layout with runs added and others taken out; new nodes are taken from the added runs."""
        gone = set(removed)
        extra = tuple(added)
        nodes = list(self.nodes)
        for run in extra:
            for node in (run.a, run.b):
                if node != BOARD and node not in nodes:
                    nodes.append(node)
        kept = tuple(run for run in self.runs if run.id not in gone)
        return replace(self, nodes=tuple(nodes), runs=kept + extra)
