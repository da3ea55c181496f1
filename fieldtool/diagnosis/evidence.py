"""The readings of one circuit gathered for explaining, with what a healthy ring of them would read where."""

from __future__ import annotations

from dataclasses import dataclass, field
from math import inf

from fieldtool.job.job import Job
from fieldtool.quantities.show import shorten
from fieldtool.reference.look import cable, r_ohm_per_m

__all__ = ["Evidence", "gather"]

SCATTER_OHM = 0.03
"""Contacts and clips between two readings of one thing [ohm]; common practice: nothing is made of it."""


@dataclass(frozen=True, slots=True)
class Evidence:
    """Counted readings of one circuit [ohm]; ``inf`` for open, absent where not taken.

    ``trunk`` are the points that may sit on the ring, in walking order where that is known; ``spurs`` those that
    were seen to hang on one.
    """

    circuit_id: str
    names: dict[str, str]
    trunk: tuple[str, ...]
    spurs: tuple[str, ...]
    parents: dict[str, str]
    ordered: bool
    r1: float | None
    rn: float | None
    r2: float | None
    ln: dict[str, float]
    le: dict[str, float]
    r1_r2: dict[str, float]
    r1_rn: dict[str, float]
    zs: dict[str, float]
    ze: float | None
    line_per_m: float | None
    cpc_per_m: float | None
    walked: frozenset[str] = frozenset()
    no_trip: frozenset[str] = frozenset()
    unsteady: frozenset[str] = frozenset()
    label: str = "none"
    counts: tuple[int | None, int | None, int | None] = (None, None, None)
    legs: str = ""
    at_board: dict[str, float] = field(default_factory=dict)

    def root(self, point: str) -> str:
        """The point of the ring that a spur hangs on, through any spurs between."""
        seen: set[str] = set()
        while point in self.parents and point not in seen:
            seen.add(point)
            point = self.parents[point]
        return point

    @property
    def ends(self) -> bool:
        """True where all three were read end to end and none is open."""
        return all(value is not None and value < inf for value in (self.r1, self.rn, self.r2))

    @property
    def flat(self) -> float:
        """What L-N crossed reads everywhere on a whole ring [ohm]: (r1+rn)/4."""
        return ((self.r1 or 0.0) + (self.rn or 0.0)) / 4

    @property
    def hump(self) -> tuple[float, float]:
        """Lowest and highest L-E crossed of a whole ring [ohm]: r1·r2/(r1+r2) at the board, (r1+r2)/4 mid ring."""
        r1, r2 = self.r1 or 0.0, self.r2 or 0.0
        return (r1 * r2 / (r1 + r2) if r1 + r2 > 0 else 0.0, (r1 + r2) / 4)

    def slack(self, value: float) -> float:
        """What meters and contacts can make of a value either way [ohm]."""
        return max(SCATTER_OHM, 0.04 * value + 0.02)

    @property
    def metres(self) -> float | None:
        """Length of the ring by its line conductor [m]."""
        if self.r1 is None or self.line_per_m is None or self.r1 == inf:
            return None
        return self.r1 / self.line_per_m

    @property
    def smallest_spur_m(self) -> float | None:
        """The shortest spur that stands out of the scatter [m]."""
        if self.line_per_m is None or not self.ends:
            return None
        return round(self.slack(self.flat) / (2 * self.line_per_m), 1)

    @property
    def complete(self) -> bool:
        """True where both crossed readings were taken at every point and spur."""
        points = (*self.trunk, *self.spurs)
        return bool(points) and self.ends and all(point in self.ln and point in self.le for point in points)

    @property
    def nothing_fits(self) -> bool:
        """True where the crossed readings cannot belong to these end-to-end readings."""
        if not self.ends or len(self.ln) < 3:
            return False
        return all(value > 1.6 * self.flat + 0.1 for value in self.ln.values())

    def excess(self, point: str) -> tuple[float | None, float | None]:
        """How far a point's crossed readings lie above the ring [ohm]: L-N, and L-E over the hump's highest."""
        ln = self.ln.get(point)
        le = self.le.get(point)
        return (None if ln is None else ln - self.flat, None if le is None else le - self.hump[1])

    def still_open(self) -> str:
        """What has to be read before it is shown to be a ring."""
        points = (*self.trunk, *self.spurs)
        ln = sum(point not in self.ln for point in points)
        le = sum(point not in self.le for point in points)
        if ln:
            return f"L-N crossed at {ln} more point{'s' if ln > 1 else ''}"
        return f"L-E crossed at {le} more: only that shows the earth" if le else "repeat steps 1 to 3"

    def so_far(self) -> str:
        """What can be said while nothing is explained yet."""
        if self.r1_r2:
            worst = max(self.r1_r2, key=lambda point: self.r1_r2[point])
            if self.r1_r2[worst] == inf:
                return f"R1+R2 reads open at {self.names[worst]}."
            return f"A radial as read: R1+R2 rises to {self.r1_r2[worst]:.2f} Ω at {self.names[worst]}."
        if self.r1 is not None or self.ln or self.le or self.rn is not None or self.r2 is not None:
            return "Not enough yet to say what it is."
        return ""

    def remarks(self) -> tuple[tuple[str, str], ...]:
        """What the row of each point says, up to 38 cells."""
        out: list[tuple[str, str]] = []
        if not self.ends:
            return ()
        for point in (*self.trunk, *self.spurs):
            ln, le = self.excess(point)
            if ln is None and le is None:
                continue
            out.append((point, shorten(self._row(ln, le), 38)))
        return tuple(out)

    def _row(self, ln: float | None, le: float | None) -> str:
        over = max((value for value in (ln, le) if value is not None), default=0.0)
        slack = self.slack(self.flat)
        if over == inf:
            return "reads open"
        if over > slack and self.line_per_m is not None:
            rate = 2 * self.line_per_m if ln is not None else self.line_per_m + (self.cpc_per_m or self.line_per_m)
            base = ln if ln is not None else over
            return f"spur, about {max(base, 0.0) / rate:.1f} m"
        if ln is not None and ln < -slack:
            return "low: climbs from the board?"
        return "on the ring"


