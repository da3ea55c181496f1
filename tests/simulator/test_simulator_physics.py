"""The simulator itself: built on networkx, knowing nothing of the product, and right where a hand can check it."""

from __future__ import annotations

import ast
import random
from pathlib import Path

import networkx as nx
import pytest

from tests.simulator.draw import OHM_PER_M, Drawn, Meter, take

HERE = Path(__file__).parent


def test_what_draws_the_circuits_imports_nothing_of_the_product() -> None:
    for name in ("wires", "draw", "faults"):
        tree = ast.parse((HERE / f"{name}.py").read_text(encoding="utf-8"))
        imported = [node.module or "" for node in ast.walk(tree) if isinstance(node, ast.ImportFrom)]
        imported += [alias.name for node in ast.walk(tree) if isinstance(node, ast.Import) for alias in node.names]
        assert not [name for name in imported if name.split(".")[0] in ("fieldtool", "screens")]


def plain(gaps: list[float], cable: tuple[float, float] = (2.5, 1.5)) -> Drawn:
    trunk = [f"p{number}" for number in range(1, len(gaps))]
    drawn = Drawn("hand", random.Random(0), "ft_2_5", cable, gaps, 1.0, nx.MultiGraph(), trunk, Meter(digit_ohm=1e-9))
    for index, gap in enumerate(gaps):
        drawn.lay(*drawn.run(index), gap)
    return drawn


def values(drawn: Drawn, test: str) -> list[float]:
    return [row["value"] for row in take(drawn).readings if row["test"] == test]


def test_a_plain_ring_reads_as_the_textbook_says() -> None:
    """(r1+rn)/4 everywhere; L-E by R(x) = r1 r2/(r1+r2) + x(1-x)(r1-r2)²/(r1+r2); R1+R2 is x(1-x)(r1+r2)."""
    gaps = [10.0, 15.0, 25.0, 20.0]
    r1, r2 = 70 * OHM_PER_M[2.5], 70 * OHM_PER_M[1.5]
    places = [10 / 70, 25 / 70, 50 / 70]
    assert values(plain(gaps), "ln_cross") == pytest.approx([r1 / 2] * 3, abs=1e-3)
    le = [r1 * r2 / (r1 + r2) + x * (1 - x) * (r1 - r2) ** 2 / (r1 + r2) for x in places]
    assert values(plain(gaps), "le_cross") == pytest.approx(le, abs=1e-3)
    assert values(plain(gaps), "r1_r2") == pytest.approx([x * (1 - x) * (r1 + r2) for x in places], abs=1e-3)


def test_a_break_reads_open_and_one_way_round() -> None:
    drawn = plain([10.0, 15.0, 25.0, 20.0])
    drawn.part(1, "L")
    read = take(drawn).readings
    ends = {row["test"]: row.get("value") for row in read if row["test"] in ("r1", "rn", "r2")}
    assert ends["r1"] is None
    assert ends["rn"] == pytest.approx(70 * OHM_PER_M[2.5], abs=1e-3)
    assert values(plain([10.0, 15.0, 25.0, 20.0]), "ln_cross")[0] * 2 == pytest.approx(
        next(row["value"] for row in read if row["test"] == "ln_cross"), abs=1e-3
    )
