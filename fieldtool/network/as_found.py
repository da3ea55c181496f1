"""From what was surveyed and read to a layout: the circuit as it stands, each resistance with its origin.

Traced runs come first, then what the readings imply, then the worst case, which is listed as assumed. Where the
place of a point on a ring is not known, the places named in ``worst_at`` are put at mid-ring, where R1+R2 of a
ring is greatest (x(1-x)(r1+r2), nodal analysis).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import inf, isfinite
from typing import Literal

from fieldtool.answers import CircuitReading, Missing
from fieldtool.job.circuit import Circuit, Point
from fieldtool.job.job import Job
from fieldtool.job.kinds import TESTS
from fieldtool.job.reading import Reading
from fieldtool.network.layout import BOARD, Layout, LayoutRun, Ohms, Origin
from fieldtool.reference.look import Cable, cable, r_ohm_per_m

__all__ = ["AsFound", "Shape", "as_found", "cable_ohms", "latest", "shape_of"]

Shape = Literal["ring", "radial", "unknown"]


@dataclass(frozen=True, slots=True)
class AsFound:
    """A circuit as it stands: its layout and shape, what is missing to know it, and what was assumed.

    ``unmeasured`` names points whose own cable is unknown: their loop must be read there.
    """

    layout: Layout
    shape: Shape
    known: bool
    missing: tuple[Missing, ...] = ()
    assumed: tuple[str, ...] = ()
    unmeasured: tuple[str, ...] = ()
    placed: bool = False


def latest(job: Job, circuit: str | None, point: str | None, test: str, stage: str = "as_found") -> Reading | None:
    """The reading of one cell that counts; None where there is none."""
    return job.counted().get((circuit, point, test, stage))


def cable_ohms(key: str, metres: float) -> Ohms | None:
    """Line, neutral and cpc resistance of a cable at 20 °C [ohm]; None where only measuring can tell.

    Source: IEC 60228 maxima, times the length [m].
    """
    kind: Cable = cable(key)
    if kind.measured_resistance_only or kind.cpc_mm2 is None or kind.line_mm2 is None:
        return None
    line = r_ohm_per_m(kind.line_mm2).value * metres
    return Ohms(line, line, r_ohm_per_m(kind.cpc_mm2).value * metres)


def shape_of(job: Job, circuit: Circuit, reading: CircuitReading | None = None) -> Shape:
    """The shape to judge by: shown by readings, else traced, else implied by the end-to-end readings, else claimed.

    A label alone never makes a ring pass: the rules ask for the readings that show it.
    """
    if reading is not None and reading.shown_ring:
        return "ring"
    ends = [latest(job, circuit.id, None, test) for test in ("r1", "rn", "r2")]
    if any(end is not None and end.sign == "=" for end in ends):
        return "ring"
    if all(end is not None and end.sign == "open" for end in ends):
        return "radial"
    traced = [run for run in job.runs if run.circuit == circuit.id]
    if sum(run.a == "board" or run.b == "board" for run in traced) >= 2 and _closes(job, circuit):
        return "ring"
    if circuit.label_claims != "none":
        return circuit.label_claims
    return "radial" if traced else "unknown"


def _closes(job: Job, circuit: Circuit) -> bool:
    runs = [run for run in job.runs if run.circuit == circuit.id]
    nodes = {end for run in runs for end in (run.a, run.b)}
    return len(runs) >= len(nodes)


def as_found(
    job: Job,
    circuit_id: str,
    *,
    reading: CircuitReading | None = None,
    worst_at: Sequence[str] = (),
    stage: str = "as_found",
) -> AsFound:
    """The circuit's layout as the survey and the counted readings give it. KeyError for an unknown circuit."""
    circuit = job.circuit(circuit_id)
    shape = shape_of(job, circuit, reading)
    builder = _Builder(job, circuit, reading, tuple(worst_at), stage)
    if shape == "ring":
        builder.ring()
    else:
        builder.radial()
    builder.branches()
    return builder.done(shape)


