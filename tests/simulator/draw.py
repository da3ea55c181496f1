"""A sound ring drawn at random: lengths, cable and meter; what a fault then changes; and the readings taken of it."""

from __future__ import annotations

import random
from dataclasses import dataclass, field, replace
from math import inf, isinf
from typing import Any

import networkx as nx

from tests.simulator.wires import Join, Node, shown

OHM_PER_M = {1.0: 0.0181, 1.5: 0.0121, 2.5: 0.00741, 4.0: 0.00461}
"""Plain copper at 20 °C [ohm/m]; IEC 60228 maxima."""

CABLES = {"ft_2_5": (2.5, 1.5), "ft_4": (4.0, 1.5), "ft_2_5_1_0": (2.5, 1.0), "s_2_5": (2.5, 2.5)}
CONDUCTORS = ("L", "N", "E")


@dataclass
class Meter:
    """Errors of one instrument: gain and zero shared by all readings, scatter of each contact, the last digit."""

    gain: float = 0.0
    zero_ohm: float = 0.0
    scatter_ohm: float = 0.0
    digit_ohm: float = 0.01

    def read(self, rng: random.Random, ohm: float, floor: float = 0.0) -> float | None:
        """What the display shows [ohm]; None for an open circuit."""
        if isinf(ohm) or ohm > 1999:
            return None
        value = ohm * (1 + self.gain) + self.zero_ohm + rng.gauss(0.0, self.scatter_ohm)
        return max(floor, round(round(value / self.digit_ohm) * self.digit_ohm, 9))


@dataclass
class Drawn:
    """One drawn circuit, what is wrong with it, and everything that was read."""

    fault: str
    rng: random.Random
    cable: str
    sizes: tuple[float, float]
    gaps: list[float]
    warm: float
    wires: nx.MultiGraph
    trunk: list[str]
    meter: Meter
    spurs: dict[str, tuple[str, float]] = field(default_factory=dict)
    traced: set[str] = field(default_factory=set)
    ordered: bool = True
    survey: dict[str, Any] = field(default_factory=dict)
    truth: dict[str, Any] = field(default_factory=dict)
    joins_ln: str = "crossed"
    joins_le: str = "crossed"
    lead_ends: float = 0.0
    lead_points: float = 0.0
    ze: float = 0.2
    at_point: dict[str, dict[str, float]] = field(default_factory=dict)
    swapped: dict[str, dict[str, str]] = field(default_factory=dict)
    service: list[Join] | None = None
    extra: list[dict[str, Any]] = field(default_factory=list)
    zs_mode: str = "high_current"
    zs_add: float = 0.0
    tests: tuple[str, ...] = ("ends", "ln_cross", "le_cross", "r1_r2", "zs", "ir")
    readings: list[dict[str, Any]] = field(default_factory=list)

    @property
    def points(self) -> list[str]:
        """Every outlet, spurs after the ring's own."""
        return [*self.trunk, *self.spurs]

    def rate(self, conductor: str) -> float:
        """Ohms a metre of one conductor as warm as it is."""
        return OHM_PER_M[self.sizes[1] if conductor == "E" else self.sizes[0]] * self.warm

    def lay(self, a: str, b: str, metres: float) -> None:
        """One length of cable, all three conductors."""
        for conductor in CONDUCTORS:
            self.wires.add_edge((conductor, a), (conductor, b), ohm=self.rate(conductor) * metres)

    def run(self, index: int) -> tuple[str, str]:
        """The ends of the ring's run with this number, from leg A."""
        chain = ["A", *self.trunk, "B"]
        return chain[index], chain[index + 1]

    def part(self, index: int, conductor: str) -> None:
        """Break one conductor in one run."""
        a, b = self.run(index)
        self.wires.remove_edge((conductor, a), (conductor, b))

    def joint(self, index: int, conductor: str, ohm: float) -> None:
        """Add a bad joint to one conductor of one run."""
        a, b = self.run(index)
        next(iter(self.wires[(conductor, a)][(conductor, b)].values()))["ohm"] += ohm

    def hang(self, parent: str, metres: float, name: str | None = None) -> str:
        """Hang an outlet on a spur."""
        key = name or f"s{len(self.spurs) + 1}"
        self.spurs[key] = (parent, metres)
        self.lay(parent, key, metres)
        return key