def gather(job: Job, circuit_id: str, stage: str) -> Evidence:
    """The evidence of one circuit; KeyError where the job has no such circuit."""
    circuit = job.circuit(circuit_id)
    points = [point for point in job.points_of(circuit_id) if point.behind is None]
    values: dict[tuple[str | None, str], float] = {}
    for (owner, point, test, at), reading in job.counted().items():
        if owner != circuit_id or at != stage:
            continue
        if reading.sign in ("open", ">") and TEST_IS_OHM.get(test, False):
            values[(point, test)] = inf
        elif reading.value is not None:
            values[(point, test)] = reading.value
    kind = cable(circuit.cable) if circuit.cable else None
    usable = kind is not None and kind.cpc_mm2 is not None
    ze = job.counted_at(circuit.board, "ze")
    names = {point.id: shorten(point.name or point.id, 15) for point in points}

    def at_points(test: str) -> dict[str, float]:
        return {point.id: values[(point.id, test)] for point in points if (point.id, test) in values}

    return Evidence(
        circuit_id=circuit_id,
        names=names,
        trunk=tuple(point.id for point in points if point.spur_from is None),
        spurs=tuple(point.id for point in points if point.spur_from is not None),
        parents={point.id: point.spur_from for point in points if point.spur_from is not None},
        ordered=all(point.walk_order is not None for point in points if point.spur_from is None),
        r1=values.get((None, "r1")),
        rn=values.get((None, "rn")),
        r2=values.get((None, "r2")),
        ln=at_points("ln_cross"),
        le=at_points("le_cross"),
        r1_r2=at_points("r1_r2"),
        r1_rn=at_points("r1_rn"),
        zs=at_points("zs"),
        ze=ze.value if ze is not None else None,
        line_per_m=r_ohm_per_m(kind.line_mm2).value if usable and kind is not None else None,
        cpc_per_m=r_ohm_per_m(kind.cpc_mm2 or 1.0).value if usable and kind is not None else None,
        walked=frozenset(point.id for point in points if point.walk_order is not None),
        no_trip=_no_trip(job, circuit_id, stage),
        unsteady=_unsteady(job, circuit_id, stage),
        label=circuit.label_claims,
        counts=(circuit.line_ends, circuit.neutral_ends, circuit.cpc_ends),
        legs=_answer(job, circuit_id, "legs", stage),
        at_board={test: values[(None, test)] for test in AT_BOARD if (None, test) in values},
    )


AT_BOARD = ("ir_ln", "ir_le", "ir_ne", "ir_live_e", "ir_neutrals", "cpc_to_met")
"""Tests of the whole circuit, beside r1, rn and r2, that say what it is."""

UNSTEADY_OHM = 0.06
"""Two readings of one thing further apart than this are unsteady [ohm]; twice what contacts scatter."""


def _answer(job: Job, circuit_id: str, test: str, stage: str) -> str:
    found = job.counted().get((circuit_id, None, test, stage))
    return found.answer or "" if found is not None else ""


def _no_trip(job: Job, circuit_id: str, stage: str) -> frozenset[str]:
    return frozenset(
        point
        for (owner, point, test, at), reading in job.counted().items()
        if (owner, test, at) == (circuit_id, "zs", stage) and reading.mode == "no_trip" and point is not None
    )


def _unsteady(job: Job, circuit_id: str, stage: str) -> frozenset[str]:
    """Points where one dead test was read twice, neither taking the other's place, and the two disagree."""
    read: dict[tuple[str, str], list[float]] = {}
    for reading in job.standing():
        if reading.circuit == circuit_id and reading.stage == stage and reading.point and reading.counts:
            value = inf if reading.sign in ("open", ">") else reading.value
            if reading.test in TEST_IS_OHM and value is not None:
                read.setdefault((reading.point, reading.test), []).append(value)
    return frozenset(
        point
        for (point, _), values in read.items()
        if len(values) > 1 and max(values) - min(values) > UNSTEADY_OHM + 0.04 * min(values)
    )


TEST_IS_OHM = dict.fromkeys(("r1", "rn", "r2", "ln_cross", "le_cross", "r1_r2", "r1_rn", "zs", "cpc_to_met"), True)
"""Tests in which over range means open."""
