"""What every dead reading of a ring would be, for many explanations at once.

A ring is a chain, so each reading is closed form: crossed at a point are two paths in parallel, PQ/(P+Q). A link
across the ring is, exactly, a shorter ring with a row of spurs (delta-star transformation; Kennelly 1899).
Held equal to the nodal solution of ``fieldtool.network`` by a test.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from fieldtool.diagnosis.frame import Array, Frame

__all__ = ["CROSSED", "ONE", "SAME", "TWO", "Specs", "Thetas", "live_columns", "places_by_gaps", "predict", "width"]

CROSSED, SAME, ONE, TWO = 0, 1, 2, 3
"""How the ends were joined: as they should be, each leg to itself, only one of the two joins (either)."""

Ints = NDArray[np.int64]
Thetas = Array

GAP_SPREAD = 0.8
"""Spread of the logarithm of a run's length between neighbours [-]; our assumption."""

LOG_T, RATIO, NEUTRAL, ZERO, ZERO_POINTS, JOINT, LINK, PART, LOOP = range(9)
FIXED = 9
"""Parameters that every explanation has; gaps, free places and spurs follow."""


@dataclass(frozen=True, slots=True)
class Specs:
    """Explanations as data, one row each: breaks and joint by run of the chain (-1 for none), link by place in it.

    ``spurs`` are the points (columns) that may have a spur; ``mean`` and ``spread`` (rows x parameters) turn
    standardised parameters into physical ones.
    """

    open_run: Ints
    joint_run: Ints
    joint_of: Ints
    link: Ints
    join_ln: Ints
    join_le: Ints
    off: Ints
    mixed: Ints
    spurs: tuple[int, ...]
    mean: Array
    spread: Array

    def row(self, index: int) -> Specs:
        """One explanation alone."""
        keep = slice(index, index + 1)
        return self.rows(keep)

    def rows(self, keep: slice | Ints) -> Specs:
        """Some of the explanations."""
        return Specs(
            self.open_run[keep],
            self.joint_run[keep],
            self.joint_of[keep],
            self.link[keep],
            self.join_ln[keep],
            self.join_le[keep],
            self.off[keep],
            self.mixed[keep],
            self.spurs,
            self.mean[keep],
            self.spread[keep],
        )


def live_columns(specs: Specs) -> list[int]:
    """The parameters of a whole ring that do anything in at least one of these explanations."""
    out = [column for column in (LOG_T, RATIO, NEUTRAL, ZERO, ZERO_POINTS, LOOP) if specs.spread[:, column].any()]
    used = ((JOINT, specs.joint_run), (LINK, specs.link), (PART, specs.mixed))
    return sorted(out + [column for column, where in used if where.max() >= 0])


def places_by_gaps(frame: Frame, specs: Specs, standard: Array) -> Array:
    """How far each gap's and each free place's standardised parameter moves each point [ohm of line].

    (explanations, points, parameters of the gaps and free places).
    """
    theta = specs.mean + specs.spread * standard
    total = np.exp(theta[:, LOG_T])
    runs, count = len(frame.chain) + 1, frame.count
    out = np.zeros((len(theta), count, runs + len(frame.free)))
    gaps = np.exp(theta[:, FIXED : FIXED + runs])
    part = gaps / gaps.sum(axis=1, keepdims=True)
    reached = np.cumsum(part, axis=1)[:, :-1]
    before = np.tri(runs - 1, runs)[None]
    if frame.chain:
        out[:, list(frame.chain), :runs] = part[:, None, :] * (before - reached[:, :, None])
    for column, point in enumerate(frame.free):
        share = 1.0 / (1.0 + np.exp(-theta[:, FIXED + runs + column]))
        out[:, point, runs + column] = share * (1 - share)
    for point, parent in frame.copies:
        out[:, point] = out[:, parent]
    spread = specs.spread[:, FIXED : FIXED + runs + len(frame.free)]
    return np.asarray(out * total[:, None, None] * spread[:, None, :], dtype=np.float64)


