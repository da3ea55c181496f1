"""Explanations of the dead readings as data: what each changes in a ring, and how common we take it to be."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from math import inf, log

import numpy as np

from fieldtool.diagnosis.chain import (
    CROSSED,
    FIXED,
    GAP_SPREAD,
    JOINT,
    LINK,
    LOG_T,
    LOOP,
    NEUTRAL,
    ONE,
    PART,
    RATIO,
    SAME,
    TWO,
    ZERO,
    ZERO_POINTS,
    Specs,
    width,
)
from fieldtool.diagnosis.evidence import Evidence
from fieldtool.diagnosis.frame import Array, Frame

__all__ = ["COMMON", "SPUR", "Shape", "gap_ways", "opens", "simple", "specs_of", "start_of"]

CONDUCTORS = ("line", "neutral", "cpc")

COMMON: dict[str, float] = {
    "intact_ring": 0.0,
    "ends_joined_wrongly": -4.0,
    "one_join_left_off": -4.5,
    "leads_not_nulled": -5.0,
    "open": -4.5,
    "joint": -4.5,
    "size": -5.5,
    "mixed_sizes": -7.0,
    "bridged_ring": -6.0,
    "worn_contact": -5.0,
    "one_reading_off": -6.5,
    "leg_not_connected": -5.0,
    "end_slip": -2.0,
    "nothing_fits": -5.0,
}
"""How common each explanation is taken to be: natural logarithm against a sound ring; our assumption."""

SPUR = -3.5
"""The same for each spur; this is what keeps a sound ring from being given short spurs."""

FREE_SPREAD = 1.6
"""Spread of a free point's place: the logit of its share of the ring, so that any place is about as likely."""

RATIOS = {"1.0": 1.0, "1.5/1.0": 1.496, "2.5/1.5": 1.633, "2.5/1.0": 2.443, "4/1.5": 2.625}
"""r2/r1 of usual cables; IEC 60228 maxima."""


@dataclass(frozen=True, slots=True)
class Shape:
    """One explanation: its id, how common, and what it changes."""

    id: str
    prior: float
    open_run: tuple[int, int, int] = (-1, -1, -1)
    joint_run: int = -1
    joint_of: int = -1
    link: tuple[int, int] = (-1, -1)
    join_ln: int = CROSSED
    join_le: int = CROSSED
    off: int = 0
    mixed: int = -1
    leads: str = ""
    loop: bool = False
    other_way: int = 0
    ratio: float | None = None
    spurs: frozenset[int] = frozenset()
    hidden: frozenset[int] = frozenset()

    def with_spurs(self, spurs: frozenset[int]) -> Shape:
        """The same with these points on spurs."""
        return replace(self, spurs=spurs)


def simple(frame: Frame, evidence: Evidence) -> Iterator[Shape]:
    """A sound ring, the slips of the test, joints, other sizes, a leg left off."""
    yield Shape("intact_ring", COMMON["intact_ring"])
    if evidence.r1_r2:
        # The same ring begun from the second likeliest places: only the better of the two is kept.
        yield Shape("intact_ring", COMMON["intact_ring"], other_way=1)
    if evidence.ln:
        yield Shape("ends_joined_wrongly", COMMON["ends_joined_wrongly"], join_ln=SAME)
        yield Shape("one_join_left_off", COMMON["one_join_left_off"], join_ln=ONE)
    if evidence.le:
        yield Shape("ends_joined_wrongly", COMMON["ends_joined_wrongly"], join_le=SAME)
        yield from (Shape("one_join_left_off", COMMON["one_join_left_off"], join_le=one) for one in (ONE, TWO))
    if evidence.ln and evidence.le:
        yield Shape("ends_joined_wrongly", COMMON["ends_joined_wrongly"] - 1, join_ln=SAME, join_le=SAME)
        for one in (ONE, TWO):
            yield Shape("one_join_left_off", COMMON["one_join_left_off"] - 1, join_ln=ONE, join_le=one)
    for leads in ("all", "points", "ends"):
        yield Shape("leads_not_nulled", COMMON["leads_not_nulled"] - (leads == "ends"), leads=leads)
    if evidence.r1_r2 or evidence.r1_rn:
        yield from (Shape("leg_not_connected", COMMON["leg_not_connected"], off=leg) for leg in (1, 2))
    yield from _cpc_sizes(frame, evidence)
    yield from _joints(frame, evidence)


