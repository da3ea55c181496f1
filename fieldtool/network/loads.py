"""Load currents: what flows in every run, how the legs share it, and the voltage lost on the way."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from fieldtool.network.grid import Grid, solve
from fieldtool.network.layout import BOARD, Layout
from fieldtool.network.problems import Disconnected, NoSuchNode

__all__ = ["Flows", "flows"]


@dataclass(frozen=True, slots=True)
class Flows:
    """Currents and voltages under a set of loads.

    ``run_a`` is the line current of each run, from its end ``a`` to its end ``b`` [A]; ``leg_a`` what each leg at
    the board carries [A]; ``drop_v`` the voltage lost in line and neutral at each node [V].
    """

    run_a: dict[str, float]
    leg_a: dict[str, float]
    drop_v: dict[str, float]


def flows(source: Layout | Grid, loads_a: Mapping[str, float], factor: float = 1.0) -> Flows:
    """Currents and volt drop for loads taken at nodes [A], by nodal analysis.

    ``factor`` multiplies every resistance for the conductors' running temperature [-] (1.2 for 70 °C). Loads are
    currents, not impedances. Raises NoSuchNode for a load nowhere, Disconnected for one that is not fed, and
    ValueError for one below zero.
    """
    grid = source if isinstance(source, Grid) else solve(source)
    n = len(grid.index)
    drawn = np.zeros(n)
    for node, amps in loads_a.items():
        if node not in grid.index:
            raise NoSuchNode(f"the load at {node} is at no point of this circuit")
        if not amps >= 0:
            raise ValueError(f"a load cannot be {amps} A")
        drawn[grid.index[node]] += amps
    for conductor in (0, 1):
        for node, amps in loads_a.items():
            if amps > 0 and not np.isfinite(grid.r_to_board_ohm[conductor, grid.index[node]]):
                raise Disconnected(f"the load at {node} is not fed: line or neutral does not reach it")
    live = np.where(np.isfinite(grid.z_ohm), grid.z_ohm, 0.0)
    line, neutral = live[0] @ drawn, live[1] @ drawn
    run_a: dict[str, float] = {}
    leg_a: dict[str, float] = {}
    for run in grid.layout.runs:
        i, j = grid.index[run.a], grid.index[run.b]
        if np.isinf(run.ohms.line):
            run_a[run.id] = 0.0
            continue
        if run.ohms.line > 0:
            run_a[run.id] = float((line[j] - line[i]) / run.ohms.line)
        else:
            run_a[run.id] = _through(grid, run.id, drawn, run_a)
        if BOARD in (run.a, run.b):
            leg_a[run.id] = abs(run_a[run.id])
    drop = factor * (line + neutral)
    return Flows(run_a, leg_a, {node: float(drop[k]) for node, k in grid.index.items() if node != BOARD})


def _through(grid: Grid, run_id: str, drawn: object, known: dict[str, float]) -> float:
    """Current of a run without resistance: what is drawn beyond it, less what its neighbours bring."""
    run = grid.layout.run(run_id)
    loads = np.asarray(drawn)
    total = float(loads[grid.index[run.b]]) if run.b != BOARD else 0.0
    line = np.where(np.isfinite(grid.z_ohm[0]), grid.z_ohm[0], 0.0) @ loads
    for other in grid.layout.at(run.b):
        if other.id == run_id or other.ohms.line <= 0:
            continue
        i, j = grid.index[other.a], grid.index[other.b]
        brought = float((line[j] - line[i]) / other.ohms.line)
        total -= brought if other.b == run.b else -brought
    return total if run.b != BOARD else known.get(run_id, 0.0)