def width(frame: Frame, spurs: int) -> int:
    """How many parameters an explanation has."""
    return FIXED + len(frame.chain) + 1 + len(frame.free) + spurs


def _places(frame: Frame, theta: Array, total: Array) -> tuple[Array, Array]:
    """Ohms of line from leg A to every point, and to the middle of every run of the chain."""
    rows, many = theta.shape[:2]
    runs = len(frame.chain) + 1
    gaps = np.exp(theta[..., FIXED : FIXED + runs])
    gaps = gaps / gaps.sum(axis=-1, keepdims=True) * total[..., None]
    ends = np.cumsum(gaps, axis=-1)
    x = np.empty((rows, many, frame.count))
    x[..., list(frame.chain)] = ends[..., :-1]
    if frame.free:
        loose = theta[..., FIXED + runs : FIXED + runs + len(frame.free)]
        x[..., list(frame.free)] = total[..., None] / (1.0 + np.exp(-loose))
    for point, parent in frame.copies:
        x[..., point] = x[..., parent]
    return x, ends - gaps / 2


def predict(
    frame: Frame, specs: Specs, standard: Thetas, nudge: tuple[Array, Array] | None = None, *, full: bool = False
) -> Array:
    """Every reading [ohm] for each explanation and each set of standardised parameters.

    ``standard`` is (explanations, sets, parameters); the answer (explanations, sets, readings). Infinite where it
    reads open. ``nudge`` moves, set by set, every point along the ring and every spur's end [ohm of line]: what that
    does to a reading is its own slope, since a reading depends on no other point's place. Tests that were not taken
    are left at zero unless ``full``.
    """
    theta = specs.mean[:, None, :] + specs.spread[:, None, :] * standard
    total = np.exp(theta[..., LOG_T])
    x, middles = _places(frame, theta, total)
    spur = np.zeros_like(x)
    if specs.spurs:
        tail = theta[..., theta.shape[-1] - len(specs.spurs) :]
        spur[..., list(specs.spurs)] = tail
    if nudge is not None:
        x = x + nudge[0][:, None]
        spur = spur + nudge[1][:, None]
    if (specs.link[:, 0] >= 0).any():
        x, spur, total, middles = _bridge(frame, specs, theta, x, spur, total, middles)
    near, far, ends = _conductors(specs, theta, x, middles, total)
    count = frame.count
    out = np.zeros((*x.shape[:2], 3 + 5 * count))
    out[..., :3] = ends + theta[..., ZERO, None]
    ratio, neutral = np.exp(theta[..., RATIO, None]), np.exp(theta[..., NEUTRAL, None])
    zero = (theta[..., ZERO] + theta[..., ZERO_POINTS])[..., None]
    with_n, with_e = spur * (1 + neutral), spur * (1 + ratio)
    taken = (True,) * 5 if full else frame.taken
    blocks = [out[..., 3 + block * count : 3 + (block + 1) * count] for block in range(5)]
    with np.errstate(divide="ignore"):
        if taken[0]:
            blocks[0][...] = _crossed(near, far, 1, specs.join_ln) + with_n + zero
        if taken[1]:
            blocks[1][...] = _crossed(near, far, 2, specs.join_le) + with_e + zero
        if any(taken[2:]):
            line = _service(near[0], far[0], specs.off)
            if taken[2] or taken[4]:
                loop = line + _service(near[2], far[2], specs.off) + with_e
                blocks[2][...] = loop + zero
                blocks[4][...] = loop + theta[..., LOOP, None]
            if taken[3]:
                blocks[3][...] = line + _service(near[1], far[1], specs.off) + with_n + zero
    return out


