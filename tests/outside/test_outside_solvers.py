"""The networks against two programs we did not write: networkx's resistance distance, and ngspice."""

from __future__ import annotations

import re
import shutil
import subprocess
from pathlib import Path

import networkx as nx
import pytest

from fieldtool.network.grid import solve
from fieldtool.network.layout import BOARD, Layout
from tests.circuits import drawn

CONDUCTORS = ("line", "neutral", "cpc")


def _graph(layout: Layout, conductor: str) -> tuple[nx.MultiGraph, dict[str, str]]:
    """The conductor as a multigraph; runs of no length are contracted first, because networkx divides by them."""
    head = {node: node for node in (BOARD, *layout.nodes)}

    def find(node: str) -> str:
        while head[node] != node:
            node = head[node]
        return node

    for run in layout.runs:
        if getattr(run.ohms, conductor) == 0:
            head[find(run.b)] = find(run.a)
    graph = nx.MultiGraph()
    graph.add_nodes_from({find(node) for node in head})
    for run in layout.runs:
        ohm = getattr(run.ohms, conductor)
        if ohm > 0 and find(run.a) != find(run.b):
            graph.add_edge(find(run.a), find(run.b), weight=ohm)
    return graph, {node: find(node) for node in head}


@pytest.mark.parametrize("seed", range(50))
def test_resistances_equal_networkx(seed: int) -> None:
    """networkx.resistance_distance on a MultiGraph, parallel runs included: 1e-9 relative."""
    layout = drawn(seed)
    grid = solve(layout)
    for number, conductor in enumerate(CONDUCTORS):
        graph, names = _graph(layout, conductor)
        for node in layout.nodes:
            theirs = 0.0
            if names[node] != names[BOARD]:
                theirs = nx.resistance_distance(graph, names[BOARD], names[node], weight="weight", invert_weight=True)
            assert grid.r_to_board_ohm[number, grid.index[node]] == pytest.approx(theirs, rel=1e-9, abs=1e-12)


needs_ngspice = pytest.mark.skipif(
    shutil.which("ngspice") is None, reason="NOT CHECKED AGAINST ngspice: the Debian package is not installed here"
)


@needs_ngspice
def test_resistances_equal_ngspice_on_fifty_circuits(tmp_path: Path) -> None:
    """One ampere into each point of each conductor's network, the board grounded: volts are ohms."""
    deck, wanted = ["* fifty circuits, one ampere at their last point"], {}
    for seed in range(50):
        layout = drawn(seed)
        grid = solve(layout)
        node = layout.nodes[-1]
        for number, conductor in enumerate(CONDUCTORS):
            tag = f"c{seed}{conductor[0]}"
            graph, names = _graph(layout, conductor)
            for count, (a, b, ohm) in enumerate(graph.edges(data="weight")):
                ends = [("0" if end == names[BOARD] else f"{tag}_{end}") for end in (a, b)]
                deck.append(f"r{tag}_{count} {ends[0]} {ends[1]} {ohm:.15g}")
            if names[node] == names[BOARD]:
                continue
            node_name = names[node]
            deck.append(f"i{tag} 0 {tag}_{node_name} 1")
            wanted[f"{tag}_{node_name}".lower()] = float(grid.r_to_board_ohm[number, grid.index[node]])
    prints = "\n".join(f"print v({name})" for name in wanted)
    deck += [".control", "set numdgt=14", "op", prints, "quit", ".endc", ".end"]
    path = tmp_path / "circuits.cir"
    path.write_text("\n".join(deck))
    done = subprocess.run(["ngspice", "-b", str(path)], capture_output=True, text=True, timeout=120, check=False)
    found = {m[1].lower(): float(m[2]) for m in re.finditer(r"v\((\S+)\) = (\S+)", done.stdout)}
    assert len(found) == len(wanted) >= 140
    for name, value in wanted.items():
        assert found[name] == pytest.approx(value, rel=1e-6, abs=1e-9)