def _cpc_sizes(frame: Frame, evidence: Evidence) -> Iterator[Shape]:
    if not frame.ratio_known:
        return
    for ratio in RATIOS.values():
        if abs(ratio / frame.ratio - 1) > 0.06:
            yield Shape("size_cpc", COMMON["size"], ratio=ratio)
    read = evidence.r1 is not None and evidence.r2 is not None and evidence.ends
    if read and evidence.r1 and evidence.r2 and abs(log(evidence.r2 / evidence.r1 / frame.ratio)) > 0.04:
        runs = range(0, len(frame.chain) + 1, max(1, len(frame.chain) // 4))
        yield from (Shape("mixed_sizes", COMMON["mixed_sizes"] - log(len(runs)), mixed=run) for run in runs)


def _joints(frame: Frame, evidence: Evidence) -> Iterator[Shape]:
    runs = len(frame.chain) + 1
    for conductor, size in enumerate(joint_sizes(frame, evidence)):
        if size is not None and size > 0.04:
            for run in range(runs):
                yield Shape(
                    f"joint_{CONDUCTORS[conductor]}", COMMON["joint"] - log(runs), joint_run=run, joint_of=conductor
                )


def joint_sizes(frame: Frame, evidence: Evidence) -> tuple[float | None, float | None, float | None]:
    """What a joint in each conductor would have to be [ohm]; None where that was not read."""
    r1, rn, r2 = (None if value in (None, inf) else value for value in (evidence.r1, evidence.rn, evidence.r2))
    line = None if r1 is None or rn is None else r1 - rn
    cpc = (
        None
        if r2 is None or (r1 is None and rn is None)
        else r2 - frame.ratio * min(value for value in (r1, rn) if value is not None)
    )
    return line, None if line is None else -line, cpc


def opens(frame: Frame, evidence: Evidence) -> list[Shape]:
    """Breaks in the conductors that read open end to end, and in those that were not read, run by run."""
    runs = len(frame.chain) + 1
    three = (evidence.r1, evidence.rn, evidence.r2)
    broken = [number for number, value in enumerate(three) if value == inf]
    if len(broken) == 1:
        return [_opened(broken, (run,), runs) for run in range(runs)]
    if len(broken) == 2:
        return [_opened(broken, (a, b), runs) for a in range(runs) for b in range(runs)]
    if not broken and any(value is None for value in three):
        unread = [number for number, value in enumerate(three) if value is None]
        return [_opened([number], (run,), runs) for number in unread for run in range(runs)]
    return []


def _opened(conductors: Sequence[int], where: Sequence[int], runs: int) -> Shape:
    run = [-1, -1, -1]
    for conductor, place in zip(conductors, where, strict=True):
        run[conductor] = place
    name = f"open_{CONDUCTORS[conductors[0]]}" if len(conductors) == 1 else "open_several"
    return Shape(name, COMMON["open"] - len(conductors) * log(runs), open_run=(run[0], run[1], run[2]))


def specs_of(frame: Frame, shapes: Sequence[Shape]) -> Specs:
    """The shapes as rows of one table of parameters."""
    spurs = tuple(sorted(set().union(*(shape.spurs for shape in shapes))))
    wide = width(frame, len(spurs))
    rows = len(shapes)
    mean, spread = np.zeros((rows, wide)), np.zeros((rows, wide))
    mean[:, LOG_T], spread[:, LOG_T] = log(55.0 * frame.line_per_m), 0.6
    mean[:, RATIO], spread[:, RATIO] = log(frame.ratio), 0.02 if frame.ratio_known else 0.35
    spread[:, NEUTRAL] = 0.008
    spread[:, ZERO], spread[:, ZERO_POINTS] = 0.006, 0.004
    mean[:, JOINT], spread[:, JOINT] = log(0.35), 1.0
    mean[:, LINK], spread[:, LINK] = log(5.0 * frame.line_per_m), 0.8
    spread[:, LOOP] = 0.008
    mean[:, PART], spread[:, PART] = log(1.6), 0.4
    runs = len(frame.chain) + 1
    spread[:, FIXED : FIXED + runs] = GAP_SPREAD
    spread[:, FIXED + runs : FIXED + runs + len(frame.free)] = FREE_SPREAD
    first = FIXED + runs + len(frame.free)
    for row, shape in enumerate(shapes):
        if shape.ratio is not None:
            mean[row, RATIO] = log(shape.ratio)
        if shape.loop:
            mean[row, LOOP] = spread[row, LOOP] = 0.5
        if shape.leads:
            spread[row, ZERO if shape.leads != "points" else ZERO_POINTS] = 0.2
            if shape.leads == "ends":
                spread[row, ZERO_POINTS] = 0.2
        for column, point in enumerate(spurs):
            if point in shape.spurs:
                mean[row, first + column] = spread[row, first + column] = 4.0 * frame.line_per_m
    return Specs(
        np.array([shape.open_run for shape in shapes]),
        np.array([shape.joint_run for shape in shapes]),
        np.array([shape.joint_of for shape in shapes]),
        np.array([shape.link for shape in shapes]),
        np.array([shape.join_ln for shape in shapes]),
        np.array([shape.join_le for shape in shapes]),
        np.array([shape.off for shape in shapes]),
        np.array([shape.mixed for shape in shapes]),
        spurs,
        mean,
        spread,
    )


def start_of(frame: Frame, evidence: Evidence, shapes: Sequence[Shape], specs: Specs) -> Array:
    """Where each fit begins: length from step 1, places from R1+R2 where read, joints from what is left over."""
    rows, wide = specs.mean.shape
    at = np.zeros((rows, wide))
    crossed = [value for value in evidence.ln.values() if 0 < value < inf]
    total = _total(frame, evidence)
    at[:, LOG_T] = np.clip((log(max(total, 1e-3)) - specs.mean[:, LOG_T]) / specs.spread[:, LOG_T], -4, 4)
    r2 = evidence.r2
    if r2 is not None and 0 < r2 < inf and not frame.ratio_known:
        at[:, RATIO] = np.clip((log(r2 / total) - specs.mean[:, RATIO]) / specs.spread[:, RATIO], -3, 3)
    sizes = joint_sizes(frame, evidence)
    share = _share(frame, evidence, total)
    ways = gap_ways(frame, evidence)
    for row, shape in enumerate(shapes):
        if len(ways) > shape.other_way:
            at[row, FIXED : FIXED + len(frame.chain) + 1] = ways[shape.other_way]
    first = FIXED + len(frame.chain) + 1
    for column, point in enumerate(frame.free):
        # Half way round is where a reading says least of the place: begin beside it.
        x = 0.3 if np.isnan(share[point]) else 0.5 - float(np.sqrt(np.clip(0.25 - share[point], 0.0004, 0.24)))
        at[:, first + column] = log(x / (1 - x)) / FREE_SPREAD
    for row, shape in enumerate(shapes):
        size = sizes[shape.joint_of] if shape.joint_run >= 0 else None
        if size is not None:
            at[row, JOINT] = np.clip(log(max(size, 0.02)) - specs.mean[row, JOINT], -3, 3)
        if shape.leads in ("all", "points"):
            over = [value - total / 2 for value in crossed]
            if over and shape.leads == "points":
                at[row, ZERO_POINTS] = np.clip(float(np.median(over)) / 0.2, -1, 3)
    return at


def _total(frame: Frame, evidence: Evidence) -> float:
    """Line of the ring end to end, as well as the readings tell before any fit [ohm]."""
    ends = [value for value in (evidence.r1, evidence.rn) if value is not None and 0 < value < inf]
    crossed = [value for value in evidence.ln.values() if 0 < value < inf]
    if not ends and evidence.r2 is not None and 0 < evidence.r2 < inf:
        ends = [evidence.r2 / frame.ratio]
    return min(ends) if ends else 2 * float(np.median(crossed)) if crossed else 55.0 * frame.line_per_m


def _share(frame: Frame, evidence: Evidence, total: float) -> Array:
    """R1+R2 in service of every point as x(1-x) of the loop, from dead readings or Zs less Ze; NaN where not read."""
    out = np.full(frame.count, np.nan)
    flat = float(np.median([value for value in evidence.ln.values() if value < inf] or [inf]))
    for number, point in enumerate(frame.points):
        value = evidence.r1_r2.get(point)
        slot = frame.slot("zs", number)
        if value is None and frame.seen[slot]:
            value = float(frame.y[slot])
        if value is not None and value < inf:
            # What lifts L-N crossed at a point is its spur, or a link's doing, and no place on the ring.
            lifted = evidence.ln.get(point, flat) - flat
            if 0.03 < lifted < inf:
                value -= lifted * (1 + frame.ratio) / 2
            out[number] = max(value, 0.0) / ((1 + frame.ratio) * total)
    return out


def gap_ways(frame: Frame, evidence: Evidence) -> list[Array]:
    """Standardised lengths of the runs from R1+R2 in service, rising to the middle of the ring and then falling.

    Which points lie before the middle no reading says of one alone: the two likeliest ways to part them.
    """
    mine = _share(frame, evidence, _total(frame, evidence))[list(frame.chain)]
    if len(mine) < 3 or np.isnan(mine).any():
        return []
    half = np.clip(0.5 - np.sqrt(np.clip(0.25 - mine, 0.0, 0.25)), 0.005, 0.495)
    ways: list[tuple[float, Array]] = []
    for before in range(len(mine) + 1):
        x = np.concatenate(([0.0], half[:before], 1 - half[before:], [1.0]))
        step = np.diff(x)
        back = float((np.minimum(step, 0.0) ** 2).sum()) / 0.02**2
        gaps = np.log(np.maximum(np.diff(np.maximum.accumulate(x)), 0.004))
        lengths = (gaps - gaps.mean()) / GAP_SPREAD
        ways.append((back + float((lengths**2).sum()), np.clip(lengths, -2.5, 2.5)))
    ways.sort(key=lambda way: way[0])
    return [way for cost, way in ways[:2] if cost < ways[0][0] + 12.0]