def _bridge(
    frame: Frame, specs: Specs, theta: Array, x: Array, spur: Array, total: Array, middles: Array
) -> tuple[Array, Array, Array, Array]:
    chain = np.array(frame.chain)
    rows = np.arange(len(x))
    linked = (specs.link[:, 0] >= 0)[:, None]
    a = np.where(linked, x[rows, :, chain[np.maximum(specs.link[:, 0], 0)]], 0.0)
    b = np.where(linked, x[rows, :, chain[np.maximum(specs.link[:, 1], 0)]], 0.0)
    length = b - a
    link = np.exp(theta[..., LINK])
    loop = length + link
    y = np.clip(x - a[..., None], 0.0, length[..., None])
    after = np.maximum(x - b[..., None], 0.0)
    before = np.minimum(x, a[..., None])
    short = before + y * (link / loop)[..., None] + after
    spur = spur + y * (length[..., None] - y) / loop[..., None]
    mid = np.clip(middles - a[..., None], 0.0, length[..., None])
    middles = np.minimum(middles, a[..., None]) + mid * (link / loop)[..., None]
    return short, spur, total - length + length * link / loop, middles


def _conductors(
    specs: Specs, theta: Array, x: Array, middles: Array, total: Array
) -> tuple[list[Array], list[Array], Array]:
    """Ohms from every point to leg A and to leg B in each conductor, and end to end; infinite across a break."""
    ratio, neutral = np.exp(theta[..., RATIO]), np.exp(theta[..., NEUTRAL])
    rows = np.arange(len(x))
    joint = np.exp(theta[..., JOINT])
    past_joint = _past(x, middles, specs.joint_run, rows)
    near: list[Array] = []
    far: list[Array] = []
    ends = np.empty((*total.shape, 3))
    for conductor, times in enumerate((np.ones_like(ratio), neutral, ratio)):
        to_a = x * times[..., None]
        whole = total * times
        if conductor == 2 and (specs.mixed >= 0).any():
            # The cpc changes size in the middle of one run: the far part has its own ratio.
            at = np.where(specs.mixed[:, None] >= 0, middles[rows, :, np.maximum(specs.mixed, 0)], total)
            more = np.exp(theta[..., PART]) - times
            to_a = to_a + np.maximum(x - at[..., None], 0.0) * more[..., None]
            whole = whole + np.maximum(total - at, 0.0) * more
        here = (specs.joint_of == conductor)[:, None]
        added = np.where(here, joint, 0.0)
        to_a = to_a + past_joint * added[..., None]
        whole = whole + added
        to_b = whole[..., None] - to_a
        run = specs.open_run[:, conductor]
        broken = (run >= 0)[:, None]
        if broken.any():
            past = _past(x, middles, run, rows)
            to_a = np.where(broken[..., None] & past, np.inf, to_a)
            to_b = np.where(broken[..., None] & ~past, np.inf, to_b)
        ends[..., conductor] = np.where(broken, np.inf, whole)
        near.append(to_a)
        far.append(to_b)
    return near, far, ends


def _past(x: Array, middles: Array, run: Ints, rows: Ints) -> NDArray[np.bool_]:
    """True for points that lie beyond the middle of a run, seen from leg A."""
    return np.asarray(x >= middles[rows, :, np.maximum(run, 0)][..., None], dtype=np.bool_)


def _crossed(near: list[Array], far: list[Array], other: int, join: Ints) -> Array:
    kind = join[:, None, None]
    same = kind == SAME
    one = near[0] + np.where(same, near[other], far[other])
    two = far[0] + np.where(same, far[other], near[other])
    first = np.where(kind == TWO, 0.0, 1.0 / one)
    second = np.where(kind == ONE, 0.0, 1.0 / two)
    return np.asarray(1.0 / (first + second), dtype=np.float64)


def _service(near: Array, far: Array, off: Ints) -> Array:
    """Board to point with the legs joined; with leg B or leg A alone where the other was never connected."""
    kind = off[:, None, None]
    first = np.where(kind == 2, 0.0, 1.0 / near)
    second = np.where(kind == 1, 0.0, 1.0 / far)
    return np.asarray(1.0 / (first + second), dtype=np.float64)
