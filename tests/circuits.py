"""Circuits drawn at random for tests: seeded, with parallel runs, zero-length runs and branches."""

from __future__ import annotations

import random

from fieldtool.network.layout import BOARD, Layout, LayoutRun, Ohms

PER_M = (0.00741, 0.00741, 0.0121)
"""2.5/1.5 flat twin at 20 °C [ohm/m]; IEC 60228 maxima."""


def ohms(metres: float) -> Ohms:
    return Ohms(*(rate * metres for rate in PER_M))


def ring(lengths: list[float]) -> Layout:
    """A plain ring with a point between each two lengths [m]."""
    nodes = tuple(f"p{n}" for n in range(1, len(lengths)))
    chain = (BOARD, *nodes, BOARD)
    runs = tuple(
        LayoutRun(f"leg{n}", chain[n], chain[n + 1], ohms(metres), "ft_2_5", metres, "traced", on_ring=True)
        for n, metres in enumerate(lengths)
    )
    return Layout("c1", nodes, runs)


def drawn(seed: int) -> Layout:
    """A connected circuit of 3 to 12 points with extra runs, some parallel, some of no length."""
    rng = random.Random(seed)
    nodes = tuple(f"p{n}" for n in range(1, rng.randint(3, 12) + 1))
    places = [BOARD, *nodes]
    runs = []

    def add(a: str, b: str) -> None:
        metres = 0.0 if rng.random() < 0.08 else rng.uniform(0.5, 25.0)
        runs.append(LayoutRun(f"r{len(runs)}", a, b, ohms(metres), None, metres))

    for number, node in enumerate(nodes, start=1):
        add(rng.choice(places[:number]), node)
    for _ in range(rng.randint(1, 5)):
        a, b = rng.sample(places, 2)
        add(a, b)
    doubled = rng.choice(runs)
    add(doubled.a, doubled.b)
    return Layout("c1", nodes, tuple(runs))
