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

__all__ = ["CROSSED", "ONE", "SAME", "TWO", "Specs", "Thetas", "predict", "width"]

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


def predict(frame: Frame, specs: Specs, standard: Thetas) -> Array:
    """Every reading [ohm] for each explanation and each set of standardised parameters.

    ``standard`` is (explanations, sets, parameters); the answer (explanations, sets, readings). Infinite where it
    reads open.
    """
    theta = specs.mean[:, None, :] + specs.spread[:, None, :] * standard
    total = np.exp(theta[..., LOG_T])
    x, middles = _places(frame, theta, total)
    spur = np.zeros_like(x)
    if specs.spurs:
        tail = theta[..., theta.shape[-1] - len(specs.spurs) :]
        spur[..., list(specs.spurs)] = tail
    linked = specs.link[:, 0] >= 0
    if linked.any():
        x, spur, total, middles = _bridge(frame, specs, theta, x, spur, total, middles)
    near, far, ends = _conductors(specs, theta, x, middles, total)
    out = np.empty((*x.shape[:2], 3 + 5 * frame.count))
    out[..., :3] = ends + theta[..., ZERO, None]
    count = frame.count
    ratio, neutral = np.exp(theta[..., RATIO, None]), np.exp(theta[..., NEUTRAL, None])
    zero = (theta[..., ZERO] + theta[..., ZERO_POINTS])[..., None]
    with np.errstate(divide="ignore"):
        out[..., 3 : 3 + count] = _crossed(near, far, 1, specs.join_ln) + spur * (1 + neutral) + zero
        out[..., 3 + count : 3 + 2 * count] = _crossed(near, far, 2, specs.join_le) + spur * (1 + ratio) + zero
        line, other, cpc = (_service(near[c], far[c], specs.off) for c in range(3))
    out[..., 3 + 2 * count : 3 + 3 * count] = line + cpc + spur * (1 + ratio) + zero
    out[..., 3 + 3 * count : 3 + 4 * count] = line + other + spur * (1 + neutral) + zero
    out[..., 3 + 4 * count :] = line + cpc + spur * (1 + ratio) + theta[..., LOOP, None]
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
