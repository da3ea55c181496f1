"""Three stacked networks, line, neutral and cpc, solved by nodal analysis with every ring leg joined at the board.

Islands and zero-length runs are found structurally, by union-find, before any algebra: a singular matrix is never
how a break is learnt.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import inf, isinf, isnan

import numpy as np
from numpy.typing import NDArray

from fieldtool.network.layout import BOARD, Layout, Ohms
from fieldtool.network.problems import BadRun, NoSuchNode

__all__ = ["CONDUCTORS", "Grid", "Parted", "r1_r2", "r1_rn", "resistance", "solve", "with_run", "without"]

CONDUCTORS = ("line", "neutral", "cpc")
"""The order in which the three networks are stacked."""

Edge = tuple[int, int, float]


@dataclass(frozen=True, slots=True, eq=False)
class Grid:
    """A solved layout, all ring legs joined at the board, at 20 °C.

    ``index`` gives each node's row; ``z_ohm`` (3, n, n) is the inverse conductance grounded at the board [ohm],
    infinite on the diagonal where a conductor does not reach; ``r_to_board_ohm`` (3, n) its diagonal [ohm].
    """

    layout: Layout
    index: dict[str, int]
    z_ohm: NDArray[np.float64]
    r_to_board_ohm: NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Parted:
    """What taking a run out would do where no other way round is left: the nodes it cuts off from the board."""

    nodes: tuple[str, ...]


def checked(ohms: Ohms, run_id: str) -> tuple[float, float, float]:
    """The three resistances of a run [ohm]; BadRun where one is below zero or not a number."""
    three = (ohms.line, ohms.neutral, ohms.cpc)
    for value in three:
        if isnan(value) or value < 0:
            raise BadRun(f"run {run_id} has the resistance {value} Ω; it is 0 or more")
    return three


class Groups:
    """Union-find over ``n`` places: which are one place electrically, or one island."""

    def __init__(self, n: int) -> None:
        self.parent = list(range(n))

    def find(self, item: int) -> int:
        """The representative of an item's group."""
        while self.parent[item] != item:
            self.parent[item] = self.parent[self.parent[item]]
            item = self.parent[item]
        return item

    def join(self, a: int, b: int) -> None:
        """Make two groups one; the lower number represents it."""
        low, high = sorted((self.find(a), self.find(b)))
        self.parent[high] = low


def invert(n: int, edges: list[Edge]) -> tuple[NDArray[np.float64], NDArray[np.bool_]]:
    """Potentials for unit currents with place 0 grounded: (n, n) matrix [ohm], and which places are reached (n,).

    Edges are (place, place, ohm); zero-ohm edges merge their places, infinite ones are left out by the caller.
    Rows and columns of places that are not reached are zero.
    """
    same = Groups(n)
    for a, b, ohm in edges:
        if ohm == 0:
            same.join(a, b)
    island = Groups(n)
    for a, b, _ in edges:
        island.join(a, b)
    home = island.find(0)
    reached = np.array([island.find(i) == home for i in range(n)], dtype=bool)
    root = [same.find(i) for i in range(n)]
    heads = sorted({root[i] for i in range(n) if reached[i]} - {root[0]})
    row = {head: number for number, head in enumerate(heads)}
    size = len(heads)
    g = np.zeros((size + 1, size + 1))
    for a, b, ohm in edges:
        if ohm == 0 or not reached[a]:
            continue
        i, j = row.get(root[a], size), row.get(root[b], size)
        if i == j:
            continue
        siemens = 1.0 / ohm
        g[i, i] += siemens
        g[j, j] += siemens
        g[i, j] -= siemens
        g[j, i] -= siemens
    z = np.zeros((size + 1, size + 1))
    if size:
        z[:size, :size] = np.linalg.inv(g[:size, :size])
    spread = np.array([row.get(root[i], size) if reached[i] else size for i in range(n)])
    return z[np.ix_(spread, spread)], reached


