"""A link across the ring: every pair of points, each fit begun from the physics, the best refined.

Inside a link the ring reads like a row of spurs of y(M-y)/(M+link) each (delta-star), which is both the formula and
the reason why a link and a few spurs can read alike.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from math import log
from typing import TYPE_CHECKING, Any

import numpy as np

from fieldtool.diagnosis.chain import FIXED, GAP_SPREAD, LINK, LOG_T, Specs, predict
from fieldtool.diagnosis.evidence import Evidence
from fieldtool.diagnosis.frame import Array, Frame
from fieldtool.diagnosis.shapes import COMMON, Shape, gap_ways, specs_of

if TYPE_CHECKING:
    from fieldtool.diagnosis.search import Fitted

__all__ = ["bridges"]

BEGUN, REFINED = 20, 5
"""How many pairs are fitted at all, and how many to the end."""

Fitter = Callable[..., "list[Fitted]"]


def bridges(frame: Frame, evidence: Evidence, best: Fitted, excess: Array, fitted: Fitter) -> list[Fitted]:
    """The links that come nearest to the readings, fitted.

    ``best`` is the ring with the spurs that it would have instead; ``excess`` how far each point of the chain lies
    off that ring [ohm of line].
    """
    ring = best.shape
    pairs = [(a, b) for a in range(len(frame.chain)) for b in range(a + 2, len(frame.chain))]
    prior = COMMON["bridged_ring"] - log(max(1, len(pairs)))
    usual = float(excess.mean())
    pairs = [(a, b) for a, b in pairs if excess[a + 1 : b].mean() > usual]
    if not pairs:
        return []
    shapes = [
        replace(ring, id="bridged_ring", prior=prior, link=pair, spurs=best.shape.spurs - _inside(frame, pair))
        for pair in pairs
    ]
    start = _start(frame, evidence, best, excess, shapes)
    near = _nearest(frame, shapes, start)
    shapes = [shapes[row] for row in near]
    first = fitted(frame, evidence, shapes, steps=3, start=_start(frame, evidence, best, excess, shapes))
    order = sorted(range(len(first)), key=lambda row: -first[row].score)[:REFINED]
    kept = [shapes[row] for row in order]
    return fitted(frame, evidence, kept, steps=6, start=_again(frame, kept, [first[row] for row in order]))


def _nearest(frame: Frame, shapes: Sequence[Shape], start: Array) -> list[int]:
    """The pairs whose start, from the physics alone, lies nearest to the readings."""
    if len(shapes) <= BEGUN:
        return list(range(len(shapes)))
    shown = predict(frame, specs_of(frame, shapes), start[:, None, :])[:, 0]
    left = np.where(frame.seen & ~frame.gone & np.isfinite(shown), (frame.y - shown) / frame.sigma, 0.0)
    cost = np.minimum(left**2, 30.0).sum(axis=1) - 2 * np.array(
        [shape.prior - 3.5 * len(shape.spurs) for shape in shapes]
    )
    return [int(row) for row in cost.argsort(kind="stable")[:BEGUN]]


def _inside(frame: Frame, pair: tuple[int, int]) -> frozenset[int]:
    return frozenset(frame.chain[pair[0] + 1 : pair[1]])


def _start(frame: Frame, evidence: Evidence, best: Fitted, excess: Array, shapes: Sequence[Shape]) -> Array:
    """Places and lengths that turn the spurs seen inside each link into what the link itself would do."""
    specs = specs_of(frame, shapes)
    at = np.zeros_like(specs.mean)
    total = float(np.exp(best.theta[LOG_T]))
    runs = len(frame.chain) + 1
    ways = gap_ways(frame, evidence) if evidence.r1_r2 else []
    way = best.shape.other_way
    gaps = np.exp(GAP_SPREAD * ways[way] if len(ways) > way else best.theta[FIXED : FIXED + runs])
    gaps = gaps / gaps.sum() * total
    x = np.cumsum(gaps)[:-1]
    for row, shape in enumerate(shapes):
        _one_start(frame, specs, at, row, shape, x, excess, total)
        _keep_spurs(specs, at, row, shape, best)
    return at


def _one_start(
    frame: Frame, specs: Specs, at: Array, row: int, shape: Shape, x: Array, excess: Array, total: float
) -> None:
    a, b = shape.link
    inside = excess[a + 1 : b]
    most = float(inside.max()) * 1.1 + 1e-4
    link = 5.0 * frame.line_per_m
    length = 2 * most + 2 * float(np.sqrt(most**2 + most * link))
    short = length * link / (length + link)
    peak = int(inside.argmax())
    root = np.sqrt(np.clip(length**2 / 4 - inside * (length + link), 0.0, None))
    y = np.where(np.arange(len(inside)) <= peak, length / 2 - root, length / 2 + root)
    y = np.clip(np.maximum.accumulate(y), 0.03 * length, 0.97 * length)
    y += np.linspace(-0.01, 0.01, len(y)) * length
    begin = min(float(x[a]), max(total - short - 0.02 * total, 0.02 * total))
    places = np.empty(len(x))
    places[: a + 1] = x[: a + 1] * begin / max(float(x[a]), 1e-6)
    places[a + 1 : b] = begin + y
    rest = total - begin - short
    old = total - float(x[b])
    tail = (x[b:] - float(x[b])) * (min(old, rest) / max(old, 1e-6))
    places[b:] = begin + length + tail
    whole = total - short + length
    gaps = np.maximum(np.diff(np.concatenate(([0.0], places, [whole]))), 0.004 * whole)
    runs = len(gaps)
    at[row, LOG_T] = (log(whole) - specs.mean[row, LOG_T]) / specs.spread[row, LOG_T]
    at[row, FIXED : FIXED + runs] = np.clip((np.log(gaps) - np.log(gaps).mean()) / GAP_SPREAD, -2.5, 2.5)
    at[row, LINK] = (log(link) - specs.mean[row, LINK]) / specs.spread[row, LINK]


def _keep_spurs(specs: Specs, at: Array, row: int, shape: Shape, best: Fitted) -> None:
    first = specs.mean.shape[1] - len(specs.spurs)
    for column, point in enumerate(specs.spurs):
        if point in shape.spurs:
            value = best.spur_ohm(point)[0]
            at[row, first + column] = (value - specs.mean[row, first + column]) / specs.spread[row, first + column]


def _again(frame: Frame, shapes: Sequence[Shape], items: Sequence[Any]) -> Array:
    """Go on from where the first step ended."""
    specs = specs_of(frame, shapes)
    first = specs.mean.shape[1] - len(specs.spurs)
    at = np.zeros_like(specs.mean)
    for row, (shape, item) in enumerate(zip(shapes, items, strict=True)):
        at[row, :first] = np.where(
            specs.spread[row, :first] > 0,
            (item.theta[:first] - specs.mean[row, :first])
            / np.where(specs.spread[row, :first] > 0, specs.spread[row, :first], 1.0),
            0.0,
        )
        _keep_spurs(specs, at, row, shape, item)
    return at
