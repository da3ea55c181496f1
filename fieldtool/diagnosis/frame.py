"""The dead readings of one circuit as numbers to fit: what was read, how surely, and where each point may lie.

Order of readings everywhere: r1, rn, r2, then L-N crossed, L-E crossed, R1+R2, R1+Rn and Zs less Ze at every point.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import inf, sqrt
from statistics import median

import numpy as np
from numpy.typing import NDArray

from fieldtool.diagnosis.evidence import Evidence

__all__ = ["BLOCKS", "Array", "Frame", "frame_of"]

Array = NDArray[np.float64]

BLOCKS = ("ln_cross", "le_cross", "r1_r2", "r1_rn", "zs")
"""Tests taken at points, in the order of the readings."""

NO_TRIP_OHM = 0.06
"""Spread of no-trip loop readings from one another [ohm]; what they share can be far more; our assumption."""

SCATTER_OHM = 0.012
"""Contacts and clips between two readings of one thing [ohm], standard deviation; our assumption."""

MOST_SCATTER_OHM = 0.03
"""Scatter that is still only scatter [ohm]; common practice makes nothing of ±0.03."""

SHARE = 0.005
"""Part of a reading by which one reading differs from the next beyond scatter [-]; our assumption."""

COPPER_2_5 = 0.00741
"""Line of a ring where the cable is not known [ohm/m]; IEC 60228 maximum of 2.5 mm²."""

THROUGH_A_LOAD_OHM = 5.0
"""Above this a low-resistance reading of a socket circuit is no copper: open, or through something left in."""


@dataclass(frozen=True, slots=True)
class Frame:
    """Readings ``y`` [ohm] with their spread ``sigma``; ``seen`` marks those taken, ``gone`` those that read open.

    ``chain`` are the points whose order is known (indices of ``points``), ``free`` those without, ``copies`` pairs
    (point, parent) for points seen to hang on another.
    """

    points: tuple[str, ...]
    chain: tuple[int, ...]
    free: tuple[int, ...]
    copies: tuple[tuple[int, int], ...]
    y: Array
    sigma: Array
    seen: NDArray[np.bool_]
    gone: NDArray[np.bool_]
    live: NDArray[np.bool_]
    scatter: float
    line_per_m: float
    ratio: float
    ratio_known: bool

    @property
    def count(self) -> int:
        """Number of points."""
        return len(self.points)

    @property
    def taken(self) -> tuple[bool, ...]:
        """Which tests at points have readings to fit."""
        blocks = self.seen[3:].reshape(5, self.count)
        return tuple(bool(block.any()) for block in blocks)

    def slot(self, test: str, point: int = 0) -> int:
        """Index of a reading in ``y``."""
        if test in ("r1", "rn", "r2"):
            return ("r1", "rn", "r2").index(test)
        return 3 + BLOCKS.index(test) * self.count + point

    def cell(self, slot: int) -> tuple[str, str]:
        """Test and point of a reading; the point is empty for an end-to-end reading."""
        if slot < 3:
            return ("r1", "rn", "r2")[slot], ""
        block, point = divmod(slot - 3, self.count)
        return BLOCKS[block], self.points[point]

    def weights(self) -> tuple[Array, Array]:
        """Share of line and of the other conductor that a spur adds to each reading [-], without the cable."""
        count = self.count
        one, cpc = np.zeros((5, count)), np.zeros((5, count))
        one[[0, 3]] = 2.0
        one[[1, 2, 4]] = cpc[[1, 2, 4]] = 1.0
        none = np.zeros(3)
        return np.concatenate((none, one.ravel())), np.concatenate((none, cpc.ravel()))

    def with_loop(self) -> Frame:
        """The same with the loop readings among those to fit."""
        return replace(self, seen=self.seen | self.live)


def frame_of(evidence: Evidence) -> Frame:
    """The frame of the evidence gathered."""
    points = (*evidence.trunk, *evidence.spurs)
    index = {point: number for number, point in enumerate(points)}
    chain = tuple(index[point] for point in evidence.trunk if point in evidence.walked)
    free = [index[point] for point in evidence.trunk if point not in evidence.walked]
    copies = []
    for point in evidence.spurs:
        root = evidence.root(point)
        if root in index and root not in evidence.spurs:
            copies.append((index[point], index[root]))
        else:
            free.append(index[point])
    values: list[float | None] = [evidence.r1, evidence.rn, evidence.r2]
    for of in (evidence.ln, evidence.le, _in_service(evidence), evidence.r1_rn):
        values += [of.get(point) for point in points]
    seen = np.array([value is not None for value in values])
    through = np.array([value is not None and value > THROUGH_A_LOAD_OHM for value in values])
    loop, loop_sigma, live = _loops(evidence, points)
    y = np.array([value if value is not None and value < inf else 0.0 for value in values])
    scatter = _scatter(evidence)
    sigma = np.sqrt(scatter**2 + (0.01**2) / 12 + (SHARE * np.minimum(y, THROUGH_A_LOAD_OHM)) ** 2)
    line = evidence.line_per_m or COPPER_2_5
    known = evidence.line_per_m is not None and evidence.cpc_per_m is not None
    ratio = evidence.cpc_per_m / line if known and evidence.cpc_per_m is not None else 1.63
    return Frame(
        points,
        chain,
        tuple(free),
        tuple(copies),
        np.concatenate((np.where(through, 0.0, y), loop)),
        np.concatenate((sigma, loop_sigma)),
        np.concatenate((seen, np.zeros_like(live))),
        np.concatenate((seen & through, np.zeros_like(live))),
        np.concatenate((np.zeros_like(seen), live)),
        scatter,
        line,
        ratio,
        known,
    )


def _loops(evidence: Evidence, points: tuple[str, ...]) -> tuple[Array, Array, NDArray[np.bool_]]:
    """Zs less Ze at every point, its spread, and where both were read; a far higher loop is no matter of lengths."""
    values, spread, live = [], [], []
    for point in points:
        zs = evidence.zs.get(point)
        good = zs is not None and evidence.ze is not None and zs < evidence.ze + THROUGH_A_LOAD_OHM
        values.append(zs - evidence.ze if good and zs is not None and evidence.ze is not None else 0.0)
        base = NO_TRIP_OHM if point in evidence.no_trip else 0.02
        spread.append(sqrt(base**2 + (0.015 * (zs if zs is not None and good else 1.0)) ** 2))
        live.append(good)
    return np.array(values), np.array(spread), np.array(live, dtype=np.bool_)


def _in_service(evidence: Evidence) -> dict[str, float]:
    """R1+R2 as read, left out where they are the L-E crossed readings written down a second time."""
    both = [point for point in evidence.r1_r2 if point in evidence.le]
    if len(both) >= 3:
        apart = [abs(evidence.r1_r2[point] - evidence.le[point]) for point in both if evidence.le[point] < inf]
        if len(apart) == len(both) and max(apart) < 0.02:
            return {}
    return evidence.r1_r2


def _scatter(evidence: Evidence) -> float:
    """Scatter of this meter and these contacts [ohm], from the flat part of L-N crossed, never under our own figure.

    Only the lower half is looked at: spurs and joints lift readings, nothing lowers them.
    """
    values = sorted(value for point, value in evidence.ln.items() if value < inf and point in evidence.trunk)
    if len(values) < 5 or not evidence.ends:
        return SCATTER_OHM
    middle = median(values)
    if abs(middle - evidence.flat) > 0.1 * evidence.flat + 0.02:
        return SCATTER_OHM
    below = [middle - value for value in values if value <= middle]
    own = sqrt(sum(value**2 for value in below) / len(below))
    if own > MOST_SCATTER_OHM * 1.3:
        return SCATTER_OHM
    # Our own figure counts as six readings.
    mixed = sqrt((6 * SCATTER_OHM**2 + len(below) * own**2) / (6 + len(below)))
    return min(MOST_SCATTER_OHM, max(SCATTER_OHM, mixed))
