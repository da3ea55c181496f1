"""The search: fit the simple shapes, give the best of them spurs one by one, then look at single points and links."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import log

import numpy as np

from fieldtool.diagnosis.bridge import bridges
from fieldtool.diagnosis.chain import FIXED, Specs, predict
from fieldtool.diagnosis.evidence import Evidence
from fieldtool.diagnosis.fit import Fit, fit
from fieldtool.diagnosis.frame import BLOCKS, Array, Frame
from fieldtool.diagnosis.shapes import COMMON, SPUR, Shape, gap_ways, opens, simple, specs_of, start_of

__all__ = ["Fitted", "fitted", "hidden_cost", "search"]

LEAST_SPUR_M = 0.3
"""A fitted spur shorter than this is none [m]; no accessory is that near its box, our assumption."""

LEAST_GAIN, ASK_AGAIN = 3.0, 7.0
"""Chi-squared that a spur must take away to be tried: the first, and one after another was refused."""

IN_A_ROW = 2.5
"""Standard deviations by which neighbours together must stand above the ring before a link is tried."""

NEAR = 150.0
"""Log weight within which the ring must lie of the best explanation for a link across it to be tried."""

FAR = 8.0
"""Log weight by which a ring with spurs must lead everything without before the others are given spurs too."""

KEPT = 3
"""How many kinds of explanation are given spurs."""


@dataclass(frozen=True, slots=True, eq=False)
class Fitted:
    """One shape, fitted: its log odds before comparison, its parameters, predictions and their spread."""

    shape: Shape
    score: float
    theta: Array
    spread: Array
    shown: Array
    chi2: float
    used: int
    specs: Specs

    def spur_ohm(self, point: int) -> tuple[float, float]:
        """Line of the spur at a point and its standard deviation [ohm]; zeros where it has none."""
        if point not in self.shape.spurs:
            return 0.0, 0.0
        column = len(self.theta) - len(self.specs.spurs) + self.specs.spurs.index(point)
        return float(self.theta[column]), float(self.spread[column])


def hidden_cost(frame: Frame, hidden: frozenset[int]) -> float:
    """What leaving readings out of the fit costs: each might have read anything within an ohm or so."""
    return sum(log(1.0 / (frame.sigma[slot] * 2.507)) for slot in hidden)


def fitted(
    frame: Frame, evidence: Evidence, shapes: Sequence[Shape], *, steps: int = 3, start: Array | None = None
) -> list[Fitted]:
    """The shapes fitted all at once, in the order given."""
    if not shapes:
        return []
    specs = specs_of(frame, shapes)
    at = start_of(frame, evidence, shapes, specs) if start is None else start
    hidden = np.zeros((len(shapes), len(frame.y)), dtype=np.bool_)
    for row, shape in enumerate(shapes):
        hidden[row, list(shape.hidden)] = True
    found = fit(frame, specs, at, hidden, steps)
    return [_one(frame, specs, found, shapes[row], row) for row in range(len(shapes))]


def _one(frame: Frame, specs: Specs, found: Fit, shape: Shape, row: int) -> Fitted:
    spread = specs.spread[row]
    theta = specs.mean[row] + spread * found.standard[row]
    with np.errstate(invalid="ignore"):
        sd = spread * np.sqrt(np.maximum(np.diagonal(np.linalg.inv(found.curvature[row])), 0.0))
    score = float(found.evidence[row]) + shape.prior + SPUR * len(shape.spurs) - hidden_cost(frame, shape.hidden)
    return Fitted(
        shape, score, theta, sd, found.shown[row], float(found.chi2[row]), int(found.used[row].sum()), specs.row(row)
    )


def search(frame: Frame, evidence: Evidence) -> list[Fitted]:
    """Every shape worth comparing, fitted, best first."""
    shapes = [*simple(frame, evidence), *_likely_opens(frame, evidence)]
    first = sorted(fitted(frame, evidence, shapes), key=lambda item: -item.score)
    rings = [item for item in first if item.shape.id == "intact_ring"]
    more = _spurs(frame, evidence, rings[:1])
    if _settled(frame, rings[0], first[0], more):
        first = [item for item in first if item not in rings[1:]]
        rings = rings[:1]
    else:
        more += _spurs(frame, evidence, rings[1:])
    # The same ring from two beginnings is one explanation: only the better is kept, the other may begin a link.
    ways = [max((item for item in (ring, *more) if _way(item) == _way(ring)), key=_score) for ring in rings]
    ways.sort(key=_score, reverse=True)
    ring = next(item for item in rings if _way(item) == _way(ways[0]))
    first = [item for item in first if item is ring or item not in rings]
    more = [item for item in more if _way(item) == _way(ring)]
    best = [ring]
    if not _settled(frame, ring, first[0], more):
        others: list[Fitted] = []
        for item in first:
            named = {other.shape.id for other in (ring, *others)}
            if item.shape.id not in named and len(others) < KEPT and item.score > first[0].score - 400:
                others.append(item)
        more += _spurs(frame, evidence, others)
        best += others
    spurred = sorted((item for item in more if item.shape.spurs), key=lambda item: -item.score)
    found = [*spurred, *first, *_single_points(frame, evidence, [*spurred, *best])]
    found.sort(key=lambda item: -item.score)
    for way in ways:
        near = len(frame.chain) >= 3 and way.score > found[0].score - NEAR
        if near and (way.shape.spurs & set(frame.chain) or _row(frame, way)):
            found += bridges(frame, evidence, way, _excess(frame, way), fitted)
    return _once(sorted(found, key=_score, reverse=True))


def _score(item: Fitted) -> float:
    return item.score


def _way(item: Fitted) -> int:
    return item.shape.other_way


def _once(found: list[Fitted]) -> list[Fitted]:
    """A link reached from two beginnings counts once."""
    seen: set[Shape] = set()
    out = []
    for item in found:
        shape = replace(item.shape, other_way=0)
        if shape not in seen:
            seen.add(shape)
            out.append(item)
    return out


def _excess(frame: Frame, ring: Fitted) -> Array:
    """How far every point of the chain lies off the ring [ohm of line]: its spur, or what a spur would be."""
    _, ohm = _gain(frame, ring)
    spurs = np.array([ring.spur_ohm(point)[0] for point in range(frame.count)])
    return np.maximum(np.where(spurs > 0, spurs, ohm), 0.0)[list(frame.chain)]


def _row(frame: Frame, ring: Fitted) -> bool:
    """True where neighbours together stand above the ring, though none of them does alone."""
    gain, ohm = _gain(frame, ring)
    signed = (np.sqrt(np.maximum(gain, 0.0)) * np.sign(ohm))[list(frame.chain)]
    reached = np.concatenate(([0.0], np.cumsum(signed)))
    return any(
        (reached[b] - reached[a]) / (b - a) ** 0.5 > IN_A_ROW
        for a in range(len(reached))
        for b in range(a + 2, len(reached))
    )


def _settled(frame: Frame, ring: Fitted, leader: Fitted, spurred: Sequence[Fitted]) -> bool:
    """True where a sound ring, with a few spurs at most, fits well and nothing simpler comes near it."""
    best = max((ring, *spurred), key=lambda item: item.score)
    if best.chi2 > best.used + 2.0 * (2.0 * best.used) ** 0.5 or len(best.shape.spurs) > frame.count / 3 + 1:
        return False
    return leader is ring if not best.shape.spurs else best.score > leader.score + FAR or leader is ring


def _likely_opens(frame: Frame, evidence: Evidence) -> list[Shape]:
    """Of many pairs of breaks only those whose pattern of open readings comes near what was read."""
    shapes = opens(frame, evidence)
    if len(shapes) <= 24:
        return shapes
    specs = specs_of(frame, shapes)
    shown = predict(frame, specs, start_of(frame, evidence, shapes, specs)[:, None, :])[:, 0]
    gone = np.isinf(shown)
    clash = (gone != frame.gone[None, :]) & frame.seen[None, :]
    left = np.where(gone, 0.0, (frame.y - np.where(gone, 0.0, shown)) / 0.1) * (frame.seen & ~frame.gone)
    order = (60.0 * clash.sum(axis=1) + np.minimum(left**2, 25).sum(axis=1)).argsort(kind="stable")
    return [shapes[int(number)] for number in order[:12]]


def _gain(frame: Frame, item: Fitted) -> tuple[Array, Array]:
    """How much chi-squared one spur at each point would take away, and its ohms of line."""
    ratio = float(np.exp(item.theta[1]))
    one, cpc = frame.weights()
    weight = one + cpc * ratio
    finite = np.isfinite(item.shown) & frame.seen & ~frame.gone
    finite[list(item.shape.hidden)] = False
    left = np.where(finite, frame.y - np.where(np.isfinite(item.shown), item.shown, 0.0), 0.0) / frame.sigma
    pull = np.where(finite, weight / frame.sigma, 0.0)
    top = (left * pull)[3:].reshape(5, frame.count).sum(axis=0)
    below = (pull**2)[3:].reshape(5, frame.count).sum(axis=0)
    ohm = np.where(below > 0, top / np.maximum(below, 1e-12), 0.0)
    return np.where(top > 0, top * ohm, 0.0), ohm


def _spurs(frame: Frame, evidence: Evidence, items: list[Fitted]) -> list[Fitted]:
    """Give each of these explanations the spurs that its evidence asks for, the clearest first."""
    always = frozenset(point for point, _ in frame.copies)
    done: list[Fitted] = []
    refused: list[Fitted] = []
    open_items = [replace(item, score=-1e9) if always else item for item in items]
    tried: list[frozenset[int]] = [frozenset()] * len(items)
    for _ in range(frame.count + 2):
        asking: list[tuple[Fitted, Shape]] = []
        left_out: list[frozenset[int]] = []
        for item, out in zip(open_items, tried, strict=True):
            more = _next_spurs(frame, item, out, always)
            if not more:
                done.append(item)
                continue
            asking.append((item, item.shape.with_spurs(item.shape.spurs | more)))
            left_out.append(out)
        if not asking:
            break
        start = _warm(frame, evidence, [item for item, _ in asking], [shape for _, shape in asking])
        answers = fitted(frame, evidence, [shape for _, shape in asking], steps=2, start=start)
        open_items, tried = [], []
        for (before, _), after, out in zip(asking, answers, left_out, strict=True):
            short = frozenset(
                point
                for point in after.shape.spurs - always
                if after.spur_ohm(point)[0] < LEAST_SPUR_M * frame.line_per_m
            )
            if after.score > before.score and not short:
                open_items.append(after)
                tried.append(out)
            else:
                if not short:
                    refused.append(after)
                open_items.append(before)
                tried.append(out | (after.shape.spurs - before.shape.spurs))
    return [*done, *(item for item in open_items if item not in done), *refused]


def _next_spurs(frame: Frame, item: Fitted, out: frozenset[int], always: frozenset[int]) -> frozenset[int]:
    if not always <= item.shape.spurs:
        return always
    gain, ohm = _gain(frame, item)
    for point in (*item.shape.spurs, *out):
        gain[point] = 0.0
    gain[ohm < LEAST_SPUR_M * frame.line_per_m] = 0.0
    clear = frozenset(int(point) for point in np.flatnonzero(gain > 40))
    if clear:
        return clear
    best = int(gain.argmax()) if len(gain) else 0
    return frozenset({best}) if len(gain) and gain[best] > (LEAST_GAIN if not out else ASK_AGAIN) else frozenset()


def _warm(frame: Frame, evidence: Evidence, items: Sequence[Fitted], shapes: Sequence[Shape]) -> Array:
    """Begin the next fit where the last one ended; a first spur begins from the places as read, not as bent to fit."""
    ways = gap_ways(frame, evidence) if evidence.r1_r2 else []
    specs = specs_of(frame, shapes)
    first = specs.mean.shape[1] - len(specs.spurs)
    at = np.zeros_like(specs.mean)
    for row, item in enumerate(items):
        keep = min(first, len(item.theta) - len(item.specs.spurs))
        spread = np.where(specs.spread[row, :keep] > 0, specs.spread[row, :keep], 1.0)
        at[row, :keep] = (item.theta[:keep] - specs.mean[row, :keep]) / spread
        fresh = not item.shape.spurs and item.shape.id == "intact_ring" and not shapes[row].hidden
        if fresh and len(ways) > item.shape.other_way:
            at[row, FIXED : FIXED + len(frame.chain) + 1] = ways[item.shape.other_way]
        _, ohm = _gain(frame, item)
        for column, point in enumerate(specs.spurs):
            if point in shapes[row].spurs:
                value = item.spur_ohm(point)[0] if point in item.shape.spurs else max(float(ohm[point]), 0.0)
                scale = specs.spread[row, first + column]
                at[row, first + column] = (value - specs.mean[row, first + column]) / scale
    return at


def _single_points(frame: Frame, evidence: Evidence, items: Sequence[Fitted]) -> list[Fitted]:
    """The best ring and slips again, without the readings of the one point that fits worst."""
    shapes: list[Shape] = []
    warm: list[Fitted] = []
    ring = [item for item in items if item.shape.id == "intact_ring"]
    for item in [*ring[:2], *(item for item in items[:1] if item not in ring)]:
        for hidden, name in _misfits(frame, evidence, item):
            prior = item.shape.prior + COMMON[name] - log(max(1, frame.count))
            prior += 8.0 if name == "worn_contact" and _unsteady(frame, evidence, hidden) else 0.0
            spurs = item.shape.spurs - {(slot - 3) % frame.count for slot in hidden if slot >= 3}
            key = name if item.shape.id == "intact_ring" else item.shape.id
            shapes.append(
                replace(item.shape, prior=prior, hidden=item.shape.hidden | hidden, spurs=frozenset(spurs), id=key)
            )
            warm.append(item)
    if not shapes:
        return []
    return fitted(frame, evidence, shapes, start=_warm(frame, evidence, warm, shapes))


def _misfits(frame: Frame, evidence: Evidence, item: Fitted) -> list[tuple[frozenset[int], str]]:
    """Points (all their readings) and single readings that stand out, spurs not being believed."""
    out: list[tuple[frozenset[int], str]] = []
    finite = frame.seen & ~frame.gone & np.isfinite(item.shown)
    left = np.where(finite, np.abs(frame.y - np.where(np.isfinite(item.shown), item.shown, 0.0)) / frame.sigma, 0.0)
    blocks = left[3:].reshape(5, frame.count)
    spurs = item.shape.spurs - {point for point, _ in frame.copies}
    suspects = {point for point in spurs if blocks[:, point].max() > 2}
    suspects |= {int(point) for point in np.flatnonzero((blocks > 4).any(axis=0))}
    suspects |= {frame.points.index(point) for point in evidence.unsteady if point in frame.points}
    ranked = sorted(suspects, key=lambda point: -float(blocks[:, point].max()))[:6]
    for point in ranked:
        slots = frozenset(
            frame.slot(test, point)
            for test in BLOCKS
            if frame.seen[frame.slot(test, point)] and not frame.gone[frame.slot(test, point)]
        )
        if len(slots) >= 1:
            out.append((slots, "worn_contact"))
        if len(slots) > 1:
            out += [(frozenset({slot}), "one_reading_off") for slot in slots if left[slot] > 4]
    out += [(frozenset({slot}), "one_reading_off") for slot in range(3) if left[slot] > 5]
    return out[:12]


def _unsteady(frame: Frame, evidence: Evidence, hidden: frozenset[int]) -> bool:
    return any(slot >= 3 and frame.cell(slot)[1] in evidence.unsteady for slot in hidden)