class _Builder:
    def __init__(
        self, job: Job, circuit: Circuit, reading: CircuitReading | None, worst_at: tuple[str, ...], stage: str
    ) -> None:
        self.job, self.circuit, self.reading = job, circuit, reading
        self.worst_at, self.stage = worst_at, stage
        self.points = job.points_of(circuit.id)
        self.runs: list[LayoutRun] = []
        self.missing: list[Missing] = []
        self.assumed: list[str] = []
        self.unmeasured: list[str] = []
        self.known = True
        self.placed = False
        self.ratio = self._ratio()

    def _ratio(self) -> tuple[float, float]:
        """Shares of R1+R2 that are line and cpc, by the cable found."""
        ohms = self._cable(1.0)
        if ohms is None:
            return (0.5, 0.5)
        return (ohms.line / (ohms.line + ohms.cpc), ohms.cpc / (ohms.line + ohms.cpc))

    def _cable(self, metres: float, key: str | None = None) -> Ohms | None:
        chosen = key or self.circuit.cable
        return cable_ohms(chosen, metres) if chosen else None

    def _value(self, point: str | None, test: str) -> float | None:
        found = latest(self.job, self.circuit.id, point, test, self.stage)
        if found is None or found.value is None:
            return inf if found is not None and found.sign == "open" else None
        return found.value if found.sign == "=" else None

    def _ask(self, test: str, place: str) -> None:
        spec = TESTS[test]  # type: ignore[index]
        order = 200 + list(TESTS).index(spec.key)
        name = self.job.point_name(place) if spec.where == "point" else self.circuit.name or self.circuit.id
        self.missing.append(Missing(test, place, f"{spec.words} at {name}", order))

    # ring -------------------------------------------------------------------------------------------------
    def trunk(self) -> tuple[Point, ...]:
        """Points that sit on the trunk: no spur, nothing behind a fused unit."""
        return tuple(p for p in self.points if p.spur_from is None and p.behind is None)

    def ring(self) -> None:
        trunk = self.trunk()
        chain = [BOARD, *(p.id for p in trunk), BOARD]
        totals = [self._value(None, test) for test in ("r1", "rn", "r2")]
        lengths = self._traced(chain)
        traced_total = sum(lengths) if lengths is not None else None
        known = [isinstance(total, float) and isfinite(total) for total in totals]
        if not all(known):
            for test, total in zip(("r1", "rn", "r2"), totals, strict=True):
                if total is None:
                    self._ask(test, self.circuit.id)
            by_cable = self._cable(traced_total) if traced_total is not None else None
            if by_cable is None:
                self.known = False
            spare = by_cable or Ohms(1.0, 1.0, 1.633)
            filled = (spare.line, spare.neutral, spare.cpc)
            totals = [
                total if isinstance(total, float) and isfinite(total) else fallback
                for total, fallback in zip(totals, filled, strict=True)
            ]
        shares = self._shares(chain, lengths)
        whole = Ohms(*(float(total or 0.0) for total in totals))
        origin: Origin = "traced" if lengths is not None else "assumed"
        metre = self._metres(whole)
        for number, share in enumerate(shares):
            self.runs.append(
                LayoutRun(
                    id=f"leg{number + 1}",
                    a=chain[number],
                    b=chain[number + 1],
                    ohms=whole.scaled(share),
                    cable=self.circuit.cable,
                    length_m=lengths[number] if lengths is not None else (metre * share if metre else None),
                    origin=origin,
                    on_ring=True,
                )
            )
        self.placed = lengths is not None
        if lengths is None and self.worst_at:
            names = ", ".join(self.job.point_name(p) for p in self.worst_at)
            self.assumed.append(f"place of {names} on the ring not given: taken as mid ring, the worst")

    def _metres(self, whole: Ohms) -> float | None:
        ohms = self._cable(1.0)
        return None if ohms is None else (whole.line + whole.neutral) / (ohms.line + ohms.neutral)

    def _traced(self, chain: list[str]) -> list[float] | None:
        lengths: list[float] = []
        used: set[str] = set()
        for a, b in pairwise(chain):
            run = next(
                (
                    run
                    for run in self.job.runs
                    if run.circuit == self.circuit.id and run.id not in used and {run.a, run.b} == {a, b}
                ),
                None,
            )
            if run is None or run.length_m is None:
                return None
            used.add(run.id)
            lengths.append(run.length_m)
        return lengths

    def _shares(self, chain: list[str], lengths: list[float] | None) -> list[float]:
        count = len(chain) - 1
        if lengths is not None and sum(lengths) > 0:
            return [length / sum(lengths) for length in lengths]
        places = [index / count for index in range(count + 1)]
        worst = sorted(chain.index(p) for p in self.worst_at if p in chain[1:-1])
        if worst:
            low, high = worst[0], worst[-1]
            # A pair of neighbours straddles the middle by a hair; the rest spread over what is left.
            left, right = (0.5, 0.5) if low == high else (0.5 - 1e-6, 0.5 + 1e-6)
            for index in range(count + 1):
                if index <= low:
                    places[index] = left * index / low
                elif index >= high:
                    places[index] = right + (1 - right) * (index - high) / (count - high)
                else:
                    places[index] = left + (right - left) * (index - low) / (high - low)
        return [later - earlier for earlier, later in pairwise(places)]

    # radial -----------------------------------------------------------------------------------------------
    def radial(self) -> None:
        traced = [run for run in self.job.runs if run.circuit == self.circuit.id]
        if traced:
            self._traced_tree()
            return
        trunk = [p.id for p in self.trunk()]
        before, start = 0.0, 0
        for end, point in enumerate(trunk):
            total = self._value(point, "r1_r2")
            if total is None or not isfinite(total):
                continue
            step = max(0.0, total - before) / (end - start + 1)
            self._chain(trunk, start, end, step, "measured" if end == start else "assumed")
            before, start = total, end + 1
        if start < len(trunk):
            # No reading beyond here: the last run is not known, and its loop must be read.
            self._chain(trunk, start, len(trunk) - 1, 0.0, "assumed")
            self.unmeasured.extend(trunk[start:])
            self._ask("r1_r2", trunk[-1])
            self.known = False

    def _chain(self, trunk: list[str], start: int, end: int, step: float, origin: Origin) -> None:
        line, cpc = self.ratio
        for index in range(start, end + 1):
            a = trunk[index - 1] if index else BOARD
            ohms = Ohms(step * line, step * line, step * cpc)
            metre = self._metres(ohms)
            self.runs.append(LayoutRun(f"run{index + 1}", a, trunk[index], ohms, self.circuit.cable, metre, origin))

    def _traced_tree(self) -> None:
        for run in self.job.runs:
            if run.circuit != self.circuit.id:
                continue
            ohms = self._cable(run.length_m, run.cable) if run.length_m is not None else None
            if ohms is None:
                self.known = False
                self.unmeasured.append(run.b)
                self._ask("r1_r2", run.b)
                ohms = Ohms(0.0, 0.0, 0.0)
            key = run.cable or self.circuit.cable
            self.runs.append(LayoutRun(run.id, run.a, run.b, ohms, key, run.length_m, "traced"))
        self.placed = True
        reached = {end for run in self.runs for end in (run.a, run.b)}
        for point in self.trunk():
            if point.id not in reached:
                self.unmeasured.append(point.id)
                self._ask("r1_r2", point.id)
                self.known = False

    # what hangs on the trunk --------------------------------------------------------------------------------
    def branches(self) -> None:
        """Spurs and what lies behind fused units, each hung on its parent."""
        reached = {end for run in self.runs for end in (run.a, run.b)}
        last_behind: dict[str, str] = {}
        for point in self.points:
            if point.id in reached or (point.spur_from is None and point.behind is None):
                continue
            parent = point.spur_from or last_behind.get(point.behind or "", point.behind or BOARD)
            if point.behind is not None:
                last_behind[point.behind] = point.id
            ohms, metres, origin = self._hung(point, parent)
            self.runs.append(LayoutRun(f"to_{point.id}", parent, point.id, ohms, self.circuit.cable, metres, origin))

    def _hung(self, point: Point, parent: str) -> tuple[Ohms, float | None, Origin]:
        if point.spur_length_m is not None:
            ohms = self._cable(point.spur_length_m)
            if ohms is not None:
                return ohms, point.spur_length_m, "traced"
        high = self._inferred(point.id)
        if high is not None:
            ohms = self._cable(high)
            if ohms is not None:
                self.assumed.append(f"spur to {self.job.point_name(point.id)}: {high:.1f} m, inferred, its upper edge")
                return ohms, high, "inferred"
        for test in ("r1_r2", "le_cross"):
            mine, theirs = self._value(point.id, test), self._value(parent, test)
            if mine is not None and theirs is not None and isfinite(mine) and isfinite(theirs):
                line, cpc = self.ratio
                step = max(0.0, mine - theirs)
                ohms = Ohms(step * line, step * line, step * cpc)
                return ohms, self._metres(ohms), "measured"
        self.unmeasured.append(point.id)
        self._ask("le_cross" if any(run.on_ring for run in self.runs) else "r1_r2", point.id)
        return Ohms(0.0, 0.0, 0.0), None, "assumed"

    def _inferred(self, point: str) -> float | None:
        leading = self.reading.leading if self.reading is not None else None
        for item in leading.inferred if leading is not None else ():
            if item.what == "spur_length_m" and item.place == point:
                return item.high
        return None

    def done(self, shape: Shape) -> AsFound:
        nodes = tuple(dict.fromkeys(end for run in self.runs for end in (run.a, run.b) if end != BOARD))
        fuses: dict[str, float] = {p.id: p.fuse_a or 13.0 for p in self.points if p.kind == "fcu"}
        behind: Mapping[str, str] = {p.id: p.behind for p in self.points if p.behind is not None}
        layout = Layout(
            self.circuit.id,
            nodes,
            tuple(self.runs),
            tuple(fuses.items()),
            tuple(behind.items()),
            tuple(self.assumed),
        )
        return AsFound(
            layout,
            shape,
            self.known,
            tuple(self.missing),
            tuple(self.assumed),
            tuple(dict.fromkeys(self.unmeasured)),
            self.placed,
        )