def solve(layout: Layout) -> Grid:
    """Build and factor a layout once, all three conductors.

    Parallel runs add up, zero-length runs merge their ends, an open conductor is left out. Raises BadRun.
    """
    nodes = (BOARD, *(node for node in layout.nodes if node != BOARD))
    index = {node: number for number, node in enumerate(nodes)}
    n = len(nodes)
    ends: list[tuple[int, int]] = []
    table: list[tuple[float, float, float]] = []
    for run in layout.runs:
        if run.a not in index or run.b not in index:
            raise NoSuchNode(f"run {run.id} ends at {run.a if run.a not in index else run.b}, which is no point")
        ends.append((index[run.a], index[run.b]))
        table.append(checked(run.ohms, run.id))
    z = np.zeros((3, n, n))
    plain = bool(table) and all(0 < value < inf for row in table for value in row) and _connected(n, ends)
    if plain:
        g = np.zeros((3, n, n))
        siemens = 1.0 / np.array(table)
        for (a, b), row in zip(ends, siemens, strict=True):
            if a != b:
                g[:, a, a] += row
                g[:, b, b] += row
                g[:, a, b] -= row
                g[:, b, a] -= row
        z[:, 1:, 1:] = np.linalg.inv(g[:, 1:, 1:])
    else:
        for conductor in range(3):
            edges = [
                (a, b, row[conductor]) for (a, b), row in zip(ends, table, strict=True) if not isinf(row[conductor])
            ]
            own, reached = invert(n, edges)
            own[~reached, ~reached] = inf
            z[conductor] = own
    return Grid(layout, index, z, np.einsum("cii->ci", z).copy())


def _connected(n: int, ends: Iterable[tuple[int, int]]) -> bool:
    groups = Groups(n)
    for a, b in ends:
        groups.join(a, b)
    return all(groups.find(i) == 0 for i in range(n))


def r1_r2(grid: Grid) -> dict[str, float]:
    """In-service R1+R2 at every node [ohm]: line and cpc between the board and the point, legs joined.

    Infinite where either does not reach. For a plain ring it is x(1-x)(r1+r2) (nodal analysis).
    """
    return _sum(grid, 0, 2)


def r1_rn(grid: Grid) -> dict[str, float]:
    """In-service R1+Rn at every node [ohm]: the line-neutral loop of the circuit's own cable."""
    return _sum(grid, 0, 1)


def _sum(grid: Grid, first: int, second: int) -> dict[str, float]:
    total = grid.r_to_board_ohm[first] + grid.r_to_board_ohm[second]
    return {node: float(total[number]) for node, number in grid.index.items() if node != BOARD}


def resistance(grid: Grid, conductor: str, a: str, b: str) -> float:
    """Resistance of one conductor between two nodes, legs joined [ohm]; infinite where it is open."""
    for node in (a, b):
        if node not in grid.index:
            raise NoSuchNode(f"{node} is not a point of this circuit")
    i, j, c = grid.index[a], grid.index[b], CONDUCTORS.index(conductor)
    z = grid.z_ohm[c]
    if a == b:
        return 0.0
    if isinf(float(z[i, i])) or isinf(float(z[j, j])):
        return inf
    return float(z[i, i] + z[j, j] - 2 * z[i, j])


def with_run(grid: Grid, a: str, b: str, ohms: Ohms) -> Grid:
    """The grid with one more run between existing nodes, by rank-one update. Raises NoSuchNode, BadRun."""
    three = checked(ohms, "added")
    for node in (a, b):
        if node not in grid.index:
            raise NoSuchNode(f"{node} is not a point of this circuit")
    i, j = grid.index[a], grid.index[b]
    z = grid.z_ohm.copy()
    for conductor, ohm in enumerate(three):
        if isinf(ohm):
            continue
        column = z[conductor, :, i] - z[conductor, :, j]
        over = ohm + column[i] - column[j]
        if over > 0:
            z[conductor] -= np.outer(column, column) / over
    return Grid(grid.layout, grid.index, z, np.einsum("cii->ci", z).copy())


def without(grid: Grid, run_id: str) -> Grid | Parted:
    """The grid with one run taken out, by rank-one update, or the nodes that would be cut off.

    A run without another way round it is found in the graph, never by dividing by a rounding error.
    """
    run = grid.layout.run(run_id)
    left = grid.layout.with_runs((), (run_id,))
    groups = Groups(len(grid.index))
    for other in left.runs:
        groups.join(grid.index[other.a], grid.index[other.b])
    cut = tuple(node for node, number in grid.index.items() if groups.find(number) != groups.find(grid.index[BOARD]))
    if cut:
        return Parted(cut)
    if min(checked(run.ohms, run_id)) == 0:
        return solve(left)
    i, j = grid.index[run.a], grid.index[run.b]
    z = grid.z_ohm.copy()
    for conductor, ohm in enumerate(checked(run.ohms, run_id)):
        if isinf(ohm):
            continue
        column = z[conductor, :, i] - z[conductor, :, j]
        over = ohm - (column[i] - column[j])
        z[conductor] += np.outer(column, column) / over
    return Grid(left, grid.index, z, np.einsum("cii->ci", z).copy())