def sound(fault: str, seed: str, *, scatter: float = 0.012, least: int = 3, most: int = 16) -> Drawn:
    """A ring with nothing wrong: 15 to 110 m, 3 to 16 points, any usual cable, any temperature from 0 to 30 °C."""
    rng = random.Random(seed)
    points = rng.randint(least, most)
    metres = rng.uniform(max(15.0, 1.5 * (points + 1)), 110.0)
    weights = [rng.gammavariate(2.0, 1.0) + 0.05 for _ in range(points + 1)]
    gaps = [metres * weight / sum(weights) for weight in weights]
    cable = rng.choices(list(CABLES), (0.7, 0.12, 0.1, 0.08))[0]
    meter = Meter(rng.gauss(0, 0.007), rng.gauss(0, 0.004), scatter)
    trunk = [f"p{number}" for number in range(1, points + 1)]
    drawn = Drawn(
        fault, rng, cable, CABLES[cable], gaps, 1 + 0.004 * rng.uniform(-20, 10), nx.MultiGraph(), trunk, meter
    )
    drawn.ze = rng.choice((0.12, 0.2, 0.28, 0.35, 0.6))
    for index, gap in enumerate(gaps):
        drawn.lay(*drawn.run(index), gap)
    if rng.random() < 0.5:
        drawn.tests = ("ends", "ln_cross", "le_cross", "zs", "ir")
    return drawn


def _joins(kind: str, other: str) -> list[Join]:
    pairs: dict[str, list[Join]] = {
        "crossed": [(("L", "A"), (other, "B")), (("L", "B"), (other, "A"))],
        "same": [(("L", "A"), (other, "A")), (("L", "B"), (other, "B"))],
        "one": [(("L", "A"), (other, "B"))],
        "two": [(("L", "B"), (other, "A"))],
    }
    return pairs[kind]


def take(drawn: Drawn) -> Drawn:
    """Take every reading the circuit's ``tests`` name, as the meter shows it."""
    wires, rng = drawn.wires, drawn.rng

    def note(test: str, point: str | None, ohm: float, *, lead: float = 0.0, scatter: float = 1.0, **more: Any) -> None:
        meter = replace(drawn.meter, scatter_ohm=drawn.meter.scatter_ohm * scatter)
        value = meter.read(rng, ohm + lead)
        row: dict[str, Any] = {"test": test, "point": point, **more}
        row |= {"sign": "open"} if value is None else {"value": value}
        drawn.readings.append(row)

    if "ends" in drawn.tests:
        ends = shown(wires, (), [((c, "A"), (c, "B")) for c in CONDUCTORS])
        for test, ohm in zip(("r1", "rn", "r2"), ends, strict=True):
            note(test, None, ohm, lead=drawn.lead_ends)
    for test, other, kind in (("ln_cross", "N", drawn.joins_ln), ("le_cross", "E", drawn.joins_le)):
        if test in drawn.tests:
            probes = [_probe(drawn, point, other) for point in drawn.points]
            for point, ohm in zip(drawn.points, shown(wires, _joins(kind, other), probes), strict=True):
                note(test, point, ohm + drawn.at_point.get(point, {}).get(test, 0.0), lead=drawn.lead_points)
    bars = [((c, "A"), (c, "B")) for c in CONDUCTORS] if drawn.service is None else drawn.service
    if "r1_r2" in drawn.tests:
        ohms = shown(wires, [*bars, (("L", "A"), ("E", "A"))], [(("L", p), ("E", p)) for p in drawn.points])
        for point, ohm in zip(drawn.points, ohms, strict=True):
            note("r1_r2", point, ohm + drawn.at_point.get(point, {}).get("r1_r2", 0.0), lead=drawn.lead_points)
    if "zs" in drawn.tests:
        live = _zs(drawn, bars)
        drawn.readings.append({"test": "ze", "point": None, "value": round(drawn.ze, 2)})
        for point, ohm in zip(drawn.points, live, strict=True):
            note("zs", point, ohm + drawn.zs_add, scatter=1.3, mode=drawn.zs_mode)
    if "ir" in drawn.tests:
        for test in ("ir_ln", "ir_le", "ir_ne"):
            if not any(row["test"] == test for row in drawn.extra):
                drawn.readings.append({"test": test, "point": None, "value": 2e8, "sign": ">"})
    drawn.readings += drawn.extra
    return drawn


def _probe(drawn: Drawn, point: str, other: str) -> tuple[Node, Node]:
    swap = drawn.swapped.get(point, {})
    return ((swap.get("L", "L"), point), (swap.get(other, other), point))


def _zs(drawn: Drawn, bars: list[Join]) -> list[float]:
    both = shown(drawn.wires, bars, [((c, p), (c, "A")) for c in "LE" for p in drawn.points])
    line, earth = both[: len(drawn.points)], both[len(drawn.points) :]
    paths = drawn.truth.get("parallel", {})
    out = []
    for point, one, two in zip(drawn.points, line, earth, strict=True):
        if point in paths:
            two = two * paths[point] / (two + paths[point]) if two < inf else paths[point]
        out.append(drawn.ze + one + two + drawn.at_point.get(point, {}).get("zs", 0.0))
    return out
