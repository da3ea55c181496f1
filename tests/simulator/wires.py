"""Three conductors as one networkx graph of resistors, and what a meter shows between two of its nodes."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from math import inf

import networkx as nx
import numpy as np

Node = tuple[str, str]
"""A conductor (L, N or E) and a place: a point's id, or A and B for the leg ends at the board."""

Join = tuple[Node, Node]


def shown(wires: nx.MultiGraph, joins: Iterable[Join], pairs: Sequence[tuple[Node, Node]]) -> list[float]:
    """Resistance between each pair of nodes with the joins made [ohm]; infinite where nothing connects them."""
    merged: dict[Node, Node] = {}

    def root(node: Node) -> Node:
        while node in merged:
            node = merged[node]
        return node

    for a, b in joins:
        if root(a) != root(b):
            merged[root(a)] = root(b)
    graph = nx.MultiGraph()
    graph.add_nodes_from(root(node) for node in wires)
    for a, b, ohm in wires.edges(data="ohm"):
        if root(a) != root(b):
            graph.add_edge(root(a), root(b), siemens=1.0 / max(ohm, 1e-7))
    found: dict[Node, tuple[int, int, np.ndarray]] = {}
    for number, island in enumerate(nx.connected_components(graph)):
        place = {node: index for index, node in enumerate(island)}
        laplacian = np.zeros((len(place), len(place)))
        for a, b, siemens in graph.edges(place, data="siemens"):
            i, j = place[a], place[b]
            laplacian[[i, j], [i, j]] += siemens
            laplacian[[i, j], [j, i]] -= siemens
        z = np.zeros_like(laplacian)
        z[1:, 1:] = np.linalg.inv(laplacian[1:, 1:])
        found |= {node: (number, index, z) for node, index in place.items()}
    out = []
    for a, b in pairs:
        one, i, z = found[root(a)]
        other, j, _ = found[root(b)]
        out.append(inf if one != other else float(z[i, i] + z[j, j] - 2 * z[i, j]))
    return out
